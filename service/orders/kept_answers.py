"""Answers kept for an Idempotency-Key, so that a request sent twice does its work once.

A request first claims its key, then works, then writes its answer in the very transaction that did the work:
there is never one without the other. A claim is renewed while its request works; one whose request never came to its
end, since its process was killed, runs out within seconds and may be taken over.
"""

import logging
import threading
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import timedelta
from typing import Any

from sqlalchemy import delete, update
from sqlalchemy.orm import Session

from service.store.faults import StoreError
from service.store.ids import new_id
from service.store.inserting import insert_into
from service.store.store import Store
from service.store.tables import KeptAnswer

ABOUT = "Content-Location"  # the field of an answer's head that says what it tells of
# s; how long whoever sends a request again waits where its process was killed. Most requests are done in a hundredth.
CLAIMED_S = 9
RENEWALS = 3  # tries within that, so that two may fail
RENEWING = "renew a claim"  # the name of a thread

log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, kw_only=True)
class AskedOnce:
    """A request that asks to be done once.

    Attributes:
        owner_id: Who asks; keys of owners are apart.
        operation: Method and path.
        key: Its Idempotency-Key.
        digest: Of what it brings, by the digests of its parts.
    """

    owner_id: str
    operation: str
    key: str
    digest: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Claim:
    """The right to do a request's work."""

    asked: AskedOnce
    token: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Given:
    """An answer as it was given; its body is empty where what it told of was deleted since."""

    status: int
    headers: Mapping[str, str]
    body: bytes


class StillRunningError(Exception):
    """The same request is being answered at this moment."""


class AnotherRequestError(Exception):
    """The key was used for a request that brought something else."""


def claim_or_answer(store: Store, asked: AskedOnce, *, kept_days: int) -> Claim | Given:
    """The right to do the work, or the answer that was given when it was done.

    Raises:
        StillRunningError: The same request is being answered.
        AnotherRequestError: The key was used for something else.
        StoreBusyError: The database does not answer.
    """
    with store.writing() as session:
        now = store.now(session)
        kept = session.get(KeptAnswer, (asked.owner_id, asked.operation, asked.key), with_for_update=True)
        if kept is not None and kept.expires_at <= now:
            session.delete(kept)
            session.flush()
            kept = None
        if kept is not None and kept.digest != asked.digest:
            raise AnotherRequestError
        if kept is not None and kept.status is not None:
            return Given(status=kept.status, headers=kept.headers or {}, body=kept.body or b"")
        if kept is not None and kept.lease_until > now:
            raise StillRunningError
        claim = Claim(asked=asked, token=new_id("claim", now))
        row: dict[str, Any] = {
            "digest": asked.digest,
            "token": claim.token,
            "started_at": now,
            "lease_until": now + timedelta(seconds=CLAIMED_S),
            "expires_at": now + timedelta(days=kept_days),
        }
        if kept is not None:
            session.execute(update(KeptAnswer).where(*_row_of(asked)).values(row))
        elif not _inserted(session, asked, row):
            raise StillRunningError  # another claimed it between our look and our insert
        return claim


@contextmanager
def renewed(store: Store, claim: Claim) -> Iterator[None]:
    """Renew a claim until the end of the block; one that cannot be renewed may be taken over, which does no harm."""
    ended = threading.Event()

    def renew() -> None:
        while not ended.wait(CLAIMED_S / RENEWALS):
            try:
                with store.writing() as session:
                    until = store.now(session) + timedelta(seconds=CLAIMED_S)
                    session.execute(update(KeptAnswer).where(*_open_claim(claim)).values(lease_until=until))
            except StoreError as fault:
                log.warning("the claim of an Idempotency-Key could not be renewed: %s", fault)

    threading.Thread(target=renew, name=RENEWING, daemon=True).start()
    try:
        yield
    finally:
        ended.set()


def keep_answer(session: Session, claim: Claim, given: Given) -> None:
    """Write the answer into the transaction that did the work.

    Raises:
        StillRunningError: Another took the claim over; the transaction must not be committed.
    """
    values = {
        "status": given.status,
        "headers": dict(given.headers),
        "body": given.body,
        "about": given.headers.get(ABOUT, "").rpartition("/")[2] or None,
    }
    mine = update(KeptAnswer).where(*_row_of(claim.asked), KeptAnswer.token == claim.token).values(values)
    if session.execute(mine).rowcount == 0:  # type: ignore[attr-defined]
        raise StillRunningError


def empty_answers(session: Session, about: str) -> None:
    """Take from kept answers what they tell of something; that their requests were done is still known.

    Args:
        session: Of the transaction that deletes it.
        about: Its id.
    """
    session.execute(update(KeptAnswer).where(KeptAnswer.about == about).values(body=b""))


def give_up(store: Store, claim: Claim) -> None:
    """Let a claim go whose work was refused or failed: nothing was done, and the key may be used again."""
    with store.writing() as session:
        session.execute(delete(KeptAnswer).where(*_open_claim(claim)))


def forget_answers(store: Store) -> int:
    """Remove answers that have been kept long enough; gives how many."""
    with store.writing() as session:
        old = delete(KeptAnswer).where(KeptAnswer.expires_at <= store.now(session))
        return int(session.execute(old).rowcount)  # type: ignore[attr-defined]


def _inserted(session: Session, asked: AskedOnce, row: dict[str, Any]) -> bool:
    named = {"owner_id": asked.owner_id, "operation": asked.operation, "key": asked.key}
    new = insert_into(session, KeptAnswer).values({**named, **row}).on_conflict_do_nothing()
    return session.scalars(new.returning(KeptAnswer.token)).first() is not None


def _open_claim(claim: Claim) -> tuple[Any, ...]:
    return (*_row_of(claim.asked), KeptAnswer.token == claim.token, KeptAnswer.status.is_(None))


def _row_of(asked: AskedOnce) -> tuple[Any, ...]:
    return (
        KeptAnswer.owner_id == asked.owner_id,
        KeptAnswer.operation == asked.operation,
        KeptAnswer.key == asked.key,
    )
