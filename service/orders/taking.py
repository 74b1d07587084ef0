"""What a worker does with an order: takes it, holds it, publishes its plan, or gives it back.

A worker holds an order by a lease and a number of its attempt. Each change it makes is guarded by both, so a
worker that slept past its lease can do no harm: its result changes no row and is thrown away. Doing an order
twice is only waste, for planning gives the same bytes every time.
"""

import secrets
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from sqlalchemy import or_, select, update
from sqlalchemy.orm import Session

from service.orders.changing import change
from service.orders.events import add_event
from service.orders.planned import PlannedFile, PlannedOrder
from service.orders.states import EventType, State
from service.store.holds import Hold, hold
from service.store.store import Store
from service.store.tables import Order, Plan, PlanFile

WAITS_TOO_LONG_S = 10  # s; a message takes milliseconds, so an order that waits longer has lost its own
LEAST_SHARE = 5e-5  # half of the hundredth of a percent that a share is told to
REASON_CHARACTERS = 500  # as the column


@dataclass(frozen=True, slots=True, kw_only=True)
class Taken:
    """An order in a worker's hands.

    Attributes:
        order_id: Its id.
        attempt: The number of this attempt; part of every guard.
        tune_digest: Its inputs, in the store of files.
        movement_digest: So.
        cutter_digest: So.
        settings_digest: So.
        not_good: Why it is made despite findings; None where it is not.
        is_test: Whether it never reaches the shop.
    """

    order_id: str
    attempt: int
    tune_digest: str
    movement_digest: str
    cutter_digest: str
    settings_digest: str
    not_good: str | None
    is_test: bool


def take(store: Store, order_id: str, *, worker: str, lease_s: float, most_attempts: int) -> Taken | None:
    """Take an order to plan it, if it waits or its lease has run out.

    An order that has cost `most_attempts` workers their lives fails here: looking only when one raises would
    let it kill for ever.

    Args:
        store: The database.
        order_id: Which.
        worker: Who takes it, for the log and for people.
        lease_s: How long it is held without renewing.
        most_attempts: How many workers may die of it.

    Returns:
        None where there is nothing to do: another holds it, it is planned already, or it failed just now.
    """
    mine = f"{worker}:{secrets.token_hex(4)}"  # apart from what this worker's other slots take

    def taking(session: Session) -> Taken | None:
        order = session.get(Order, order_id)
        if order is None:
            return None
        if order.state == State.PLANNING and order.taken_by == mine:  # the connection was lost after the commit
            return _taken(order)
        now = store.now(session)
        lost = order.state == State.PLANNING and order.lease_until is not None and order.lease_until <= now
        if order.state != State.RECEIVED and not lost:
            return None
        killed = order.killed + int(lost)
        if killed >= most_attempts:
            reason = f"planning it ended its worker {killed} times; simplify the tune or the settings, and order again"
            _fail(session, order, reason, now, {"killed": killed})
            return None
        columns = {
            "attempt": order.attempt + 1,
            "taken_by": mine,
            "lease_until": now + timedelta(seconds=lease_s),
            "killed": killed,
        }
        return _taken(order) if change(session, order, State.PLANNING, at=now, columns=columns) else None

    return store.again(taking)


def renew(store: Store, taken: Taken, lease_s: float) -> bool:
    """Hold an order for longer; False where it is not held any more, and work on it should stop."""

    def renewing(session: Session) -> bool:
        held = (Order.id == taken.order_id, Order.state == State.PLANNING, Order.attempt == taken.attempt)
        until = store.now(session) + timedelta(seconds=lease_s)
        longer = update(Order).where(*held).values(lease_until=until)
        return bool(session.execute(longer).rowcount)  # type: ignore[attr-defined]

    return store.again(renewing)


def publish(store: Store, taken: Taken, planned: PlannedOrder) -> bool:
    """Make a plan the order's own, with its files, its event and what hooks are told, all or nothing.

    The files must stand in the store of files already.

    Returns:
        False where the order is not held any more; the plan is then thrown away.
    """

    def publishing(session: Session) -> bool:
        order = _held(session, taken)
        if order is None:
            return False
        now = store.now(session)
        revision = order.plan_revision + 1
        state, reason = _verdict(order, planned, session.get(Plan, (order.id, order.plan_revision)))
        released = state is State.RELEASED
        plan = Plan(
            order_id=order.id,
            revision=revision,
            engine_version=planned.engine_version,
            inputs=_inputs_of(order),
            told=planned.told,
            good_to_cut=planned.good_to_cut,
            lost_share=planned.lost_share,
            made_at=now,
            released_at=now if released else None,
            released_by=(order.despite_by or "asked for with the order") if released else None,
            release_reason=order.despite_findings if released else None,
        )
        columns = {**_LET_GO, "plan_revision": revision, "reason": reason, "killed": 0}
        if not released:  # a word that it may be cut is for what was seen, and is used up
            columns |= {"despite_findings": None, "despite_by": None}
        if not change(session, order, state, at=now, columns=columns):
            return False
        session.add(plan)
        hold(session, *(_held_for(order, file) for file in planned.files))
        session.add_all(_row_of(order, revision, file) for file in planned.files)
        add_event(session, order, EventType.PLANNED, at=now, data={"revision": revision, "state": state.value})
        data: dict[str, Any] = {"revision": revision, **({} if reason is None else {"reason": reason})}
        add_event(session, order, EventType(f"order.{state.value}"), at=now, by=plan.released_by, data=data)
        return True

    return store.again(publishing)


