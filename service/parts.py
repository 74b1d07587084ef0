"""The parts that the web, the workers and the commands share, opened once in each process."""

import hashlib
import os
import secrets
from dataclasses import dataclass
from pathlib import Path

from service.settings import ServiceSettings
from service.store.files import FileStore
from service.store.migrating import bring_up_to_date, check_migrated
from service.store.store import Store
from service.variables import SettingsError

SECRET_FILE = "secret"
SECRET_BYTES = 32  # as many as SHA-256 has
OWNER_ONLY = 0o600


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Parts:
    """What a process works with. Opened after a fork, never before.

    Attributes:
        settings: Of the service.
        store: The database, with the tables of this version.
        files: The store of files.
        secret: Signs links and cursors; the same in every process.
    """

    settings: ServiceSettings
    store: Store
    files: FileStore
    secret: bytes

    def secret_for(self, purpose: str) -> bytes:
        """A secret of one purpose alone: what is signed for one cannot be used for another."""
        return hashlib.blake2b(purpose.encode(), key=self.secret, digest_size=SECRET_BYTES).digest()


def open_parts(settings: ServiceSettings) -> Parts:
    """Open what the settings name. An SQLite database is brought to this version's tables; another must be already.

    Raises:
        SettingsError: A folder or a file cannot be made or read.
        StoreError: The database does not answer, or has the tables of another version.
    """
    try:
        settings.places.data_directory.mkdir(parents=True, exist_ok=True)
        secret = _secret(settings)
    except OSError as fault:
        raise SettingsError(
            f"DISCWRIGHT_DATA is {str(settings.places.data_directory)!r}, which cannot be used: {fault.strerror}"
        ) from fault
    store = Store(settings.database_url)
    try:
        if store.is_sqlite:
            bring_up_to_date(store)
        check_migrated(store)
        files = FileStore(settings.files_url)
    except BaseException:
        store.close()
        raise
    return Parts(settings=settings, store=store, files=files, secret=secret)


def _secret(settings: ServiceSettings) -> bytes:
    """The secret asked for, else the one made at the first start; several processes may start at a time."""
    if settings.places.secret:
        return hashlib.sha256(settings.places.secret.encode()).digest()
    path = settings.places.data_directory / SECRET_FILE
    if not path.exists():
        part = Path(f"{path}.{os.getpid()}.part")
        with os.fdopen(os.open(part, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, OWNER_ONLY), "wb") as file:
            file.write(secrets.token_bytes(SECRET_BYTES))
        try:
            os.link(part, path)  # fails where another process was first, whose secret then holds
        except FileExistsError:
            pass
        finally:
            part.unlink()
    return path.read_bytes()
