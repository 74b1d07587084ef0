"""A backup of the service: a folder with the database, the files, the secret, and the notes of what was ended.

The database is copied first and the files after it: what was taken in meanwhile is in the next backup, and what the
copy names is there. PostgreSQL is dumped and loaded by its own programs; this module then sees to the rest.

A restore reads the notes of both the backup and what stands now, and ends again what was ended since: orders and hooks
that were deleted, hooks that were turned off, and keys that were revoked.
"""

import json
import os
import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from sqlalchemy import make_url, select

from layout.version import ENGINE_VERSION
from service.access.revoking import note_revoked, revoke_again
from service.hooks.stopping import note_all_stopped, stop_again
from service.moments import moment_text, utc_now
from service.orders.erasing import erase_again
from service.orders.events import EVENTS
from service.parts import SECRET_FILE, Parts, open_parts
from service.settings import ServiceSettings
from service.store.files import FileLostError, FileStore
from service.store.migrating import NEWEST
from service.store.tables import Counter, FileHold, StoredFile

FORMAT = "discwright-backup/1"
ABOUT_NAME, DATABASE_NAME, FILES_NAME = "backup.json", "database.sqlite", "files"
PART = ".part"
OWNER_ONLY, OWNER_ONLY_FOLDER = 0o600, 0o700
# Events that were counted after a backup are lost with it, but who has read them asks for those past their numbers.
# After a restore the numbers go on so far ahead that none is given twice: more than any shop counts between backups.
LEAP = 1_000_000


class BackupError(Exception):
    """A backup cannot be made or used; the text is one line that says why and what to do."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BackedUp:
    """What a backup holds.

    Attributes:
        has_database: Whether the database is in it; PostgreSQL is dumped by its own program.
        file_count: Files.
        copied_count: Of them, those that were not in the folder before.
        lost: Digests of files that the database names and the store of files has not.
    """

    has_database: bool
    file_count: int
    copied_count: int
    lost: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Restored:
    """What a restore brought back.

    Attributes:
        has_database: Whether the database came from the backup.
        file_count: Files brought back.
        erased_count: Orders that were deleted again.
        revoked_count: Keys that were revoked again.
        stopped_count: Hooks that were deleted or turned off again.
        removed_count: Files removed that the restored database does not know.
        lost: Digests of files that the database names and neither the backup nor the store of files has.
    """

    has_database: bool
    file_count: int
    erased_count: int
    revoked_count: int
    stopped_count: int
    removed_count: int
    lost: tuple[str, ...]


def back_up(parts: Parts, folder: Path) -> BackedUp:
    """Make a backup in a folder, or bring the one in it up to date: files that are there already are not copied again.

    The service may run meanwhile.

    Raises:
        BackupError: The folder cannot be written, or the copy of the database is not whole.
        StoreError: The database or the store of files does not answer.
    """
    with _told(folder):
        folder.mkdir(mode=OWNER_ONLY_FOLDER, parents=True, exist_ok=True)
        os.chmod(folder, OWNER_ONLY_FOLDER)
        copy = folder / f"{DATABASE_NAME}{PART}"
        wanted = _copied_database(parts, copy) if parts.store.is_sqlite else set(parts.files.digests())
        kept = FileStore(_files_url(folder))
        there = set(kept.digests())
        lost = _copy_files(parts.files, kept, wanted - there)
        if parts.store.is_sqlite:
            os.replace(copy, folder / DATABASE_NAME)
        for digest in there - wanted:  # what was deleted is deleted from the backup too
            kept.remove(digest)
        note_revoked(parts.store, parts.files)
        note_all_stopped(parts.store, parts.files)
        for ended in parts.files.noted():
            kept.note(ended)
        _copy_secret(parts.settings.places.data_directory, folder)
        about = {
            "format": FORMAT,
            "made_at": moment_text(utc_now()),
            "engine_version": ENGINE_VERSION,
            "tables": NEWEST,
            "has_database": parts.store.is_sqlite,
        }
        _write_whole(folder / ABOUT_NAME, json.dumps(about, indent=2).encode())
    copied = len(wanted - there) - len(lost)
    return BackedUp(
        has_database=parts.store.is_sqlite,
        file_count=len(wanted) - len(lost),
        copied_count=copied,
        lost=lost,
    )


def restore(settings: ServiceSettings, folder: Path, *, may_replace: bool) -> Restored:
    """Bring a backup back. The service must not run meanwhile; on PostgreSQL the dump is loaded first.

    Args:
        settings: Where to.
        folder: Of the backup.
        may_replace: Whether an SQLite database that holds anything may be overwritten.

    Raises:
        BackupError: The folder is no backup, or something stands where it would be brought to.
        StoreError: The database or the store of files does not answer.
    """
    with _told(folder):
        about = _about(folder)
        kept, files = FileStore(_files_url(folder)), FileStore(settings.files_url)
        for ended in kept.noted():  # first of all: whatever happens from here on, they are not forgotten
            files.note(ended)
        before = _Before()
        target = make_url(settings.database_url)
        if target.get_backend_name() == "sqlite":
            if not about["has_database"]:
                raise BackupError(f"{folder} has no database of SQLite in it; load its dump into PostgreSQL")
            before = _bring_back(folder / DATABASE_NAME, Path(str(target.database)), may_replace=may_replace)
        settings.places.data_directory.mkdir(parents=True, exist_ok=True)
        _copy_secret(folder, settings.places.data_directory, keep=True)
        parts = open_parts(settings)
        try:
            return _completed(parts, kept, before)
        finally:
            parts.store.close()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Before:
    """What the database that is overwritten knew: the last event's number, and keys that were revoked."""

    events: int | None = None
    revoked: tuple[str, ...] = ()