def hand_back(store: Store, taken: Taken) -> bool:
    """Give an order back, for another worker to plan; False where it was not held any more."""

    def handing(session: Session) -> bool:
        order = _held(session, taken)
        return order is not None and change(session, order, State.RECEIVED, at=store.now(session), columns=_LET_GO)

    return store.again(handing)


def fail(store: Store, taken: Taken, reason: str) -> bool:
    """End an order that cannot be planned; False where it was not held any more."""

    def failing(session: Session) -> bool:
        order = _held(session, taken)
        return order is not None and _fail(session, order, reason, store.now(session), {})

    return store.again(failing)


def waiting(store: Store, *, most: int) -> list[str]:
    """Orders whose message may be lost: they wait too long, or their lease has run out. Oldest first."""
    with store.reading() as session:
        now = store.now(session)
        forgotten = (Order.state == State.RECEIVED) & (Order.updated_at <= now - timedelta(seconds=WAITS_TOO_LONG_S))
        lost = (Order.state == State.PLANNING) & (Order.lease_until <= now)
        asked = select(Order.id).where(or_(forgotten, lost)).order_by(Order.updated_at, Order.id).limit(most)
        return list(session.scalars(asked))


_LET_GO: Mapping[str, Any] = {"taken_by": None, "lease_until": None}


def _taken(order: Order) -> Taken:
    return Taken(
        order_id=order.id,
        attempt=order.attempt,
        tune_digest=order.tune_digest,
        movement_digest=order.movement_digest,
        cutter_digest=order.cutter_digest,
        settings_digest=order.settings_digest,
        not_good=order.despite_findings,
        is_test=order.is_test,
    )


def _held_for(order: Order, file: PlannedFile) -> Hold:
    return Hold(digest=file.digest, owner_id=order.owner_id, holder_id=order.id, what="result")


def _row_of(order: Order, revision: int, file: PlannedFile) -> PlanFile:
    return PlanFile(
        order_id=order.id,
        revision=revision,
        disc=file.disc,
        name=file.name,
        digest=file.digest,
        byte_count=file.byte_count,
        media_type=file.media_type,
        saved_as=file.saved_as,
        is_for_cutting=file.is_for_cutting,
    )


def _held(session: Session, taken: Taken) -> Order | None:
    order = session.get(Order, taken.order_id)
    holds = order is not None and order.state == State.PLANNING and order.attempt == taken.attempt
    return order if holds else None


def _verdict(order: Order, planned: PlannedOrder, seen: Plan | None) -> tuple[State, str | None]:
    """The state that a plan leads to, and why a person must decide.

    Args:
        order: As it is.
        planned: The plan.
        seen: The plan in force until now: the one that was seen by who said that it may be cut despite findings.
    """
    if order.despite_findings is not None:
        if seen is not None and _laid_out(seen.told) == _laid_out(planned.told):
            return State.RELEASED, None
        return (
            State.ATTENTION,
            f"made again for its release it came out otherwise than revision {order.plan_revision}, which was seen; "
            "look at this one, then decide about it",
        )
    if not planned.good_to_cut:
        count = sum(disc["findings"]["error"] for disc in planned.told["discs"])
        return State.ATTENTION, f"{count} error-level finding{'s' if count > 1 else ''}: it is not good to cut as it is"
    if planned.lost_share > order.most_lost_share + LEAST_SHARE:
        return (
            State.ATTENTION,
            f"{planned.lost_share:.2%} of the tune is lost, and {order.most_lost_share:.2%} was said to be the most",
        )
    return (State.RELEASED if order.release_alone else State.READY), None


def _laid_out(told: Mapping[str, Any]) -> list[str]:
    return [str(disc.get("layout_sha256")) for disc in told["discs"]]


def _inputs_of(order: Order) -> dict[str, Any]:
    return {
        "tune_sha256": order.tune_digest,
        "movement": {
            "id": order.movement_id,
            "revision": order.movement_revision,
            "sha256": order.movement_digest,
        },
        "cutter": {"id": order.cutter_id, "sha256": order.cutter_digest},
        "settings_sha256": order.settings_digest,
        "despite_findings": order.despite_findings,
    }


def _fail(session: Session, order: Order, reason: str, now: datetime, columns: Mapping[str, Any]) -> bool:
    told = reason if len(reason) <= REASON_CHARACTERS else reason[: REASON_CHARACTERS - 1] + "…"
    if not change(session, order, State.FAILED, at=now, columns={**_LET_GO, **columns, "reason": told}):
        return False
    add_event(session, order, EventType.FAILED, at=now, data={"reason": told})
    return True
