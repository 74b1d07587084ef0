"""/v1/proofs: what a customer with a signed link sees of an order, and says about it."""

from collections.abc import Mapping
from functools import partial
from typing import Any

from flask import Blueprint, Response, request

from layout.file_names import HEARING_FILES
from service.api.answers import json_response
from service.api.asking import open_but_counted
from service.api.bodies import body_of
from service.api.describing import describes
from service.api.hearing_shelf import HearingShelf
from service.api.hearings import plucks_response, sound_response
from service.api.models.proofs import VerdictBody
from service.api.operations import hearings, proofs
from service.api.order_files import file_of, file_response, heard_of
from service.api.problems import ProblemError
from service.api.request_models import read_text
from service.orders.deciding import customer_says
from service.orders.faults import OrderUnknownError
from service.orders.proofs import Proof, ProofLinks, ProofRefusedError
from service.orders.states import State
from service.orders.views import OrderView, PlanView, order_view, plan_view
from service.parts import Parts
from service.store.tables import Order

PAGE = "/proof"  # where people see a proof, the signed text after it; what lies under /v1 is for programs
SHOWN = ("disc.svg", "report.json")  # what a customer may see of each disc


def proof_routes(parts: Parts, links: ProofLinks, shelf: HearingShelf) -> Blueprint:
    """The routes of proofs."""
    routes = Blueprint("proofs", __name__, url_prefix="/v1/proofs")

    @routes.get("/<text>")
    @describes(proofs.SHOW)
    @open_but_counted
    def show(text: str) -> Response:
        proof = proof_of(links, text)
        order, plan = proof_shown(parts, proof)
        return json_response(
            {
                "reference": order.reference,
                "title": plan.told["title"],
                "movement": {"id": order.movement_id, "revision": order.movement_revision},
                "revision": plan.revision,
                "waits_for_decision": waits_for_decision(order, proof),
                "discs": [_disc_shown(text, disc) for disc in plan.told["discs"]],
            }
        )

    @routes.get("/<text>/files/<int:disc>/<name>")
    @describes(proofs.FILE)
    @open_but_counted
    def give(text: str, disc: int, name: str) -> Response:
        plan = _plan_shown(parts, links, text, disc)
        if name not in SHOWN:
            raise ProblemError(
                name="route-unknown", detail=f"a proof shows {', '.join((*SHOWN, *HEARING_FILES))} alone"
            )
        return file_response(parts, file_of(plan, disc, name), request)

    @routes.post("/<text>/verdict")
    @describes(proofs.VERDICT)
    @open_but_counted
    def say(text: str) -> Response:
        proof = proof_of(links, text)
        text_said = body_of(request, parts.settings.limits.document_bytes)
        body = read_text(request, VerdictBody, text_said, document="verdict")
        customer_says(parts.store, proof.order_id, proof.revision, body.verdict, by=body.by, note=body.note)
        return json_response({"verdict": body.verdict, "revision": proof.revision})

    _add_hearings(routes, parts, links, shelf)
    return routes


def _add_hearings(routes: Blueprint, parts: Parts, links: ProofLinks, shelf: HearingShelf) -> None:
    @routes.get("/<text>/files/<int:disc>/hearing.wav")
    @describes(hearings.PROOF_SOUND)
    @open_but_counted
    def give_sound(text: str, disc: int) -> Response:
        return sound_response(shelf, heard_of(parts, partial(_plan_shown, parts, links, text, disc), disc), request)

    @routes.get("/<text>/files/<int:disc>/hearing.mid")
    @describes(hearings.PROOF_PLUCKS)
    @open_but_counted
    def give_plucks(text: str, disc: int) -> Response:
        return plucks_response(shelf, heard_of(parts, partial(_plan_shown, parts, links, text, disc), disc), request)


def _disc_shown(text: str, disc: Mapping[str, Any]) -> dict[str, Any]:
    base = f"{proof_address(text)}/files/{disc['number']}"
    files = {name: f"{base}/{name}" for name in (*SHOWN, *HEARING_FILES)}
    return {**{name: disc[name] for name in ("number", "of", "asked_count", "kept_count")}, "files": files}


def _plan_shown(parts: Parts, links: ProofLinks, text: str, disc: int) -> PlanView:
    """The plan of a proof that has such a disc; else nothing is told of what the plan holds.

    Raises:
        ProblemError, OrderUnknownError: The link shows nothing, or no such disc.
    """
    _, plan = proof_shown(parts, proof_of(links, text))
    if disc not in {one["number"] for one in plan.told["discs"]}:
        raise ProblemError(name="route-unknown", detail=f"this proof has no disc {disc}")
    return plan


def proof_page(text: str) -> str:
    """Where people see the proof of a signed text."""
    return f"{PAGE}/{text}"


def proof_address(text: str) -> str:
    """Where programs see it."""
    return f"/v1/proofs/{text}"


def proof_of(links: ProofLinks, text: str) -> Proof:
    """What a signed text shows.

    Raises:
        ProblemError: It was not made here, or is too old.
    """
    try:
        return links.read(text)
    except ProofRefusedError as refusal:
        raise ProblemError(name="proof-refused", detail=str(refusal)) from refusal


def proof_shown(parts: Parts, proof: Proof) -> tuple[OrderView, PlanView]:
    """The order and the plan of a proof.

    Raises:
        OrderUnknownError: They were deleted.
    """
    with parts.store.reading() as session:
        order = session.get(Order, proof.order_id)
        plan = plan_view(session, proof.order_id, proof.revision)
        if order is None or plan is None or order.erased_at is not None:
            raise OrderUnknownError("what this link showed is deleted")
        return order_view(session, order), plan


def waits_for_decision(order: OrderView, proof: Proof) -> bool:
    """Whether the customer's word about this proof is still waited for."""
    return order.state in (State.READY, State.ATTENTION) and order.plan_revision == proof.revision
