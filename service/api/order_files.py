"""The files of an order's plans: previews before release, cutting files after it."""

from collections.abc import Callable
from functools import partial

from flask import Blueprint, Request, Response, request

from layout.documents import read_movement
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import ONLY_OWN_STYLES
from service.api.asking import needs
from service.api.describing import describes
from service.api.hearing_shelf import HearingShelf
from service.api.hearings import Heard, plucks_response, sound_response
from service.api.models.orders import MOST_REVISION, FileQuery
from service.api.operations import hearings, orders
from service.api.order_answers import order_address
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.api.serving import Served, served
from service.orders.finding import find_order
from service.orders.views import FileView, PlanView, plan_view
from service.parts import Parts


def order_file_routes(parts: Parts, shelf: HearingShelf) -> Blueprint:
    """The routes of files of orders, and of how their discs sound."""
    routes = Blueprint("order_files", __name__, url_prefix="/v1/orders/<order_id>/plans")

    def plan_of(asker: Asker, order_id: str, revision: int) -> PlanView | None:
        with parts.store.reading() as session:
            order = find_order(session, asker, order_id)
            return plan_view(session, order.id, revision) if revision <= MOST_REVISION else None

    @routes.get("/<int:revision>/files/<int:disc>/<name>")
    @describes(orders.FILE)
    @needs(Scope.READ)
    def give(asker: Asker, order_id: str, revision: int, disc: int, name: str) -> Response:
        asked = read_arguments(request, FileQuery)
        plan = plan_of(asker, order_id, revision)
        file = file_of(plan, disc, name)
        _check_given(plan, file, asked)
        response = file_response(parts, file, request)
        if plan is not None and plan.superseded_at is not None:
            response.headers["Link"] = f'<{order_address(order_id)}>; rel="latest-version"'  # RFC 5829
        return response

    @routes.get("/<int:revision>/files/<int:disc>/hearing.wav")
    @describes(hearings.ORDER_SOUND)
    @needs(Scope.READ)
    def give_sound(asker: Asker, order_id: str, revision: int, disc: int) -> Response:
        return sound_response(shelf, heard_of(parts, partial(plan_of, asker, order_id, revision), disc), request)

    @routes.get("/<int:revision>/files/<int:disc>/hearing.mid")
    @describes(hearings.ORDER_PLUCKS)
    @needs(Scope.READ)
    def give_plucks(asker: Asker, order_id: str, revision: int, disc: int) -> Response:
        return plucks_response(shelf, heard_of(parts, partial(plan_of, asker, order_id, revision), disc), request)

    return routes


def heard_of(parts: Parts, find_plan: Callable[[], PlanView | None], disc: int) -> Heard:
    """What a disc of a plan is heard from, as it was planned.

    Args:
        parts: Where its files are.
        find_plan: Gives the plan; called again when the sound is made.
        disc: Which disc, from 1.

    Raises:
        ProblemError: The plan has no such disc.
        StoreError: A file cannot be read.
    """
    plan = find_plan()
    file = file_of(plan, disc, "layout.json")
    digest = plan.inputs["movement"]["sha256"] if plan is not None else ""
    return Heard(
        layout_json=parts.files.read(file.sha256),
        movement=read_movement(parts.files.read(digest)),
        layout_name=file.saved_as,
        look_again=lambda: file_of(find_plan(), disc, "layout.json"),
    )


def file_of(plan: PlanView | None, disc: int, name: str) -> FileView:
    """A file of a plan.

    Raises:
        ProblemError: There is none of that name.
    """
    files = () if plan is None else plan.files
    for file in files:
        if (file.disc, file.name) == (disc, name):
            return file
    known = [f"{file.disc}/{file.name}" for file in files]
    raise ProblemError(
        name="route-unknown",
        detail=f"the plan has no file {disc}/{name[:60]}" + (f"; it has {', '.join(known)}" if known else ""),
        more={"known_files": known},
    )


def file_response(parts: Parts, file: FileView, asked: Request) -> Response:
    """A file, whole or a range of it, under the name it is saved by."""
    is_picture = file.name.endswith(".svg")
    response = served(
        parts.files,
        Served(
            digest=file.sha256,
            byte_count=file.byte_count,
            media_type=file.media_type,
            saved_as=file.saved_as,
            how="inline" if is_picture else "attachment",
            max_age_s=parts.settings.limits.file_max_age_s,
        ),
        asked,
    )
    if is_picture:
        response.headers["Content-Security-Policy"] = ONLY_OWN_STYLES
    return response


def _check_given(plan: PlanView | None, file: FileView, asked: FileQuery) -> None:
    if plan is None or not file.is_for_cutting:
        return
    if plan.released_at is None:
        raise ProblemError(
            name="not-released",
            detail=f"{file.name} is for cutting, and the plan is not released; previews may be had before",
        )
    if plan.superseded_at is not None and asked.superseded != "yes":
        raise ProblemError(
            name="plan-superseded",
            detail=f"plan {plan.revision} is superseded and not to be cut any more; "
            "ask with superseded=yes to see the file all the same",
        )
