"""One message tried: taken with a lease, sent outside any transaction, the result written by a guarded update.

At least once: whoever is killed between sending and writing leaves a lease that runs out, and the message goes out
again, with the same id. So a receiver remembers the ids it has seen.
"""

import logging
import secrets
import ssl
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from email.utils import parsedate_to_datetime
from http import HTTPStatus
from typing import Any

from sqlalchemy import or_, update
from sqlalchemy.orm import Session

from layout.version import ENGINE_VERSION
from service.hooks.guard import (
    AddressRefusedError,
    Resolver,
    Rules,
    UrlError,
    checked_addresses,
    read_url,
    system_resolver,
)
from service.hooks.outbox import DELIVERED, FAILED, WAITING
from service.hooks.posting import Answer, Message, PostError, post
from service.hooks.signing import signed_headers, valid_secrets
from service.limits import HOOK_LIMITS
from service.parts import Parts
from service.store.tables import Delivery, Hook, Owner

log = logging.getLogger("discwright")

# Waits between tries, as Standard Webhooks 1.0.0 proposes them (section "Deliverability and reliability"): at once,
# then after 5 s, 5 min, 30 min, 2 h, 5 h, 10 h, 14 h, 20 h and 24 h; three days in all.
WAITS = tuple(timedelta(seconds=s) for s in (0, 5, 300, 1800, 7200, 18_000, 36_000, 50_400, 72_000, 86_400))
# "The receiver is overloaded" in the specification's words; 503 says so where it names a time.
OVERRUN = (HTTPStatus.TOO_MANY_REQUESTS, HTTPStatus.BAD_GATEWAY, HTTPStatus.GATEWAY_TIMEOUT)
TURNED_OFF = "the hook is turned off"


def _jitter() -> float:
    return secrets.randbelow(1_000_000) / 1_000_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Ways:
    """How messages get out.

    Attributes:
        resolve: Looks names up.
        tls: Whose certificates are believed.
        jitter: A new number from 0 up to 1 at each call.
    """

    resolve: Resolver = system_resolver
    tls: ssl.SSLContext = field(default_factory=ssl.create_default_context)
    jitter: Callable[[], float] = _jitter


@dataclass(frozen=True, slots=True, kw_only=True)
class Taken:
    """A message that this process sends now.

    Attributes:
        id: Of the message.
        hook_id: Of the hook.
        url: Of the hook, as it is now.
        secrets: Those that sign now.
        is_own: Whether the hook is the shop's own.
        is_test: Whether it tells of no event.
        body: What is told.
        tries: How many this one makes.
        at: When it was taken.
        lease_until: When another may take it.
    """

    id: str
    hook_id: str
    url: str
    secrets: tuple[str, ...]
    is_own: bool
    is_test: bool
    body: str
    tries: int
    at: datetime
    lease_until: datetime


@dataclass(frozen=True, slots=True, kw_only=True)
class Result:
    """What came of a try: an answer, or the reason for which there is none."""

    answer: Answer | None
    error: str | None

    @property
    def is_success(self) -> bool:
        """Whether the hook took the message: 2xx and nothing else."""
        return self.answer is not None and HTTPStatus(200) <= self.answer.status < HTTPStatus(300)


def take(session: Session, delivery_id: str, *, now: datetime, lease: timedelta) -> Taken | None:
    """Take a message that is due, or see that another has it.

    A message to a hook that was turned off or deleted after it was written is given up here.

    Args:
        session: Of a transaction that writes.
        delivery_id: Of the message.
        now: The moment, as all processes agree on it.
        lease: How long it is this process's.

    Returns:
        None where it is not due, or the hook gets no messages.
    """
    delivery = session.get(Delivery, delivery_id)
    if delivery is None or delivery.state != WAITING or delivery.next_try_at is None or delivery.next_try_at > now:
        return None
    hook = session.get_one(Hook, delivery.hook_id)
    until = now + lease
    is_off = hook.disabled_at is not None or hook.deleted_at is not None
    new: dict[str, Any] = {"tries": delivery.tries + 1, "lease_until": until, "next_try_at": until}
    if is_off:
        new = {"state": FAILED, "next_try_at": None, "lease_until": None, "last_error": TURNED_OFF, "finished_at": now}
    guarded = update(Delivery).where(
        Delivery.id == delivery.id,
        Delivery.state == WAITING,
        Delivery.tries == delivery.tries,
        Delivery.next_try_at == delivery.next_try_at,
    )
    tries = delivery.tries + 1
    taken = session.execute(guarded.values(**new).execution_options(synchronize_session=False))
    if taken.rowcount != 1 or is_off:  # type: ignore[attr-defined]
        return None
    return Taken(
        id=delivery.id,
        hook_id=hook.id,
        url=hook.url,
        secrets=valid_secrets(hook.secrets, now=now),
        is_own=session.get_one(Owner, hook.owner_id).is_shop,
        is_test=delivery.event_seq is None,
        body=delivery.body,
        tries=tries,
        at=now,
        lease_until=until,
    )


def lease_of(parts: Parts) -> timedelta:
    """How long a message is one process's: longer than sending it can take."""
    return timedelta(seconds=parts.settings.hooks.timeout_s + HOOK_LIMITS.lease_beyond_s)


def send(parts: Parts, taken: Taken, ways: Ways) -> Result:
    """Send a message that was taken, and write what came of it. No transaction is open meanwhile.

    Raises:
        StoreError: The result could not be written; the message will be sent again when its lease has run out.
    """
    started = time.monotonic()
    result = _tried(parts, taken, ways)
    now = taken.at + timedelta(seconds=time.monotonic() - started)
    parts.store.again(lambda session: write_result(session, taken, result, now=now, jitter=ways.jitter()))
    if not result.is_success:
        log.warning("hook %s did not take %s on try %d: %s", taken.hook_id, taken.id, taken.tries, told(result))
    return result


