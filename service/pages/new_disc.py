"""/new: a tune is brought, a movement and a cutter are chosen, and a disc is laid out."""

import json
from collections.abc import Sequence
from dataclasses import dataclass

from flask import Blueprint, Response, request

from layout.documents import shipped_cutter_ids
from service.access.scopes import Scope
from service.api.asking import asker_or_none, open_on_loopback
from service.pages.page_views import gives_page
from service.pages.rendering import page
from service.parts import Parts
from service.store.documents import KeptDocument, documents_in_force

MOST_LISTED = 200  # documents of a kind; far more than a shop has


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """A document that may be chosen: its id, and what a person calls it."""

    id: str
    title: str


def new_disc_routes(parts: Parts) -> Blueprint:
    """The page on which a disc is begun.

    Args:
        parts: Read for the documents that may be chosen, and for limits.
    """
    routes = Blueprint("new_disc_page", __name__)

    @routes.get("/new")
    @gives_page
    @open_on_loopback(Scope.ORDER)
    def begin() -> Response:
        return page(
            request,
            "new_disc.html",
            scripts=("new", "movements"),
            movements=_choices(_documents(parts, "movement")),
            cutters=_choices(_documents(parts, "cutter")),
            default_cutter=shipped_cutter_ids()[0],
            most_bytes=parts.settings.limits.upload_bytes,
        )

    return routes


def _documents(parts: Parts, kind: str) -> Sequence[KeptDocument]:
    asker = asker_or_none()
    owner_id = None if asker is None else asker.owner_id
    with parts.store.reading() as session:
        return documents_in_force(session, owner_id, kind, after="", most=MOST_LISTED)


def _choices(documents: Sequence[KeptDocument]) -> tuple[Choice, ...]:
    read = [(document.id, json.loads(document.text)) for document in documents]
    return tuple(Choice(id=name, title=told.get("title") or told["kind"]) for name, told in read)
