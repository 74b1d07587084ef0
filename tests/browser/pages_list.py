"""Every page there is. A new page is a line here: it is then tried for access, width, colours and screenshots.

In an address {disc} and {faulty} stand for discs (the second has findings), {order} for an order, {proof} for the text
of its link: `served.py` makes them.
"""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class ShownPage:
    """A page to look at.

    Attributes:
        name: Of its screenshots.
        route: As the app knows it.
        path: Its address.
        ready: What is there once its scripts have run.
        status: Of HTTP.
        signed_in: Whether a key is needed.
        alike: Many parts from one template, of which the contrast of the first few is measured.
    """

    name: str
    route: str
    path: str
    ready: str = "main"
    status: int = 200
    signed_in: bool = False
    alike: str = ""


PAGES = (
    ShownPage(name="new", route="/new", path="/new", ready="#new-disc[data-ready]"),
    ShownPage(name="disc", route="/discs/<fingerprint>", path="/discs/{disc}", ready="#rulings[data-ready]"),
    ShownPage(name="disc-faulty", route="/discs/<fingerprint>", path="/discs/{faulty}", ready="#rulings[data-ready]"),
    ShownPage(name="sign-in", route="/sign-in", path="/sign-in"),
    ShownPage(name="orders", route="/orders", path="/orders", signed_in=True),
    ShownPage(name="order", route="/orders/<order_id>", path="/orders/{order}", signed_in=True),
    ShownPage(
        name="order-disc",
        route="/orders/<order_id>/discs/<int:disc>",
        path="/orders/{order}/discs/1",
        ready="#stage[data-ready]",
        signed_in=True,
    ),
    ShownPage(name="proof", route="/proof/<text>", path="/proof/{proof}"),
    ShownPage(name="movements", route="/movements", path="/movements"),
    ShownPage(name="movement", route="/movements/<document_id>", path="/movements/mossbrook-67"),
    ShownPage(
        name="movement-edit",
        route="/movements/<document_id>/edit",
        path="/movements/tarnlight-17/edit",
        ready="form[data-ready]",
        signed_in=True,
        alike="#form details[data-pointer^='/teeth/']",
    ),
    ShownPage(
        name="movement-add", route="/movements/add", path="/movements/add", ready="form[data-ready]", signed_in=True
    ),
    ShownPage(name="cutters", route="/cutters", path="/cutters"),
    ShownPage(name="cutter", route="/cutters/<document_id>", path="/cutters/fibre-laser"),
    ShownPage(
        name="cutter-edit",
        route="/cutters/<document_id>/edit",
        path="/cutters/turn-press/edit",
        ready="form[data-ready]",
        signed_in=True,
    ),
    ShownPage(name="cutter-add", route="/cutters/add", path="/cutters/add", ready="form[data-ready]", signed_in=True),
    ShownPage(name="measuring", route="/measuring", path="/measuring"),
    ShownPage(name="reference", route="/reference", path="/reference", alike="article, section[id^=shape-]"),
    ShownPage(name="problem", route="", path="/nowhere", status=404),
)
# Routes of pages that are no page of their own: what pages load.
NO_PAGES = frozenset(
    {"/assets/<asked_digest>/<path:name>", "/orders/<order_id>/discs/<int:disc>/work-sheet/<int:number>.png"}
)