def _completed(parts: Parts, kept: FileStore, before: _Before) -> Restored:
    noted = list(parts.files.noted())
    erased = erase_again(parts.store, [one for one in noted if one.startswith("order_")])
    with parts.store.writing() as session:
        now = parts.store.now(session)
        revoked = revoke_again(session, {*noted, *before.revoked}, now)
        stopped = stop_again(session, noted, now)
        counted = session.get_one(Counter, EVENTS)
        counted.value = max(counted.value, before.events or 0) + (LEAP if before.events is None else 0)
    with parts.store.reading() as session:
        held = set(session.scalars(select(FileHold.digest).distinct()))
        known = set(session.scalars(select(StoredFile.digest)))
    there = set(parts.files.digests())
    lost = _copy_files(kept, parts.files, held - there)
    unknown = there - known
    for digest in unknown:
        parts.files.remove(digest)
    return Restored(
        has_database=parts.store.is_sqlite,
        file_count=len(held - there) - len(lost),
        erased_count=erased,
        revoked_count=revoked,
        stopped_count=stopped,
        removed_count=len(unknown),
        lost=lost,
    )


def _copied_database(parts: Parts, copy: Path) -> set[str]:
    """Copy an SQLite database that may be in use, as it is at one moment; gives the digests of the files it needs."""
    copy.unlink(missing_ok=True)
    os.close(os.open(copy, os.O_WRONLY | os.O_CREAT, OWNER_ONLY))
    database = str(parts.store.engine.url.database)
    with closing(sqlite3.connect(database)) as source, closing(sqlite3.connect(copy)) as target:
        source.backup(target)  # at one go: who writes meanwhile writes beside it
        target.execute("PRAGMA journal_mode = DELETE")  # one file, with nothing beside it
        [[whole]] = target.execute("PRAGMA integrity_check(1)").fetchall()
        if whole != "ok":
            raise BackupError(f"the copy of the database is damaged ({whole}); check the disk that holds {database}")
        return {digest for [digest] in target.execute("SELECT DISTINCT digest FROM file_holds")}


def _bring_back(copy: Path, target: Path, *, may_replace: bool) -> _Before:
    if not copy.exists():
        raise BackupError(f"{copy} is missing; this backup is not whole")
    target.parent.mkdir(parents=True, exist_ok=True)
    before = _before(target) if target.exists() else _Before()
    if before.events and not may_replace:
        raise BackupError(f"{target} holds orders already; stop the service, then add --replace to overwrite them")
    with closing(sqlite3.connect(copy)) as source, closing(sqlite3.connect(target, timeout=1)) as into:
        try:
            into.execute("PRAGMA journal_mode = DELETE")  # refused while another has it open, even one at rest
            source.backup(into)  # one transaction: after a failure the database is what it was
        except sqlite3.OperationalError as fault:
            raise BackupError(f"{target} is in use; stop the service first") from fault
    return before


def _before(target: Path) -> _Before:
    with closing(sqlite3.connect(target, timeout=1)) as database:
        tables = {name for [name] in database.execute("SELECT name FROM sqlite_master")}
        if not {"counters", "keys"} <= tables:
            return _Before()
        counted = database.execute("SELECT value FROM counters WHERE name = ?", (EVENTS,)).fetchone()
        revoked = database.execute("SELECT id FROM keys WHERE revoked_at IS NOT NULL").fetchall()
    return _Before(events=counted[0] if counted else None, revoked=tuple(key_id for [key_id] in revoked))


def _copy_files(source: FileStore, target: FileStore, digests: set[str]) -> tuple[str, ...]:
    """Copy files; gives the digests of those that the source has not, or not whole."""
    lost = []
    for digest in sorted(digests):
        try:
            if target.put(source.read(digest)) != digest:
                lost.append(digest)
        except FileLostError:
            lost.append(digest)
    return tuple(lost)


def _copy_secret(source: Path, target: Path, *, keep: bool = False) -> None:
    """Copy the service's own secret, where there is one; `keep` one that is there already."""
    if (source / SECRET_FILE).exists() and not (keep and (target / SECRET_FILE).exists()):
        _write_whole(target / SECRET_FILE, (source / SECRET_FILE).read_bytes())


def _about(folder: Path) -> dict[str, Any]:
    try:
        about: dict[str, Any] = json.loads((folder / ABOUT_NAME).read_text(encoding="utf-8"))
        if about["format"] != FORMAT:
            raise BackupError(
                f"{folder} is a backup of another form, {about['format']!r}; use the version that made it"
            )
    except (FileNotFoundError, ValueError, KeyError, TypeError) as fault:
        raise BackupError(f"{folder} is no backup, or one that never came to its end") from fault
    return about


def _files_url(folder: Path) -> str:
    return f"file://{(folder / FILES_NAME).absolute()}"


def _write_whole(path: Path, content: bytes) -> None:
    part = path.with_name(f"{path.name}{PART}")
    with os.fdopen(os.open(part, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, OWNER_ONLY), "wb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())
    os.replace(part, path)


@contextmanager
def _told(folder: Path) -> Iterator[None]:
    try:
        yield
    except OSError as fault:
        raise BackupError(f"{fault.filename or folder} cannot be used: {fault.strerror or fault}") from fault
    except sqlite3.Error as fault:
        raise BackupError(f"the database cannot be copied: {fault}") from fault
