"""/proof/<text>: what a customer with a signed link sees and hears of an order, and where they say yes or no."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

from flask import Blueprint, Request, Response, request

from service.api.asking import open_but_counted
from service.api.media import prefers_html
from service.api.proofs import PAGE, proof_address, proof_of, proof_shown, waits_for_decision
from service.orders.finding import verdicts_on
from service.orders.proofs import Proof, ProofLinks
from service.orders.states import EventType, State
from service.orders.views import EventView, OrderView, PlanView
from service.pages.disc_shown import ShownDisc
from service.pages.orders_discs import disc_of_plan
from service.pages.orders_told import Moment, moment
from service.pages.page_views import gives_page
from service.pages.proof_told import customer_data, found_of, played_of
from service.pages.rendering import page
from service.pages.texts import text_of
from service.parts import Parts

NOT_TO_FIND = "noindex, nofollow"  # X-Robots-Tag: who has the link sees the order, so it is in no list of links


@dataclass(frozen=True, slots=True, kw_only=True)
class VerdictTold:
    """What a customer said of this proof, by whom and when."""

    accepted: bool
    what: str
    note: str
    at: Moment


def proof_page_routes(parts: Parts, links: ProofLinks) -> Blueprint:
    """The page of proofs.

    Args:
        parts: What orders are kept in.
        links: Read the signed part of links.
    """
    routes = Blueprint("proof_pages", __name__)

    @routes.get(f"{PAGE}/<text>")
    @gives_page
    @open_but_counted
    def show_proof(text: str) -> Response:
        proof = proof_of(links, text)
        answer = _page(parts, proof, text, request) if prefers_html(request) else _led(text)
        answer.vary.add("Accept")
        answer.headers["X-Robots-Tag"] = NOT_TO_FIND
        return answer

    return routes


def _led(text: str) -> Response:
    """Programs, and whoever handed links to programs before there was a page."""
    return Response(status=303, headers={"Location": proof_address(text), "Cache-Control": "private, no-cache"})


def _page(parts: Parts, proof: Proof, text: str, asked: Request) -> Response:
    order, plan = proof_shown(parts, proof)
    number = _disc_wanted(asked, [disc["number"] for disc in plan.told["discs"]])
    shown = _shown(parts, order, plan, number, text)
    with parts.store.reading() as session:
        said = verdicts_on(session, proof.order_id, proof.revision)
    return page(
        asked,
        "proof.html",
        scripts=("orders", "disc"),
        title=plan.told["title"],
        order=order,
        waits=waits_for_decision(order, proof),
        standing=text_of(f"proof.{standing_of(order, proof)}"),
        discs=[(disc["number"], f"{asked.path}?disc={disc['number']}") for disc in plan.told["discs"]],
        number=number,
        shown=shown,
        played=played_of(shown.report),
        found=found_of(shown.layout),
        disc_data=customer_data(shown),
        verdicts=[_told(verdict) for verdict in said],
        data={"verdict": f"{proof_address(text)}/verdict"},
    )


def _disc_wanted(asked: Request, numbers: Sequence[int]) -> int:
    """The disc that a link names, the first where it names none there is; mail programs add parameters of their own."""
    wanted = asked.args.get("disc")
    return next((number for number in numbers if str(number) == wanted), numbers[0])


def standing_of(order: OrderView, proof: Proof) -> str:
    """How a proof stands: waits, or why nothing is decided about it any more.

    Args:
        order: The order as it is now.
        proof: What the link shows of it.
    """
    if waits_for_decision(order, proof):
        return "waits"
    if order.state == State.CANCELLED:
        return "cancelled"
    if order.plan_revision != proof.revision:
        return "superseded"
    return "released" if order.state == State.RELEASED else "anew"


def _shown(parts: Parts, order: OrderView, plan: PlanView, number: int, text: str) -> ShownDisc:
    """A disc of a proof: the files and the sound are those that the link gives."""
    files = f"{proof_address(text)}/files/{number}"
    return replace(
        disc_of_plan(parts, order.id, plan, number),
        files={"disc.svg": f"{files}/disc.svg"},
        hearing={of: f"{files}/hearing.wav?of={of}" for of in ("disc", "written")},
        despite_findings=None,
    )


def _told(verdict: EventView) -> VerdictTold:
    accepted = verdict.type == EventType.ACCEPTED
    by = verdict.by or text_of("proof.somebody")
    return VerdictTold(
        accepted=accepted,
        what=text_of("proof.said_accepted" if accepted else "proof.said_declined", by=by),
        note=verdict.data.get("note") or "",
        at=moment(verdict.at),
    )
