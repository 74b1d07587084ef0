"""Browsers that are signed in as a key: by a link that works once, or by the key itself."""

import hmac
from dataclasses import dataclass
from datetime import datetime, timedelta

from sqlalchemy import delete, select, update
from sqlalchemy.orm import Session

from service.access.keys import KeyInForce, in_force
from service.access.secret_texts import digest_of, new_secret
from service.store.store import Store
from service.store.tables import BrowserSession, Key, LoginLink, Owner

LINK_HOLDS = timedelta(minutes=15)


@dataclass(frozen=True, slots=True, kw_only=True)
class SignedIn:
    """A browser that has just been signed in.

    Attributes:
        secret: What its cookie holds.
        csrf_token: What its writes must bring beside the cookie.
        expires_at: Until when.
    """

    secret: str
    csrf_token: str
    expires_at: datetime


@dataclass(frozen=True, slots=True, kw_only=True)
class Browser:
    """A browser that is signed in.

    Attributes:
        key: The key it is signed in as.
        csrf_token: What its writes must bring beside the cookie.
    """

    key: KeyInForce
    csrf_token: str

    def is_token(self, text: str) -> bool:
        """Whether a text is its token; takes the same time for any text of one length."""
        return hmac.compare_digest(digest_of(self.csrf_token), digest_of(text))


def make_link(session: Session, key_id: str, now: datetime) -> str:
    """The secret of a new link that signs one browser in, once, within a quarter of an hour.

    Args:
        session: Of a transaction that writes.
        key_id: The key it signs in as.
        now: When it is made.
    """
    secret = new_secret()
    row = LoginLink(secret_sha256=digest_of(secret), key_id=key_id, expires_at=now + LINK_HOLDS, used_at=None)
    session.add(row)
    session.flush()
    return secret


def sign_in_by_link(store: Store, secret: str, now: datetime, lasts: timedelta) -> SignedIn | None:
    """Use a link up; of two browsers that bring the same at a time, one is signed in.

    Args:
        store: The database.
        secret: Of the link.
        now: When.
        lasts: How long the browser stays signed in.

    Returns:
        None where the link was used, is too old, was never made, or its key is revoked.
    """
    digest = digest_of(secret)
    with store.reading() as session:  # so that guessing never holds the database for writing
        if session.get(LoginLink, digest) is None:
            return None
    with store.writing() as session:
        used = session.execute(
            update(LoginLink)
            .where(LoginLink.secret_sha256 == digest, LoginLink.used_at.is_(None), LoginLink.expires_at > now)
            .values(used_at=now)
            .returning(LoginLink.key_id)
        ).first()
        if used is None:
            return None
        key_id = session.scalars(select(Key.id).where(Key.id == used.key_id, Key.revoked_at.is_(None))).first()
        return None if key_id is None else _signed_in(session, key_id, now, lasts)


def sign_in_as(store: Store, key: KeyInForce, now: datetime, lasts: timedelta) -> SignedIn:
    """Sign a browser in as a key that it has just shown."""
    with store.writing() as session:
        return _signed_in(session, key.asker.key_id, now, lasts)


def find_browser(store: Store, secret: str, now: datetime) -> Browser | None:
    """The browser whose cookie holds this secret; None where it is signed in no more, or never was.

    Raises:
        StoreBusyError: The database does not answer.
    """
    with store.reading() as session:
        row = session.execute(
            select(BrowserSession, Key, Owner)
            .join(Key, Key.id == BrowserSession.key_id)
            .join(Owner, Owner.id == Key.owner_id)
            .where(
                BrowserSession.secret_sha256 == digest_of(secret),
                BrowserSession.expires_at > now,
                Key.revoked_at.is_(None),
            )
        ).first()
    return None if row is None else Browser(key=in_force(row[1], row[2]), csrf_token=row[0].csrf_token)


def sign_out(store: Store, secret: str) -> None:
    """Forget a browser, where it is signed in."""
    with store.writing() as session:
        session.execute(delete(BrowserSession).where(BrowserSession.secret_sha256 == digest_of(secret)))


def sweep_browsers(store: Store, now: datetime) -> int:
    """Forget browsers and links whose time is over; gives how many."""
    with store.writing() as session:
        ended = delete(BrowserSession).where(BrowserSession.expires_at <= now).returning(BrowserSession.key_id)
        spent = delete(LoginLink).where(LoginLink.expires_at <= now).returning(LoginLink.key_id)
        return sum(len(session.execute(one).all()) for one in (ended, spent))


def _signed_in(session: Session, key_id: str, now: datetime, lasts: timedelta) -> SignedIn:
    made = SignedIn(secret=new_secret(), csrf_token=new_secret(), expires_at=now + lasts)
    session.add(
        BrowserSession(
            secret_sha256=digest_of(made.secret),
            key_id=key_id,
            csrf_token=made.csrf_token,
            created_at=now,
            expires_at=made.expires_at,
        )
    )
    session.flush()
    return made
