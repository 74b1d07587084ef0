"""Keys: made, found by their secret, listed, revoked."""

import hmac
import logging
import re
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import datetime, timedelta

from sqlalchemy import Select, delete, or_, select, text, update
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.access.owners import OwnerTold, hold_access
from service.access.scopes import Scope, in_order, scopes_of
from service.access.secret_texts import could_be_key, digest_of, new_key_secret
from service.store.faults import StoreError
from service.store.ids import new_id
from service.store.store import BUSY_TIMEOUT_S, Store
from service.store.tables import BrowserSession, Key, LoginLink, Owner

log = logging.getLogger("discwright")

KEY_ID = re.compile("key_[0-9a-f]{32}")  # other texts are no ids, and some no database takes
NOTE_WITHIN_MS = 100  # ms; longer than a transaction of the service takes, short enough not to be felt
USE_NOTED_EVERY = timedelta(minutes=1)  # so that reading stays reading: one write a minute for each key


@dataclass(frozen=True, slots=True, kw_only=True)
class KeyTold:
    """A key, as it may be shown.

    Attributes:
        id: Of the key.
        owner: Whose it is.
        title: What it is called.
        scopes: What it may do, in order.
        is_test: Whether its orders never reach the shop.
        created_at: When it was made.
        last_used_at: When it was last used, to a minute; None: never.
        revoked_at: Since when it opens nothing; None: it is in force.
    """

    id: str
    owner: OwnerTold
    title: str
    scopes: tuple[Scope, ...]
    is_test: bool
    created_at: datetime
    last_used_at: datetime | None
    revoked_at: datetime | None


@dataclass(frozen=True, slots=True, kw_only=True)
class NewKey:
    """A key just made, with its secret, which is told this once and kept nowhere.

    Attributes:
        told: The key.
        secret: What requests are made with.
    """

    told: KeyTold
    secret: str


@dataclass(frozen=True, slots=True, kw_only=True)
class KeyAsked:
    """What a new key shall be.

    Attributes:
        title: What it is called; checked.
        scopes: What it may do; at least one.
        is_test: Whether its orders never reach the shop.
    """

    title: str
    scopes: frozenset[Scope]
    is_test: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class KeyInForce:
    """A key that opens something.

    Attributes:
        asker: Who asks with it.
        last_used_at: As it stands in the database.
    """

    asker: Asker
    last_used_at: datetime | None


def make_key(session: Session, owner: OwnerTold, asked: KeyAsked, now: datetime) -> NewKey:
    """Make a key.

    Args:
        session: Of a transaction that writes.
        owner: Whose it is.
        asked: What it shall be.
        now: When it is made.
    """
    secret = new_key_secret()
    row = Key(
        id=new_id("key", now),
        owner_id=owner.id,
        title=asked.title,
        secret_sha256=digest_of(secret),
        scopes=" ".join(in_order(asked.scopes)),
        is_test=asked.is_test,
        created_at=now,
        last_used_at=None,
        revoked_at=None,
    )
    session.add(row)
    session.flush()
    return NewKey(told=_told(row, owner), secret=secret)


def find_key(store: Store, secret: str) -> KeyInForce | None:
    """The key in force that has this secret, or None.

    A key that never was and one that was revoked take the same way through here, so that neither the answer nor
    the time it takes tells them apart.

    Raises:
        StoreBusyError: The database does not answer.
    """
    digest = digest_of(secret)
    with store.reading() as session:
        row = session.execute(_keys_and_owners().where(Key.secret_sha256 == digest)).first()
    kept = row[0].secret_sha256 if row else "0" * len(digest)
    # The database looked the digest up, not the secret; comparing again in constant time trusts no index with it.
    same = hmac.compare_digest(kept, digest) and could_be_key(secret)
    return in_force(row[0], row[1]) if row and same and row[0].revoked_at is None else None


def in_force(key: Key, owner: Owner) -> KeyInForce:
    """A key's row as the rest of the service sees it."""
    asker = Asker(
        key_id=key.id,
        owner_id=owner.id,
        title=key.title,
        is_shop=owner.is_shop,
        is_test=key.is_test,
        scopes=scopes_of(key.scopes.split()),
    )
    return KeyInForce(asker=asker, last_used_at=key.last_used_at)