def write_result(session: Session, taken: Taken, result: Result, *, now: datetime, jitter: float) -> bool:
    """Write what came of a try, unless the message has become another's meanwhile.

    Args:
        session: Of a transaction that writes.
        taken: The message.
        result: What came of it.
        now: When the answer came, or was given up.
        jitter: From 0 up to 1.

    Returns:
        Whether it was written.
    """
    wait = _next_wait(taken, result, now=now, jitter=jitter)
    new: dict[str, Any] = {
        "state": DELIVERED if result.is_success else FAILED if wait is None else WAITING,
        "next_try_at": None if wait is None else now + wait,
        "lease_until": None,
        "last_status": None if result.answer is None else result.answer.status,
        "last_error": None if result.is_success else told(result),
        "finished_at": now if wait is None else None,
    }
    guarded = update(Delivery).where(
        Delivery.id == taken.id,
        Delivery.state == WAITING,
        Delivery.tries == taken.tries,
        Delivery.lease_until == taken.lease_until,
    )
    written = session.execute(guarded.values(**new).execution_options(synchronize_session=False))
    if written.rowcount != 1:  # type: ignore[attr-defined]
        return False
    if result.answer is not None:
        _heed(session, taken, result.answer, now=now)
    return True


def give_up_waiting(session: Session, hook_id: str, *, now: datetime) -> None:
    """Give up every message that waits for a hook, but for those being sent at this moment.

    Args:
        session: Of a transaction that writes.
        hook_id: Of a hook that is turned off or deleted.
        now: The moment.
    """
    session.execute(
        update(Delivery)
        .where(Delivery.hook_id == hook_id, Delivery.state == WAITING)
        .where(or_(Delivery.lease_until.is_(None), Delivery.lease_until <= now))
        .values(state=FAILED, next_try_at=None, lease_until=None, last_error=TURNED_OFF, finished_at=now)
        .execution_options(synchronize_session=False)
    )


def told(result: Result) -> str:
    """A result in a few words."""
    if result.answer is None:
        return result.error or "no answer"
    status = result.answer.status
    if HTTPStatus(300) <= status < HTTPStatus(400):
        return f"answered {status}: redirects are not followed; set the hook's url to where it leads"
    return f"answered {status}"


def retry_after(text: str | None, *, now: datetime) -> timedelta | None:
    """What the header field Retry-After asks for, in seconds or as a date (RFC 9110, section 10.2.3).

    Args:
        text: As it came.
        now: The moment.

    Returns:
        From nothing to a day; None where it asks for nothing that can be read.
    """
    if text is None:
        return None
    text = text.strip()
    if text.isascii() and text.isdigit():
        asked = timedelta(seconds=min(int(text[:9]), HOOK_LIMITS.retry_after_s))
    else:
        try:
            named = parsedate_to_datetime(text)
        except ValueError:
            return None
        asked = (named if named.tzinfo else named.replace(tzinfo=UTC)) - now
    return max(timedelta(0), min(asked, timedelta(seconds=HOOK_LIMITS.retry_after_s)))


def _tried(parts: Parts, taken: Taken, ways: Ways) -> Result:
    # Only the shop's own hooks may reach its own networks: an integrator shall not look around in there.
    rules = Rules(
        networks=parts.settings.hooks.networks if taken.is_own else (), allow_http=parts.settings.hooks.allow_http
    )
    body = taken.body.encode()
    headers = {
        "Content-Type": "application/json",
        "User-Agent": f"discwright/{ENGINE_VERSION}",
        **signed_headers(taken.id, body, at=taken.at, valid_secrets=taken.secrets),
    }
    try:
        target = read_url(taken.url, rules)
        addresses = checked_addresses(target, rules, resolve=ways.resolve)
        answer = post(
            target,
            addresses,
            Message(headers=headers, body=body),
            tls=ways.tls,
            within_s=parts.settings.hooks.timeout_s,
        )
    except (UrlError, AddressRefusedError, PostError) as fault:
        return Result(answer=None, error=str(fault)[:300])
    return Result(answer=answer, error=None)


def _next_wait(taken: Taken, result: Result, *, now: datetime, jitter: float) -> timedelta | None:
    """How long until the next try; None where there is none."""
    gone = result.answer is not None and result.answer.status == HTTPStatus.GONE
    if result.is_success or gone or taken.is_test or taken.tries >= len(WAITS):
        return None
    wait = WAITS[taken.tries] * (1 + HOOK_LIMITS.jitter_percent / 100 * jitter)
    asked = None if result.answer is None else retry_after(result.answer.retry_after, now=now)
    return wait if asked is None else max(wait, asked)


def _heed(session: Session, taken: Taken, answer: Answer, *, now: datetime) -> None:
    """What an answer asks for beside: to be left alone, for a while or for good."""
    # A hook that was given another address meanwhile did not ask for anything.
    same = update(Hook).where(Hook.id == taken.hook_id, Hook.url == taken.url)
    if answer.status == HTTPStatus.GONE:
        off = same.where(Hook.disabled_at.is_(None)).values(disabled_at=now, disabled_because="answered 410 Gone")
        if session.execute(off).rowcount == 1:  # type: ignore[attr-defined]
            give_up_waiting(session, taken.hook_id, now=now)
        return
    asked = retry_after(answer.retry_after, now=now)
    if answer.status in OVERRUN or (answer.status == HTTPStatus.SERVICE_UNAVAILABLE and asked is not None):
        until = now + (timedelta(seconds=HOOK_LIMITS.quiet_s) if asked is None else asked)
        session.execute(same.where(or_(Hook.quiet_until.is_(None), Hook.quiet_until < until)).values(quiet_until=until))
