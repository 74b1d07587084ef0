"""/discs/<fingerprint>: a disc to look at, to hear, to follow through its turn, and its files."""

import json
import re
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any, Literal
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from layout.file_names import HEARING_FILES
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.asking import asker_or_none, open_on_loopback
from service.api.desk import LayoutDesk
from service.api.layout_cache import KeptLayout
from service.api.models.layouts import DespiteQuery
from service.api.models.orders import MOST_COPIES, MOST_LINE_CHARACTERS
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.documents import Shipped
from service.pages.disc_data import disc_data
from service.pages.disc_plots import plots_of
from service.pages.disc_shown import ShownDisc
from service.pages.disc_told import cautions_of, facts_of, files_of, findings_of, lost_of, not_asked_of, verdict_of
from service.pages.page_views import gives_page
from service.pages.plot_shapes import FRAME
from service.pages.rendering import page

FINGERPRINT = re.compile(r"[0-9a-f]{16}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Ordering:
    """How a disc that is shown may be ordered.

    Attributes:
        may: Whether who asks is signed in, and so may order.
        of: How many discs the tune is cut into: an order is for them all.
        documents: `order` names the documents that ship, as the part `order` of a request does; `parts` has the texts
            of the others by name.
        most_copies: As many of each disc may be ordered.
        most_characters: As long may the reference be.
    """

    may: bool
    of: int
    documents: Mapping[str, Mapping[str, str]]
    most_copies: int = MOST_COPIES
    most_characters: int = MOST_LINE_CHARACTERS


class DiscQuery(DespiteQuery):
    """How a disc is looked at; and whether one that an earlier version laid out shall be laid out anew."""

    lay_out_again: Literal["yes"] | None = None


def disc_routes(desk: LayoutDesk) -> Blueprint:
    """The page of a layout.

    Args:
        desk: Where layouts are kept: the one that the API's routes of layouts have.
    """
    routes = Blueprint("disc_pages", __name__)

    @routes.get("/discs/<fingerprint>")
    @gives_page
    @open_on_loopback(Scope.ORDER)
    def show_disc(fingerprint: str) -> Response:
        query = read_arguments(request, DiscQuery)
        asker = asker_or_none()
        owner_id = None if asker is None else asker.owner_id
        find = desk.find if query.lay_out_again is None else desk.lay_out_again
        kept = find(fingerprint, owner_id) if FINGERPRINT.fullmatch(fingerprint) else None
        if kept is None:
            raise ProblemError(
                name="layout-unknown",
                detail=f"no layout is kept under {fingerprint[:64]!r}; make the disc again: the same tune, documents "
                "and settings give the same layout and the same fingerprint",
            )
        if kept.fingerprint != fingerprint:
            return Response(status=303, headers={"Location": f"/discs/{kept.fingerprint}", "Cache-Control": "no-cache"})
        shown = _shown(desk, kept, query.despite_findings)
        return disc_page(request, shown, beside={"ordering": _ordering(kept, asker)})

    return routes


def disc_page(
    asked: Request,
    shown: ShownDisc,
    *,
    template: str = "disc.html",
    beside: Mapping[str, Any] = MappingProxyType({}),
) -> Response:
    """The page of a disc, wherever it comes from.

    Args:
        asked: The request.
        shown: The disc.
        template: One that extends that of the page.
        beside: What such a template shows beside the disc.
    """
    movement = shown.movement
    return page(
        asked,
        template,
        scripts=("disc", "rulings"),
        shown=shown,
        data=disc_data(shown),
        verdict=verdict_of(shown),
        facts=facts_of(shown),
        lost=lost_of(shown.report),
        not_asked=not_asked_of(shown.report),
        files=files_of(shown),
        findings=findings_of(shown.layout),
        cautions=cautions_of(shown),
        frame=FRAME,
        plots=plots_of(shown.report, before_music_deg=movement.before_music_deg, revolution_s=movement.revolution_s),
        **{"ordering": None, **beside},
    )


def _ordering(kept: KeptLayout, asker: Asker | None) -> Ordering:
    named: dict[str, str] = {}
    brought: dict[str, str] = {}
    for name, source in (("movement", kept.inputs.movement), ("cutter", kept.inputs.cutter)):
        if isinstance(source, Shipped):
            named[name] = source.id
        else:
            brought[name] = source.text.decode(json.detect_encoding(source.text))  # as it was read
    return Ordering(
        may=asker is not None,  # a key without the scope is shown no layout at all
        of=kept.disc_count,
        documents={"order": named, "parts": brought},
    )


def _shown(desk: LayoutDesk, kept: KeptLayout, reason: str | None) -> ShownDisc:
    read = kept.inputs.read()
    given_despite = None if kept.good_to_cut else reason
    base = f"/v1/layouts/{kept.fingerprint}"
    asking = "" if given_despite is None else f"?{urlencode({'despite_findings': given_despite})}"
    return ShownDisc(
        layout=json.loads(kept.files["layout.json"]),
        report=json.loads(kept.files["report.json"]),
        movement=read.movement,
        cutter=read.cutter,
        files={name: f"{base}/{name}{asking}" for name in desk.names_given(kept, reason)}
        | {name: f"{base}/{name}" for name in HEARING_FILES},
        hearing={of: f"{base}/hearing.wav?of={of}" for of in ("disc", "written")},
        despite_findings=given_despite,
        asks_reason=not kept.good_to_cut,
        rulings_at=f"{base}/again",
    )
