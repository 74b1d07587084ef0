"""Who holds which file, and for what: files are kept once, and each owner's holds are counted apart.

Nobody can tell from an answer whether another owner holds the same file: keeping asks nothing and tells nothing.

A file is first noted in the database, then written, and held when the rows that name it are written. A sweep
removes files that nobody holds, noted long enough ago, inside the transaction that removes their notes: so a file
noted anew is either spared or, once the sweep is through, written anew.
"""

import hashlib
from collections.abc import Sequence
from dataclasses import asdict, dataclass
from datetime import timedelta

from sqlalchemy import delete, exists, select
from sqlalchemy.orm import Session

from service.store.files import FileStore
from service.store.inserting import insert_into
from service.store.store import Store
from service.store.tables import FileHold, StoredFile

SPARED_S = 3600  # s; how long a noted file waits for its first hold: far longer than an order takes to be planned


@dataclass(frozen=True, slots=True, kw_only=True)
class Hold:
    """One reason to keep a file.

    Attributes:
        digest: Of the file.
        owner_id: For whom.
        holder_id: The order, quote or run that needs it.
        what: "tune", "document" or "result".
    """

    digest: str
    owner_id: str
    holder_id: str
    what: str


class FileKeeper:
    """Keeps files under their digests so that no sweep takes them before they are held."""

    def __init__(self, store: Store, files: FileStore) -> None:
        self._store = store
        self._files = files

    def keep(self, contents: Sequence[bytes]) -> list[str]:
        """Note and write files; those that are there already cost little. Gives their digests, in order.

        Raises:
            StoreError: They could not be kept.
        """
        sizes = {hashlib.sha256(content).hexdigest(): len(content) for content in contents}

        def noting(session: Session) -> None:
            now = self._store.now(session)
            # In one order, so that two keepers cannot lock each other.
            rows = [{"digest": digest, "byte_count": size, "created_at": now} for digest, size in sorted(sizes.items())]
            noted = insert_into(session, StoredFile)
            session.execute(noted.on_conflict_do_update(index_elements=["digest"], set_={"created_at": now}), rows)

        if sizes:
            self._store.again(noting)
        return [self._files.put(content) for content in contents]

    def read(self, digest: str) -> bytes:
        """A file, whole."""
        return self._files.read(digest)


def hold(session: Session, *holds: Hold) -> None:
    """Hold files that were kept; holding one again changes nothing."""
    if holds:
        session.execute(insert_into(session, FileHold).on_conflict_do_nothing(), [asdict(one) for one in holds])


def let_go(session: Session, *, holder_id: str, what: str | None = None) -> None:
    """End an order's, quote's or run's holds, all of them or those of one kind."""
    ended = delete(FileHold).where(FileHold.holder_id == holder_id)
    session.execute(ended if what is None else ended.where(FileHold.what == what))


def sweep_files(store: Store, files: FileStore, *, most: int) -> list[str]:
    """Remove files that nobody holds and that were noted long enough ago; gives their digests."""
    removed: list[str] = []
    while len(removed) < most and (digest := _sweep_one(store, files)) is not None:
        removed.append(digest)
    return removed


def _sweep_one(store: Store, files: FileStore) -> str | None:
    with store.writing() as session:
        is_held = exists().where(FileHold.digest == StoredFile.digest)
        is_old = StoredFile.created_at <= store.now(session) - timedelta(seconds=SPARED_S)
        found = select(StoredFile.digest).where(~is_held, is_old).order_by(StoredFile.created_at).limit(1)
        digest = session.scalars(found.with_for_update(skip_locked=True)).first()
        if digest is not None:
            unheld = delete(StoredFile).where(StoredFile.digest == digest, ~is_held).returning(StoredFile.digest)
            # Where it came to be held since it was found, it stays. It is removed inside the transaction, as the
            # module says; if that ends here, a note without a file is left, which the next keeper or sweep mends.
            if session.scalars(unheld).first() is not None:
                files.remove(digest)
        return digest
