"""/movements and /cutters: lists, each document to look at, and the form that enters or changes one."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from flask import Blueprint, Request, Response, request
from pydantic import Field

from layout.documents import read_cutter, read_movement
from layout.documents.reading import Part
from layout.errors import NotShippedError
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.asking import asker_or_none, needs, open_and_more_with
from service.api.catalogue import KINDS, tag_of, whose_is
from service.api.models.documents import DocumentsQuery
from service.api.request_models import read_arguments
from service.catalogue import cutter_told, movement_told
from service.pages.machines_comb import comb_chart
from service.pages.machines_told import tracks_of, unit_of, values_of
from service.pages.measuring import SECTIONS
from service.pages.page_views import gives_page
from service.pages.rendering import page
from service.pages.texts import text_of, texts
from service.parts import Parts
from service.store.documents import (
    SHIPPED_IDS,
    KeptDocument,
    document_in_force,
    documents_in_force,
    shipped_document,
)

# The sections of the forms, each with its fields, in the order in which a movement is measured: the name of its title,
# or "" where the one field has a title of its own.
FORM: dict[str, tuple[tuple[str, tuple[str, ...]], ...]] = {
    "movement": (
        ("about", ("title", "id", "revision", "format")),
        ("turning", ("turns", "revolution_s", "fastest_revolution_s", "before_music_deg", "after_music_deg")),
        ("", ("disc",)),
        ("", ("keep_out",)),
        ("", ("tracks",)),
        ("wheels", ("gantry_offset_mm", "star_wheel", "projection")),
        ("dampers", ("damper_arc_mm", "damper_recovery_s")),
        ("comb", ("tooth_quality", "teeth")),
        ("", ("drive",)),
    ),
    "cutter": (
        ("about", ("title", "id", "kind", "format")),
        (
            "cutting",
            (
                *("kerf_mm", "kerf_compensated", "min_web_mm", "min_slot_mm"),
                *("position_tolerance_mm", "angle_tolerance_deg", "tolerance_class"),
            ),
        ),
        ("", ("fold",)),
        ("", ("tools",)),
        ("", ("press",)),
        ("drawing", ("drawn_from", "burr_side", "drawing_release", "labels")),
        ("", ("layers",)),
        ("", ("lead_in",)),
        ("", ("bridges",)),
        ("", ("feature_rules",)),
        ("", ("net_section",)),
        ("", ("feeds",)),
        ("", ("rates",)),
    ),
}
# What may be left out and is seldom: shown though it is not stated. Places without the numbers of lists.
USUAL = (
    *("/gantry_offset_mm", "/damper_arc_mm", "/damper_recovery_s", "/disc/flatness_mm", "/disc/run_out_mm"),
    *("/projection/depth_mm", "/projection/length_mm", "/drawn_from"),
)
FIELD = "script.movements.field_"  # texts that name the fields


def machine_routes(parts: Parts) -> Blueprint:
    """The pages of movements and of cutters.

    Args:
        parts: What documents are kept in.
    """
    routes = Blueprint("machine_pages", __name__)
    for kind in KINDS:
        _add_reading(routes, kind, _Documents(parts, kind))
        _add_forms(routes, kind, _Documents(parts, kind))
    return routes


def _add_reading(routes: Blueprint, kind: str, documents: "_Documents") -> None:
    @routes.get(f"/{kind}s", endpoint=f"show_{kind}s")
    @gives_page
    @open_and_more_with(Scope.READ)
    def show_all() -> Response:
        return documents.show_all(asker_or_none(), request)

    @routes.get(f"/{kind}s/<document_id>", endpoint=f"show_{kind}")
    @gives_page
    @open_and_more_with(Scope.READ)
    def show(document_id: str) -> Response:
        return documents.show(asker_or_none(), document_id, request)


def _add_forms(routes: Blueprint, kind: str, documents: "_Documents") -> None:
    @routes.get(f"/{kind}s/<document_id>/edit", endpoint=f"edit_{kind}")
    @gives_page
    @needs(Scope.MOVEMENTS)
    def edit(asker: Asker, document_id: str) -> Response:
        document = documents.found(asker, document_id)
        tag = f'"{tag_of(document)}"'
        return _form(kind, document.text.decode(), {"id": document.id, "tag": tag})

    @routes.get(f"/{kind}s/add", endpoint=f"add_{kind}")
    @gives_page
    @needs(Scope.MOVEMENTS)
    def add(asker: Asker) -> Response:
        like = read_arguments(request, LikeQuery).like
        if like is None:
            return _form(kind, json.dumps({"format": f"discwright-{kind}/1"}), {"id": None, "tag": None})
        # The id is left to be written: the beginning's own is taken.
        begun = {**json.loads(documents.found(asker, like).text), "id": ""}
        begun.pop("revision", None)
        return _form(kind, json.dumps(begun, ensure_ascii=False), {"id": None, "tag": None})


class LikeQuery(Part):
    """Which document a new one begins as."""

    like: str | None = Field(default=None, max_length=64)


def _form(kind: str, text: str, begun: Mapping[str, str | None]) -> Response:
    fields = [name for name in texts() if name.startswith(FIELD)]
    names = [name.removeprefix(FIELD) for name in fields]
    measured = {begin: name for name, begins in SECTIONS.items() for begin in begins} if kind == "movement" else {}
    data = {
        **begun,
        "kind": kind,
        "text": text,
        "schema_at": f"/v1/schemas/{kind}",
        "save_at": f"/v1/{kind}s/",
        "check_at": f"/v1/{kind}s/check",
        "page_at": f"/{kind}s/",
        "units": {name: unit_of(name) for name in names if unit_of(name)},
        "measured": measured,
        "usual": USUAL,
        "sections": [
            {"title": None if title == "" else text_of(f"movements.section_{title}"), "names": names}
            for title, names in FORM[kind]
        ],
    }
    return page(request, "movement_edit.html", scripts=("movements",), kind=kind, begun=begun, data=data)


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """A line of a list: what the API tells of a document, and whose it is."""

    told: Mapping[str, Any]
    teeth: int
    whose: str


class _Documents:
    """The documents of a kind, as people see them."""

    def __init__(self, parts: Parts, kind: str) -> None:
        self._store = parts.store
        self._kind = kind

    def show_all(self, asker: Asker | None, asked: Request) -> Response:
        query = read_arguments(asked, DocumentsQuery)
        owner_id = None if asker is None else asker.owner_id
        with self._store.reading() as session:
            found = documents_in_force(session, owner_id, self._kind, after=query.after, most=query.limit + 1)
        listed = found[: query.limit]
        return page(
            asked,
            f"{self._kind}s.html",
            lines=[self._line(document, asker) for document in listed],
            more_after=listed[-1].id if len(found) > query.limit else None,
        )

    def show(self, asker: Asker | None, document_id: str, asked: Request) -> Response:
        document = self.found(asker, document_id)
        shown: dict[str, Any] = {"document": document, "whose": whose_is(document.owner_id, asker)}
        if self._kind == "movement":
            movement = read_movement(document.text)
            shown |= {"read": movement, "told": movement_told(movement), "comb": comb_chart(movement)}
            shown |= {"tracks": tracks_of(movement)}
        else:
            cutter = read_cutter(document.text)
            shown |= {"read": cutter, "told": cutter_told(cutter)}
        return page(asked, f"{self._kind}.html", values=values_of(document), **shown)

    def found(self, asker: Asker | None, document_id: str) -> KeptDocument:
        """The document of an id as the asker sees it.

        Raises:
            NotShippedError: There is none.
        """
        if asker is None:
            document = shipped_document(self._kind, document_id)
        else:
            with self._store.reading() as session:
                document = document_in_force(session, asker.owner_id, self._kind, document_id)
        if document is None:
            raise NotShippedError(
                document=self._kind, document_id=document_id[:64], known_ids=SHIPPED_IDS[self._kind]()
            )
        return document

    def _line(self, document: KeptDocument, asker: Asker | None) -> Line:
        whose = whose_is(document.owner_id, asker)
        if self._kind == "movement":
            movement = read_movement(document.text)
            return Line(told=movement_told(movement), teeth=len(movement.teeth), whose=whose)
        told = cutter_told(read_cutter(document.text))
        return Line(told={**told, "revision": document.revision}, teeth=0, whose=whose)
