"""Hooks that are told nothing any more, noted beside the files: a backup does not know what was stopped after it.

A deleted hook that came back with it would be sent what its owner does not want to be sent, to an address that may
be another's by now.
"""

from collections.abc import Iterable
from datetime import datetime

from sqlalchemy import or_, select, update
from sqlalchemy.orm import Session

from service.hooks.sending import give_up_waiting
from service.store.files import FileStore
from service.store.store import Store
from service.store.tables import Hook

DELETED = "hook_"  # begins the note of a deleted hook, which is its id
OFF = "off_"  # stands before the id of a hook that was turned off
OFF_BEFORE = "had been turned off before a backup was restored"


def note_stopped(store: Store, files: FileStore, hook_id: str) -> None:
    """Bring the note about a hook in line with what the hook is, after it was deleted, turned off or on again.

    Raises:
        StoreError: It could not be done; doing it again does no harm.
    """
    with store.reading() as session:
        hook = session.get(Hook, hook_id)
    if hook is None:
        return
    if hook.deleted_at is not None:
        files.note(hook_id)
    if hook.disabled_at is not None:
        files.note(f"{OFF}{hook_id}")
    else:
        files.forget_note(f"{OFF}{hook_id}")


def note_all_stopped(store: Store, files: FileStore) -> None:
    """Note every hook that is deleted or turned off: also one whose note was cut off."""
    with store.reading() as session:
        stopped = select(Hook.id).where(or_(Hook.deleted_at.is_not(None), Hook.disabled_at.is_not(None)))
        hook_ids = session.scalars(stopped).all()
    for hook_id in hook_ids:
        note_stopped(store, files, hook_id)


def stop_again(session: Session, noted: Iterable[str], now: datetime) -> int:
    """Delete and turn off in a restored database the hooks that were since its backup.

    Args:
        session: Of a transaction that writes.
        noted: All notes; those about other things are left aside.
        now: The moment.

    Returns:
        How many hooks.
    """
    stopped = set()
    for note in noted:
        hook_id = note.removeprefix(OFF)
        if not hook_id.startswith(DELETED):
            continue
        is_on = update(Hook).where(Hook.id == hook_id, Hook.deleted_at.is_(None))
        if note == hook_id:
            again = is_on.values(deleted_at=now, url="", secrets={"current": "", "before": []})
        else:
            again = is_on.where(Hook.disabled_at.is_(None)).values(disabled_at=now, disabled_because=OFF_BEFORE)
        if session.scalars(again.returning(Hook.id)).first() is not None:
            give_up_waiting(session, hook_id, now=now)
            stopped.add(hook_id)
    return len(stopped)