def note_use(store: Store, key: KeyInForce, now: datetime) -> bool:
    """Note that a key is used now, where the last note is more than a minute old.

    The request goes on where the note cannot be written at once: that is no reason to hold up one that only reads.

    Returns:
        Whether it was written, by this process.
    """
    before = now - USE_NOTED_EVERY
    if key.last_used_at is not None and key.last_used_at > before:
        return False
    stale = or_(Key.last_used_at.is_(None), Key.last_used_at <= before)
    try:
        with _writing_at_once(store) as session:
            wanted = update(Key).where(Key.id == key.asker.key_id, stale).values(last_used_at=now)
            return session.execute(wanted.returning(Key.id)).first() is not None
    except StoreError as fault:
        log.warning("the use of key %s is not noted: %s", key.asker.key_id, fault)
        return False


def list_keys(
    store: Store, *, owner_id: str | None = None, after: str = "", most: int | None = None
) -> tuple[KeyTold, ...]:
    """Keys, revoked ones too, the oldest first; none where there are none.

    Args:
        store: The database.
        owner_id: Whose; None for those of all owners.
        after: An id; only keys made after that one. "" for all.
        most: How many at most; None for all.
    """
    wanted = _keys_and_owners().where(Key.id > after).order_by(Key.id)
    if owner_id is not None:
        wanted = wanted.where(Key.owner_id == owner_id)
    with store.reading() as session:
        return tuple(_told(key, _owner_told(owner)) for key, owner in session.execute(wanted.limit(most)))


def key_of_id(store: Store, key_id: str) -> KeyTold | None:
    """The key of an id, in force or not; None where there is none."""
    wanted = _keys_and_owners().where(Key.id == key_id)
    with store.reading() as session:
        row = session.execute(wanted).first() if KEY_ID.fullmatch(key_id) else None
        return None if row is None else _told(row[0], _owner_told(row[1]))


def revoke_key(store: Store, key_id: str, now: datetime, *, owner_id: str | None = None) -> KeyTold | None:
    """Make a key open nothing any more, nor the browsers signed in as it. A revoked one stays as it is.

    Args:
        store: The database.
        key_id: Of the key.
        now: When.
        owner_id: Whose it must be; None for any owner's.

    Returns:
        The key as it is then; None where there is none, or it is another owner's.
    """
    wanted = _keys_and_owners().where(Key.id == key_id)
    if owner_id is not None:
        wanted = wanted.where(Key.owner_id == owner_id)
    with store.writing() as session:
        hold_access(session)
        row = session.execute(wanted).first() if KEY_ID.fullmatch(key_id) else None
        if row is None:
            return None
        key, owner = row
        key.revoked_at = key.revoked_at or now
        session.execute(delete(BrowserSession).where(BrowserSession.key_id == key_id))
        session.execute(delete(LoginLink).where(LoginLink.key_id == key_id))
        return _told(key, _owner_told(owner))


@contextmanager
def _writing_at_once(store: Store) -> Iterator[Session]:
    """A transaction that gives up where another is writing, instead of waiting its turn.

    It is none of `Store.writing`, which waits before the first statement. The connection waits as before when this
    one is done with it.
    """
    with store.reading() as session:
        if not store.is_sqlite:
            session.execute(text(f"SET LOCAL lock_timeout = {NOTE_WITHIN_MS}"))
            yield session
            return
        session.execute(text(f"PRAGMA busy_timeout = {NOTE_WITHIN_MS}"))
        try:
            yield session
        finally:
            session.execute(text(f"PRAGMA busy_timeout = {BUSY_TIMEOUT_S * 1000}"))


def _keys_and_owners() -> Select[Key, Owner]:
    return select(Key, Owner).join(Owner, Owner.id == Key.owner_id)


def _owner_told(owner: Owner) -> OwnerTold:
    return OwnerTold(id=owner.id, title=owner.title, is_shop=owner.is_shop)


def _told(key: Key, owner: OwnerTold) -> KeyTold:
    return KeyTold(
        id=key.id,
        owner=owner,
        title=key.title,
        scopes=in_order(scopes_of(key.scopes.split())),
        is_test=key.is_test,
        created_at=key.created_at,
        last_used_at=key.last_used_at,
        revoked_at=key.revoked_at,
    )
