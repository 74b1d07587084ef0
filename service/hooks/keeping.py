"""Hooks as their owners make, see, change and delete them."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from sqlalchemy import func, select, update
from sqlalchemy.orm import Session

from service.hooks.deliveries import DeliveryTold, Holder, check_on, delivery_told
from service.hooks.outbox import write_test
from service.hooks.sending import give_up_waiting
from service.hooks.signing import first_secrets, rotated
from service.limits import HOOK_LIMITS
from service.store.columns import EPOCH, MICROSECOND
from service.store.ids import new_id
from service.store.tables import Hook, Owner


class HookUnknownError(Exception):
    """The asker has no hook of this id; the text says so."""


class HookExistsError(Exception):
    """The asker has a hook for this address already.

    Attributes:
        hook_id: Its id.
    """

    def __init__(self, hook_id: str) -> None:
        super().__init__(f"the hook {hook_id} has this url already; change that one, or get it a new secret")
        self.hook_id = hook_id


class TooManyHooksError(Exception):
    """The asker has as many hooks as there may be; the text says how many."""


@dataclass(frozen=True, slots=True, kw_only=True)
class HookWish:
    """What a hook shall be.

    Attributes:
        url: Checked by `service.hooks.guard.read_url`.
        types: Types of messages it wants; None for all, also those that are new.
        for_all_orders: Whether it is told of every order of its owner, or of those alone that name it.
    """

    url: str
    types: tuple[str, ...] | None
    for_all_orders: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class HookTold:
    """A hook, as its owner sees it: without its secrets.

    Attributes:
        id: Of the hook.
        url: Where messages go.
        types: Types of messages it wants; None for all.
        for_all_orders: Whether it is told of every order of its owner.
        is_test: Whether it is told of test orders, and of no others.
        created_at: When it was made.
        disabled_at: Since when it gets no messages; None where it does.
        disabled_because: Why.
        quiet_until: Until when it gets no messages, as it asked; None where it does.
        old_secrets_until: Until when a secret from before signs as well; None where none does.
    """

    id: str
    url: str
    types: tuple[str, ...] | None
    for_all_orders: bool
    is_test: bool
    created_at: datetime
    disabled_at: datetime | None
    disabled_because: str | None
    quiet_until: datetime | None
    old_secrets_until: datetime | None


@dataclass(frozen=True, slots=True, kw_only=True)
class HookWithSecret:
    """A hook and its secret, which is shown this once."""

    hook: HookTold
    secret: str


def add_hook(session: Session, holder: Holder, wish: HookWish, *, now: datetime) -> HookWithSecret:
    """Make a hook.

    Args:
        session: Of a transaction that writes.
        holder: Whose it shall be.
        wish: What it shall be.
        now: The moment.

    Raises:
        HookExistsError: The holder has one for this address already, so that an answer which was lost makes no two.
        TooManyHooksError: The holder has as many as there may be.
    """
    # Two askers at a time would both see no such hook: the owner's row makes one wait for the other.
    session.execute(select(Owner.id).where(Owner.id == holder.owner_id).with_for_update(key_share=True))
    _check_new(session, holder, wish.url)
    count = session.scalar(select(func.count()).select_from(Hook).where(*_held(holder)))
    if count is not None and count >= HOOK_LIMITS.per_owner:
        raise TooManyHooksError(f"there are {count} hooks; {HOOK_LIMITS.per_owner} are the most")
    hook = Hook(
        id=new_id("hook", now),
        owner_id=holder.owner_id,
        url=wish.url,
        types=_kept_types(wish.types),
        for_all_orders=wish.for_all_orders,
        is_test=holder.is_test,
        secrets=first_secrets(),
        created_at=now,
    )
    session.add(hook)
    session.flush()
    return HookWithSecret(hook=hook_told(hook, now=now), secret=hook.secrets["current"])


def hooks_of(session: Session, holder: Holder, *, now: datetime) -> tuple[HookTold, ...]:
    """Every hook of a holder, the oldest first."""
    return tuple(
        hook_told(hook, now=now) for hook in session.scalars(select(Hook).where(*_held(holder)).order_by(Hook.id))
    )


def find_hook(session: Session, holder: Holder, hook_id: str, *, now: datetime) -> HookTold:
    """A hook.

    Raises:
        HookUnknownError: There is none, or it is another's.
    """
    return hook_told(_row(session, holder, hook_id), now=now)


def change_hook(session: Session, holder: Holder, hook_id: str, wish: Mapping[str, Any], *, now: datetime) -> HookTold:
    """Change a hook. Messages that wait go where it leads then.

    Args:
        session: Of a transaction that writes.
        holder: Whose it must be.
        hook_id: Of the hook.
        wish: The fields of HookWish that change.
        now: The moment.

    Raises:
        HookUnknownError: There is none, or it is another's.
        HookExistsError: The holder has another one for the new address.
    """
    hook = _row_to_change(session, holder, hook_id)
    if wish.get("url", hook.url) != hook.url:
        session.execute(select(Owner.id).where(Owner.id == holder.owner_id).with_for_update(key_share=True))
        _check_new(session, holder, wish["url"])
        hook.url = wish["url"]
        hook.quiet_until = None  # the address before asked for it
    if "types" in wish:
        hook.types = _kept_types(wish["types"])
    hook.for_all_orders = wish.get("for_all_orders", hook.for_all_orders)
    session.flush()
    return hook_told(hook, now=now)


def rotate_secret(
    session: Session, holder: Holder, hook_id: str, *, now: datetime, old_valid_for: timedelta
) -> HookWithSecret:
    """Get a hook a new secret; the one before signs as well for a while, so that no message is missed.

    Args:
        session: Of a transaction that writes.
        holder: Whose it must be.
        hook_id: Of the hook.
        now: The moment.
        old_valid_for: How long; nothing drops it at once, for a secret that others know. Those before it keep
            their own ends, unless it is nothing: then they are dropped too.

    Raises:
        HookUnknownError: There is none, or it is another's.
    """
    hook = _row_to_change(session, holder, hook_id)
    kept = hook.secrets if old_valid_for else {**hook.secrets, "before": []}
    hook.secrets = rotated(kept, now=now, old_valid_until=now + old_valid_for)
    session.flush()
    return HookWithSecret(hook=hook_told(hook, now=now), secret=hook.secrets["current"])


def enable_hook(session: Session, holder: Holder, hook_id: str, *, now: datetime) -> HookTold:
    """Turn a hook on again; one that is on stays so. What it missed is not sent: `GET /v1/events` tells it.

    Raises:
        HookUnknownError: There is none, or it is another's.
    """
    hook = _row_to_change(session, holder, hook_id)
    hook.disabled_at, hook.disabled_because, hook.quiet_until = None, None, None
    session.flush()
    return hook_told(hook, now=now)


def delete_hook(session: Session, holder: Holder, hook_id: str, *, now: datetime) -> None:
    """Delete a hook, its address and its secrets; what waits for it is given up. Asking twice does no harm.

    Raises:
        HookUnknownError: There never was one, or it is another's.
    """
    own = (Hook.id == hook_id, Hook.owner_id == holder.owner_id, Hook.is_test == holder.is_test)
    known = session.scalar(select(Hook.id).where(*own).with_for_update(key_share=True))
    if known is None:
        raise _unknown(hook_id)
    gone = update(Hook).where(*own, Hook.deleted_at.is_(None))
    session.execute(gone.values(deleted_at=now, url="", secrets={"current": "", "before": []}))
    give_up_waiting(session, hook_id, now=now)


def ask_for_test(session: Session, holder: Holder, hook_id: str, *, now: datetime) -> DeliveryTold:
    """Write a message that tells nothing but that messages arrive. It is tried once.

    Raises:
        HookUnknownError: There is none, or it is another's.
        HookOffError: It is turned off.
    """
    hook = _row(session, holder, hook_id)
    check_on(hook)
    return delivery_told(write_test(session, hook, at=now))


def hook_told(hook: Hook, *, now: datetime) -> HookTold:
    """A row as a value."""
    ends = [EPOCH + one["until"] * MICROSECOND for one in hook.secrets["before"]]
    quiet = hook.quiet_until if hook.quiet_until is not None and hook.quiet_until > now else None
    return HookTold(
        id=hook.id,
        url=hook.url,
        types=tuple(hook.types.split()) if hook.types else None,
        for_all_orders=hook.for_all_orders,
        is_test=hook.is_test,
        created_at=hook.created_at,
        disabled_at=hook.disabled_at,
        disabled_because=hook.disabled_because,
        quiet_until=quiet,
        old_secrets_until=max((end for end in ends if end > now), default=None),
    )


def _held(holder: Holder) -> tuple[Any, ...]:
    return (Hook.owner_id == holder.owner_id, Hook.is_test == holder.is_test, Hook.deleted_at.is_(None))


def _row_to_change(session: Session, holder: Holder, hook_id: str) -> Hook:
    """A hook that no other changes until the commit; messages may be written for it meanwhile."""
    session.execute(select(Hook.id).where(Hook.id == hook_id).with_for_update(key_share=True))
    return _row(session, holder, hook_id)


def _row(session: Session, holder: Holder, hook_id: str) -> Hook:
    hook = session.scalar(select(Hook).where(Hook.id == hook_id, *_held(holder)))
    if hook is None:
        raise _unknown(hook_id)
    return hook


def _check_new(session: Session, holder: Holder, url: str) -> None:
    twin = session.scalar(select(Hook.id).where(Hook.url == url, *_held(holder)))
    if twin is not None:
        raise HookExistsError(twin)


def _unknown(hook_id: str) -> HookUnknownError:
    return HookUnknownError(f"there is no hook {hook_id!r}")


def _kept_types(types: tuple[str, ...] | None) -> str:
    return "" if types is None else " ".join(types)
