"""What is decided about an order, over HTTP: release, replan, cancel, the shop's reports, links to a proof."""

from collections.abc import Callable, Mapping
from typing import Any, TypeVar

from flask import Blueprint, Request, Response, request

from layout.documents import read_settings
from layout.documents.reading import Part
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import json_bytes, json_response
from service.api.asking import needs
from service.api.bodies import body_of
from service.api.describing import describes
from service.api.models.orders import CancelBody, ReleaseBody, ReplanBody, ReportBody
from service.api.once import once
from service.api.operations import orders
from service.api.order_answers import order_given
from service.api.orders import Send
from service.api.problems import ProblemError
from service.api.proofs import proof_page
from service.api.public_links import public_link
from service.api.request_models import read_text
from service.orders.deciding import Release, Seen, cancel_order, release_order, replan_order, report_on_order
from service.orders.finding import find_order
from service.orders.placing import Also
from service.orders.proofs import Proof, ProofLinks
from service.orders.replanning import AskedAnew, columns_of
from service.orders.states import State
from service.orders.views import OrderView
from service.parts import Parts
from service.store.holds import FileKeeper

MOST_DIGITS = 18  # of a version: as many as fit eight bytes

ModelT = TypeVar("ModelT", bound=Part)


def decision_routes(parts: Parts, send: Send, links: ProofLinks) -> Blueprint:
    """The routes by which people decide about orders.

    Args:
        parts: What orders are kept in.
        send: Tells the workers of an order.
        links: Signs links to proofs.
    """
    routes = Blueprint("order_decisions", __name__, url_prefix="/v1/orders/<order_id>")
    desk = _Decisions(parts, send)

    @routes.post("/release")
    @describes(orders.RELEASE)
    @needs(Scope.RELEASE)
    def release(asker: Asker, order_id: str) -> Response:
        return desk.release(asker, order_id)

    @routes.post("/replan")
    @describes(orders.REPLAN)
    @needs(Scope.ORDER)
    def replan(asker: Asker, order_id: str) -> Response:
        return desk.replan(asker, order_id)

    @routes.post("/cancel")
    @describes(orders.CANCEL)
    @needs(Scope.ORDER)
    def cancel(asker: Asker, order_id: str) -> Response:
        return desk.cancel(asker, order_id)

    @routes.post("/reports")
    @describes(orders.REPORT)
    @needs(Scope.RELEASE)
    def report(asker: Asker, order_id: str) -> Response:
        return desk.report(asker, order_id)

    @routes.post("/proof-links")
    @describes(orders.PROOF_LINK)
    @needs(Scope.ORDER)
    def link(asker: Asker, order_id: str) -> Response:
        with parts.store.reading() as session:
            order = find_order(session, asker, order_id)
        if order.state not in (State.READY, State.ATTENTION):
            raise ProblemError(
                name="state-forbids",
                detail=f"the order is {order.state}; a proof is shown while a decision is waited for",
                more={"state": order.state},
            )
        text = links.make(Proof(order_id=order.id, revision=order.plan_revision))
        href = public_link(request, proof_page(text), parts.settings.places.public_url)
        return json_response({"href": href, "revision": order.plan_revision}, status=201)

    return routes


class _Decisions:
    """Carries decisions out, each once for its Idempotency-Key."""

    def __init__(self, parts: Parts, send: Send) -> None:
        self._parts = parts
        self._keeper = FileKeeper(parts.store, parts.files)
        self._send = send

    def release(self, asker: Asker, order_id: str) -> Response:
        text, body = self._body(ReleaseBody, "release")
        said = Release(by=body.by, plan=body.plan, despite_findings=body.despite_findings)
        store = self._parts.store
        return self._once(asker, text, lambda also: release_order(store, asker, _seen(order_id), said, also))

    def replan(self, asker: Asker, order_id: str) -> Response:
        text, body = self._body(ReplanBody, "replan")
        settings = None if body.settings is None else json_bytes(body.settings)
        if settings is not None:
            read_settings(settings)
        anew = AskedAnew(
            movement_revision=body.movement_revision, settings=settings, most_lost_share=body.most_lost_share
        )
        store = self._parts.store

        def replanning(also: Also) -> OrderView:
            columns = columns_of(store, self._keeper, asker, order_id, anew)
            return replan_order(store, asker, _seen(order_id), columns, also)

        return self._once(asker, text, replanning)

    def cancel(self, asker: Asker, order_id: str) -> Response:
        text, body = self._body(CancelBody, "cancel")
        store = self._parts.store
        return self._once(
            asker,
            text,
            lambda also: cancel_order(
                store, asker, _seen(order_id), reason=body.reason, recalled=body.recalled, also=also
            ),
        )

    def report(self, asker: Asker, order_id: str) -> Response:
        text, body = self._body(ReportBody, "report")
        told: Mapping[str, Any] = body.model_dump(exclude={"what"}, exclude_none=True)
        store = self._parts.store
        return self._once(
            asker, text, lambda also: report_on_order(store, asker, _seen(order_id), body.what, dict(told), also)
        )

    def _once(self, asker: Asker, text: bytes, work: Callable[[Also], OrderView]) -> Response:
        def working(also: Also) -> OrderView:
            order = work(also)
            if order.state == State.RECEIVED:
                self._send(order.id)
            return order

        return once(
            self._parts,
            request,
            asker,
            {"body": text},
            working,
            lambda order: order_given(order, 202 if order.state == State.RECEIVED else 200),
        )

    def _body(self, model: type[ModelT], document: str) -> tuple[bytes, ModelT]:
        text = body_of(request, self._parts.settings.limits.document_bytes)
        return text, read_text(request, model, text, document=document)


def _seen(order_id: str) -> Seen:
    return Seen(order_id=order_id, version=_version_seen(request))


def _version_seen(asked: Request) -> int | None:
    """The version that If-Match names; None where the header is missing or says any."""
    tags = asked.if_match
    if not tags or tags.star_tag:
        return None
    # An empty tag, which the web library gives as None, is none of ours either.
    versions = [tag for tag in tags.as_set() if tag and tag.isascii() and tag.isdigit() and len(tag) <= MOST_DIGITS]
    return int(versions[0]) if len(versions) == 1 else -1  # no version is negative: nothing matches
