"""Repeat orders: the files of a released plan again, byte for byte, never planned anew."""

from datetime import datetime

from sqlalchemy import select
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.asked import AskedRepeat
from service.orders.events import add_event
from service.orders.faults import StateForbidsError
from service.orders.finding import order_row
from service.orders.placing import Also
from service.orders.quotes import check_hook
from service.orders.states import EventType, State
from service.orders.views import OrderView, order_view
from service.store.holds import Hold, hold
from service.store.ids import new_id
from service.store.store import Store
from service.store.tables import FileHold, Order, Plan, PlanFile

# What a repeat takes over from the order it repeats.
_TAKEN_OVER = (
    "tune_name",
    "tune_digest",
    "movement_id",
    "movement_revision",
    "movement_digest",
    "cutter_id",
    "cutter_digest",
    "settings_digest",
)


def repeat_order(store: Store, asker: Asker, asked: AskedRepeat, also: Also) -> OrderView:
    """Place an order for the released files of another; it is ready at once, or released where that is asked for.

    Where that plan was released despite findings, a person must decide again.

    Args:
        store: The database.
        asker: Whose order it is; the order repeated must exist for it.
        asked: What is ordered.
        also: What is written in the same transaction.

    Raises:
        OrderUnknownError: There is no such order for the asker.
        StateForbidsError: It is not released, or its files were erased.
    """
    made: list[str] = []

    def repeating(session: Session) -> OrderView:
        now = store.now(session)
        made[:] = made or [new_id("order", now)]
        order = session.get(Order, made[0])
        if order is not None:  # the connection was lost after the commit
            return order_view(session, order)
        first, plan = _released(session, asker, asked.repeat_of)
        check_hook(session, asker, asked.hook_id)
        state = _state_of(plan, asked)
        order = _row(made[0], asker, asked, (first, plan), now)
        order.state = state.value
        order.finished_at = now if state is State.RELEASED else None
        session.add(order)
        session.flush()
        session.add(_plan_again(plan, first, order))
        _take_files_over(session, first, plan, order)
        data = {"reference": asked.reference, "repeat_of": first.id}
        add_event(session, order, EventType.RECEIVED, at=now, by=asker.title, data=data)
        add_event(session, order, EventType(f"order.{state.value}"), at=now, data={"revision": 1})
        view = order_view(session, order)
        also(session, view)
        return view

    return store.again(repeating)


def _released(session: Session, asker: Asker, order_id: str) -> tuple[Order, Plan]:
    first = order_row(session, asker, order_id)
    plan = session.get(Plan, (first.id, first.plan_revision))
    if first.is_test and not asker.is_test:
        raise StateForbidsError(f"the order {first.id} is for tests, and what is made for tests never reaches the shop")
    if first.state != State.RELEASED or plan is None or first.erased_at is not None:
        raise StateForbidsError(f"the order {first.id} is {first.state}; a released one alone can be repeated")
    of_plan = (PlanFile.order_id == first.id, PlanFile.revision == plan.revision)
    if session.scalars(select(PlanFile.name).where(*of_plan).limit(1)).first() is None:
        raise StateForbidsError(f"the files of the order {first.id} were deleted; order again with the tune")
    return first, plan


def _state_of(plan: Plan, asked: AskedRepeat) -> State:
    if plan.release_reason is not None:
        return State.ATTENTION
    return State.RELEASED if asked.release_alone else State.READY


def _row(order_id: str, asker: Asker, asked: AskedRepeat, repeated: tuple[Order, Plan], now: datetime) -> Order:
    first, plan = repeated
    return Order(
        id=order_id,
        owner_id=asker.owner_id,
        key_id=asker.key_id,
        is_test=asker.is_test,
        version=1,
        reference=asked.reference,
        quantity=asked.quantity,
        most_lost_share=first.most_lost_share,
        release_alone=asked.release_alone,
        hook_id=asked.hook_id,
        repeat_of=first.id,
        plan_revision=1,
        reason=_reason(plan),
        created_at=now,
        updated_at=now,
        attempt=0,
        killed=0,
        **{name: getattr(first, name) for name in _TAKEN_OVER},
    )


def _plan_again(plan: Plan, first: Order, order: Order) -> Plan:
    is_released = order.state == State.RELEASED
    return Plan(
        order_id=order.id,
        revision=1,
        engine_version=plan.engine_version,
        inputs={**plan.inputs, "repeat_of": {"order": first.id, "revision": plan.revision}},
        told=plan.told,
        good_to_cut=plan.good_to_cut,
        lost_share=plan.lost_share,
        made_at=plan.made_at,
        released_at=order.created_at if is_released else None,
        released_by="asked for with the order" if is_released else None,
    )


def _reason(plan: Plan) -> str | None:
    if plan.release_reason is None:
        return None
    return f"the plan repeated was released despite findings ({plan.release_reason})"[:500]


def _take_files_over(session: Session, first: Order, plan: Plan, order: Order) -> None:
    files = select(PlanFile).where(PlanFile.order_id == first.id, PlanFile.revision == plan.revision)
    # What else the order repeated holds, of plans before this one, is no part of the repeat, and goes with that order.
    needed = {order.tune_digest, order.movement_digest, order.cutter_digest, order.settings_digest}
    for file in session.scalars(files):
        needed.add(file.digest)
        copied = {column.key: getattr(file, column.key) for column in PlanFile.__mapper__.columns}
        session.add(PlanFile(**{**copied, "order_id": order.id, "revision": 1}))
    for held in session.scalars(select(FileHold).where(FileHold.holder_id == first.id)):
        if held.digest not in needed:
            continue
        hold(session, Hold(digest=held.digest, owner_id=order.owner_id, holder_id=order.id, what=held.what))
