"""The archive of a run while it is opened: it loses the tunes of orders that are deleted.

A run that has been opened holds no archive, since each order holds its own tune.
"""

import io
import zipfile
from collections.abc import Collection

from sqlalchemy import select, update
from sqlalchemy.orm import Session

from service.orders.archives import FAULTS
from service.store.files import FileLostError, FileStore
from service.store.holds import FileKeeper, Hold, hold, let_go
from service.store.store import Store
from service.store.tables import Run, RunItem

LONG_AGO = (1980, 1, 1, 0, 0, 0)  # the earliest time of a ZIP file: that of its own entries tells nothing


def trim_archive(store: Store, files: FileStore, run_id: str) -> None:
    """Leave in the archive of a run the tunes alone that its waiting pairs need.

    A tune that another pair waits for stays, since that pair is an order of its own. Doing it twice does no harm.

    Args:
        store: The database.
        files: Where the archive is.
        run_id: The run.

    Raises:
        StoreError: It could not be done; the archive is as it was.
    """
    while (seen := _seen(store, run_id)) is not None:
        digest, needed = seen
        try:
            trimmed = _with_these(files.read(digest), needed)
        except FileLostError:
            return
        if trimmed is None:
            return
        [new_digest] = FileKeeper(store, files).keep([trimmed])
        with store.writing() as session:
            if _replaced(session, run_id, digest, new_digest):
                return
        # Another order of the run was deleted at the same moment: once more, with what is left now.


def _seen(store: Store, run_id: str) -> tuple[str, frozenset[str]] | None:
    """The digest of the archive, and the tunes that pairs wait for; None where the run holds no archive any more."""
    with store.reading() as session:
        run = session.get(Run, run_id)
        if run is None or run.opened_at is not None:
            return None
        waiting = (RunItem.run_id == run_id, RunItem.order_id.is_(None), RunItem.refused.is_(None))
        return run.archive_digest, frozenset(session.scalars(select(RunItem.tune_name).where(*waiting)))


def _with_these(content: bytes, needed: Collection[str]) -> bytes | None:
    """An archive with these of its tunes and nothing else; None where it holds nothing else already."""
    out = io.BytesIO()
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
            if {entry.filename for entry in old.infolist()} <= set(needed):
                return None
            for entry in old.infolist():
                if entry.filename in needed:
                    _copy(old, entry, new)
    except FAULTS:
        return b""  # no pair can be had from it
    return out.getvalue()


def _copy(old: zipfile.ZipFile, entry: zipfile.ZipInfo, new: zipfile.ZipFile) -> None:
    """Copy a tune; one that is damaged, or more than it says, is left out as it would be refused."""
    try:
        with old.open(entry) as packed:
            tune = packed.read(entry.file_size + 1)
    except FAULTS:
        return
    if len(tune) <= entry.file_size:
        new.writestr(zipfile.ZipInfo(entry.filename, LONG_AGO), tune, zipfile.ZIP_DEFLATED)


def _replaced(session: Session, run_id: str, digest: str, new_digest: str) -> bool:
    still = update(Run).where(Run.id == run_id, Run.archive_digest == digest, Run.opened_at.is_(None))
    done = session.execute(still.values(archive_digest=new_digest).returning(Run.owner_id)).scalar_one_or_none()
    if done is None:
        return False
    let_go(session, holder_id=run_id)
    hold(session, Hold(digest=new_digest, owner_id=done, holder_id=run_id, what="tune"))
    return True
