"""What people decide about an order: release, planning anew, cancelling, and what the shop and a customer report."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import select
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.changing import change
from service.orders.events import add_event
from service.orders.faults import ChangedMeanwhileError, FindingsStandError, StateForbidsError
from service.orders.finding import order_row
from service.orders.placing import Also
from service.orders.states import EventType, State
from service.orders.views import OrderView, PlanView, order_view, plan_view
from service.store.holds import Hold, hold
from service.store.store import Store
from service.store.tables import Event, Order, Plan

REPORTS = {
    "taken": EventType.TAKEN,
    "cut": EventType.CUT,
    "scrapped": EventType.SCRAPPED,
    "measured": EventType.MEASURED,
}
DOCUMENTS = frozenset({"movement_digest", "settings_digest"})  # columns that name what is asked for anew
VERDICTS = {"accepted": EventType.ACCEPTED, "declined": EventType.DECLINED}


@dataclass(frozen=True, slots=True, kw_only=True)
class Release:
    """A person's word that an order may be cut.

    Attributes:
        by: Who, as the person is called.
        plan: The tag of the plan that the person has seen; no other is released.
        despite_findings: Why it may be cut although something stands; None where nothing may stand.
    """

    by: str
    plan: str
    despite_findings: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """An order as the asker knows it, so that nobody decides about what has changed meanwhile.

    Attributes:
        order_id: Which.
        version: The version the asker has seen; None where it does not mind.
    """

    order_id: str
    version: int | None = None


def release_order(store: Store, asker: Asker, seen: Seen, release: Release, also: Also) -> OrderView:
    """Release an order's plan: from now on it never changes, and its cutting files may be taken.

    Despite an error-level finding the plan has no cutting files yet: it goes back to a worker, which makes them,
    marked with the reason, and releases them if the plan is still the one that was seen. Where a person must decide
    for another reason, the reason is kept and it is released.

    Raises:
        OrderUnknownError: There is none for the asker.
        ChangedMeanwhileError: It is not as the asker has seen it, or its plan is another than the one named.
        StateForbidsError: It is neither ready nor waits for a person.
        FindingsStandError: Something stands, and no reason is given.
    """

    def releasing(session: Session, order: Order, now: datetime) -> None:
        state = State(order.state)
        if state not in (State.READY, State.ATTENTION):
            raise StateForbidsError(f"the order is {state}; only one that is ready or in attention can be released")
        plan, shown = _plan(session, order), plan_view(session, order.id, order.plan_revision)
        if shown is None or shown.tag != release.plan:
            in_force = shown and shown.tag
            raise ChangedMeanwhileError(
                f"the plan in force is {in_force}, not {release.plan}, which was seen; look at it, then decide about it"
            )
        if state is State.ATTENTION and release.despite_findings is None:
            raise FindingsStandError(
                f"a person must decide: {order.reason}; give despite_findings, a reason, or replan"
            )
        if not _has_cutting_files(plan, shown, release.despite_findings):
            columns = {"despite_findings": release.despite_findings, "despite_by": release.by, "reason": None}
            _change(session, order, State.RECEIVED, now, columns)
            return
        plan.released_at, plan.released_by = now, release.by
        plan.release_reason = release.despite_findings if state is State.ATTENTION else None
        _change(session, order, State.RELEASED, now, {"reason": None})
        data = {"revision": plan.revision, "despite_findings": plan.release_reason}
        add_event(session, order, EventType.RELEASED, at=now, by=release.by, data=data)

    return _decide(store, asker, seen, releasing, also)


def replan_order(store: Store, asker: Asker, seen: Seen, columns: Mapping[str, Any], also: Also) -> OrderView:
    """Send an order to be planned anew; a released plan is superseded, and never changes.

    Args:
        store: The database.
        asker: Who asks.
        seen: Which order.
        columns: What is asked for anew, as `columns_of` gives it; its documents are held with the change or not at all.
        also: What is written in the same transaction.

    Raises:
        OrderUnknownError, ChangedMeanwhileError: As `release_order`.
        StateForbidsError: It is being planned, or was cancelled.
    """

    def replanning(session: Session, order: Order, now: datetime) -> None:
        state = State(order.state)
        if not order.tune_digest:
            raise StateForbidsError("the order's tune was deleted; order again with the tune")
        if state in (State.PLANNING, State.RECEIVED, State.CANCELLED):
            raise StateForbidsError(f"the order is {state}; it can be planned anew once it is planned, or order again")
        cleared = {"reason": None, "despite_findings": None, "despite_by": None, "killed": 0}
        # The order's row first, the counter of events after it, as everywhere: else two decisions lock each other.
        _change(session, order, State.RECEIVED, now, {**cleared, **columns})
        for name in DOCUMENTS & columns.keys():
            hold(session, Hold(digest=columns[name], owner_id=order.owner_id, holder_id=order.id, what="document"))
        if state is State.RELEASED:
            plan = _plan(session, order)
            plan.superseded_at = now
            data = {"revision": plan.revision}
            add_event(session, order, EventType.SUPERSEDED, at=now, by=asker.title, data=data)

    return _decide(store, asker, seen, replanning, also)


def cancel_order(
    store: Store, asker: Asker, seen: Seen, *, reason: str | None, recalled: bool, also: Also
) -> OrderView:
    """Cancel an order; after its release only where the shop confirms that its files were called back.

    Raises:
        OrderUnknownError, ChangedMeanwhileError: As `release_order`.
        StateForbidsError: It is released and not recalled by the shop, or cancelled already.
    """

    def cancelling(session: Session, order: Order, now: datetime) -> None:
        state = State(order.state)
        if state is State.CANCELLED:
            raise StateForbidsError("the order is cancelled already")
        if state is State.RELEASED and not (recalled and asker.sees_all_owners):
            raise StateForbidsError("the order is released and may have been cut; the shop must confirm its recall")
        if state is State.RELEASED:
            _plan(session, order).superseded_at = now
        columns = {"reason": reason, "taken_by": None, "lease_until": None}
        _change(session, order, State.CANCELLED, now, columns)
        data = {"reason": reason, "recalled": state is State.RELEASED}
        add_event(session, order, EventType.CANCELLED, at=now, by=asker.title, data=data)

    return _decide(store, asker, seen, cancelling, also)


def report_on_order(store: Store, asker: Asker, seen: Seen, what: str, told: dict[str, Any], also: Also) -> OrderView:
    """Write down what the shop says of a released order: taken, cut, scrapped or measured.

    Args:
        store: The database.
        asker: Who says so.
        seen: Which order.
        what: A key of REPORTS.
        told: What is told beside, such as a count or measures.
        also: What is written in the same transaction.

    Raises:
        OrderUnknownError, ChangedMeanwhileError: As `release_order`.
        StateForbidsError: It is not released.
    """

    def reporting(session: Session, order: Order, now: datetime) -> None:
        if order.state != State.RELEASED:
            raise StateForbidsError(f"the order is {order.state}; what was made is reported of a released order")
        _change(session, order, State.RELEASED, now, {})
        data = {"revision": order.plan_revision, **told}
        add_event(session, order, REPORTS[what], at=now, by=asker.title, data=data)

    return _decide(store, asker, seen, reporting, also)


def customer_says(store: Store, order_id: str, revision: int, verdict: str, *, by: str, note: str | None) -> OrderView:
    """Write down that a customer accepted or declined a proof; what follows is the shop's to decide.

    The same said again at once is written once.

    Args:
        store: The database.
        order_id: Which, by the signed link.
        revision: The plan that was seen.
        verdict: A key of VERDICTS.
        by: Who, as the person is called.
        note: What is said beside.

    Raises:
        StateForbidsError: The order does not wait for a decision any more, or was planned anew since.
    """

    def saying(session: Session) -> OrderView:
        order = session.get(Order, order_id, with_for_update=True)
        waits = order is not None and order.state in (State.READY, State.ATTENTION)
        if order is None or not waits or order.plan_revision != revision:
            raise StateForbidsError("this proof is not the one to decide about any more; ask for a new link")
        data = {"revision": revision, "note": note}
        if not _is_last_said(session, order, VERDICTS[verdict], by, data):
            now = store.now(session)
            _change(session, order, State(order.state), now, {})
            add_event(session, order, VERDICTS[verdict], at=now, by=by, data=data)
        return order_view(session, order)

    return store.again(saying)


def _is_last_said(session: Session, order: Order, kind: EventType, by: str, data: Mapping[str, Any]) -> bool:
    """Whether the last thing a customer said is just this: sent twice, or written before the connection was lost."""
    verdicts = select(Event).where(Event.order_id == order.id, Event.type.in_([one.value for one in VERDICTS.values()]))
    last = session.scalars(verdicts.order_by(Event.seq.desc()).limit(1)).first()
    return last is not None and (last.type, last.by, last.data) == (kind.value, by, data)


def _decide(
    store: Store, asker: Asker, seen: Seen, decide: Callable[[Session, Order, datetime], None], also: Also
) -> OrderView:
    def deciding(session: Session) -> OrderView:
        order = order_row(session, asker, seen.order_id, to_decide=True)
        if seen.version not in (None, order.version):
            raise ChangedMeanwhileError(f"the order is at version {order.version}, not {seen.version}; read it again")
        if order.erased_at is not None:
            raise StateForbidsError("the order was deleted; nothing more is decided about it")
        decide(session, order, store.now(session))
        session.flush()
        view = order_view(session, order)
        also(session, view)
        return view

    with store.writing() as session:
        return deciding(session)


def _change(session: Session, order: Order, to: State, now: datetime, columns: Mapping[str, Any]) -> None:
    if not change(session, order, to, at=now, columns=columns):
        raise ChangedMeanwhileError("the order was changed at the same moment; read it again")


def _has_cutting_files(plan: Plan, shown: PlanView, reason: str | None) -> bool:
    """Whether they were made, and say why they may be cut: not where an error stands and nobody had said why.

    Those of a repeat are given as they were, with the reason from before.
    """
    says_why = plan.good_to_cut or "repeat_of" in plan.inputs or plan.inputs.get("despite_findings") == reason
    return says_why and any(file.is_for_cutting for file in shown.files)


def _plan(session: Session, order: Order) -> Plan:
    plan = session.get(Plan, (order.id, order.plan_revision))
    if plan is None:
        raise StateForbidsError("the order has no plan yet")
    return plan
