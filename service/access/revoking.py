"""Revocations that outlive the database: a backup does not know what was revoked after it.

Each is noted beside the files, as deletions are, and a restore revokes again what is noted.
"""

from collections.abc import Iterable
from datetime import datetime

from sqlalchemy import delete, select, update
from sqlalchemy.orm import Session

from service.access.keys import KeyTold, revoke_key
from service.store.files import FileStore
from service.store.store import Store
from service.store.tables import BrowserSession, Key, LoginLink


def revoke_for_good(
    store: Store, files: FileStore, key_id: str, now: datetime, *, owner_id: str | None = None
) -> KeyTold | None:
    """Revoke a key, and note it. Where the note fails the key is revoked all the same; asking again notes it.

    Args:
        store: The database.
        files: Gets the note.
        key_id: Of the key.
        now: When.
        owner_id: Whose it must be; None for any owner's.

    Returns:
        The key as it is then; None where there is none, or it is another owner's.

    Raises:
        StoreError: It is not known to be revoked, or not noted.
    """
    key = revoke_key(store, key_id, now, owner_id=owner_id)
    if key is not None:
        files.note(key.id)
    return key


def note_revoked(store: Store, files: FileStore) -> None:
    """Note every key that is revoked: also one whose note was cut off, or that another program revoked."""
    with store.reading() as session:
        revoked = session.scalars(select(Key.id).where(Key.revoked_at.is_not(None))).all()
    for key_id in revoked:
        files.note(key_id)


def revoke_again(session: Session, key_ids: Iterable[str], now: datetime) -> int:
    """Revoke in a restored database what was revoked since its backup, and sign all browsers out.

    A link that was used up and a browser that was signed out since would open again; whoever is there signs in anew.

    Returns:
        How many keys.
    """
    count = 0
    for key_id in key_ids:
        again = update(Key).where(Key.id == key_id, Key.revoked_at.is_(None)).values(revoked_at=now)
        count += len(session.scalars(again.returning(Key.id)).all())
    session.execute(delete(BrowserSession))
    session.execute(delete(LoginLink))
    return count
