"""/orders: the orders there are, one order with all that was done about it, and each of its discs."""

from urllib.parse import urlencode

from flask import Blueprint, Request, Response, redirect, request

from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.asking import needs
from service.api.cursors import Cursors
from service.api.models.orders import MOST_REVISION, OrdersQuery
from service.api.order_answers import order_told
from service.api.order_files import file_of
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.orders.finding import Sought, events_of, find_order, list_orders
from service.orders.states import EventType, State
from service.orders.views import EventView, OrderView, PlanView, plan_view
from service.pages.disc import disc_page
from service.pages.disc_told import cautions_for
from service.pages.orders_discs import OrderDiscQuery, cutter_of, disc_of_plan, layouts_of, settings_text
from service.pages.orders_files import discs_told, files_told
from service.pages.orders_plans import plans_told
from service.pages.orders_sheets import SHEET, sheet_picture, sheet_told
from service.pages.orders_told import (
    decisions_of,
    event_told,
    facts_of,
    listed,
    name_of,
    next_of,
    state_words,
)
from service.pages.page_views import gives_page
from service.pages.rendering import page
from service.parts import Parts

MOST_EVENTS = 1000  # of an order's story that are shown; some 20 happen to a busy order
MOST_PLANS = 50  # the newest; each costs a look into the database


def orders_routes(parts: Parts) -> Blueprint:
    """The pages of orders.

    Args:
        parts: What orders are kept in.
    """
    routes = Blueprint("order_pages", __name__)
    cursors = Cursors(parts.secret_for("cursor"))

    @routes.get("/orders")
    @gives_page
    @needs(Scope.READ)
    def show_orders(asker: Asker) -> Response:
        if any(not value for value in request.args.values()):  # a form sends the fields that nobody filled in too
            said = {name: value for name, value in request.args.items() if value}
            return _led_to(f"/orders?{urlencode(said)}" if said else "/orders")
        return _list_page(parts, cursors, asker, request)

    @routes.get("/orders/<order_id>")
    @gives_page
    @needs(Scope.READ)
    def show_order(asker: Asker, order_id: str) -> Response:
        return _order_page(parts, asker, order_id, request)

    @routes.get("/orders/<order_id>/discs/<int:disc>")
    @gives_page
    @needs(Scope.READ)
    def show_disc(asker: Asker, order_id: str, disc: int) -> Response:
        return _disc_page(parts, asker, (order_id, disc), request)

    @routes.get("/orders/<order_id>/discs/<int:disc>/work-sheet/<int:number>.png")
    @gives_page
    @needs(Scope.READ)
    def show_work_sheet(asker: Asker, order_id: str, disc: int, number: int) -> Response:
        _, plan = _plan_asked(parts, asker, order_id, request)
        return sheet_picture(parts, file_of(plan, disc, SHEET), number, request)

    return routes


def _led_to(address: str) -> Response:
    answer = redirect(address, 303)
    return Response(answer.get_data(), status=303, headers={"Location": address}, content_type=answer.content_type)


def _list_page(parts: Parts, cursors: Cursors, asker: Asker, asked: Request) -> Response:
    query = read_arguments(asked, OrdersQuery)
    after = None if query.after is None else cursors.read(query.after)
    sought = Sought(
        state=query.state,
        reference=query.reference,
        updated_since=query.updated_since,
        run_id=query.run,
        test=query.test,
    )
    with parts.store.reading() as session:
        found, more = list_orders(session, asker, sought, after=after, most=query.limit, newest_first=True)
    said = asked.args.to_dict()
    further = None if more is None else f"/orders?{urlencode({**said, 'after': cursors.make(more)})}"
    first = {name: value for name, value in said.items() if name != "after"}
    return page(
        asked,
        "orders.html",
        orders=[listed(order) for order in found],
        further=further,
        first=None if after is None else f"/orders?{urlencode(first)}" if first else "/orders",
        is_narrowed=bool(first),
        said=said,
        states=[(state.value, state_words(state)) for state in State],
        shows_tests=query.test or asker.is_test,
        may_choose_tests=not asker.is_test,
    )


def _order_page(parts: Parts, asker: Asker, order_id: str, asked: Request) -> Response:
    order, plans, events = _looked_up(parts, asker, order_id)
    told = order_told(order)
    plan = order.plan
    cutter = None if plan is None else cutter_of(parts, plan)
    return page(
        asked,
        "order.html",
        scripts=("orders",),
        order=order,
        name=name_of(order),
        told=told,
        state=state_words(order.state),
        next=next_of(order),
        decisions=decisions_of(order, asker),
        facts=facts_of(order),
        discs=discs_told(order, told, layouts_of(parts, plan)),
        files=files_told(order, told),
        sheets=()
        if plan is None
        else [sheet_told(parts, order.id, plan, disc["number"]) for disc in plan.told["discs"]],
        plans=plans_told(parts, order, plans, events),
        events=[event_told(event) for event in events],
        cautions=() if cutter is None else cautions_for(cutter.kind),
        settings=settings_text(parts, plan),
        data={
            "address": told["links"]["self"],
            "events": told["links"]["events"],
            "last": events[-1].seq if events else 0,
            "types": [kind.value for kind in EventType],
            "version": order.version,
            "unplanned": order.state in (State.RECEIVED, State.PLANNING),
        },
    )


def _looked_up(
    parts: Parts, asker: Asker, order_id: str
) -> tuple[OrderView, tuple[PlanView, ...], tuple[EventView, ...]]:
    """An order, its plans from the newest on, and what happened to it."""
    with parts.store.reading() as session:
        order = find_order(session, asker, order_id)
        revisions = range(order.plan_revision, max(0, order.plan_revision - MOST_PLANS), -1)
        plans = [plan_view(session, order.id, revision) for revision in revisions]
        events = events_of(session, asker, order_id, after=0, most=MOST_EVENTS)
    return order, tuple(plan for plan in plans if plan is not None), events


def _plan_asked(parts: Parts, asker: Asker, order_id: str, asked: Request) -> tuple[OrderView, PlanView]:
    """An order, and the plan of it that the query asks for.

    Raises:
        OrderUnknownError: There is no such order for the asker.
        ProblemError: It has no such plan.
    """
    query = read_arguments(asked, OrderDiscQuery)
    with parts.store.reading() as session:
        order = find_order(session, asker, order_id)
        revision = order.plan_revision if query.revision is None else query.revision
        plan = plan_view(session, order.id, revision) if revision <= MOST_REVISION else None
    if plan is None:
        raise ProblemError(
            name="route-unknown",
            detail="the order has no plan yet, so there is no disc to see"
            if query.revision is None
            else f"the order has no plan {query.revision}",
        )
    return order, plan


def _disc_page(parts: Parts, asker: Asker, which: tuple[str, int], asked: Request) -> Response:
    order_id, disc = which
    order, plan = _plan_asked(parts, asker, order_id, asked)
    beside = {
        "order": order,
        "plan": plan,
        "listed": listed(order),
        "state": state_words(order.state),
        "sheet": sheet_told(parts, order.id, plan, disc),
        "may_revise": decisions_of(order, asker).replan and plan.revision == order.plan_revision,
    }
    return disc_page(asked, disc_of_plan(parts, order.id, plan, disc), template="order_disc.html", beside=beside)
