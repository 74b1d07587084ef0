"""/v1/movements and /v1/cutters: the documents that ship, and those that owners keep, by revisions.

What ships is told to all. A key sees its owner's own documents too, and the shop's: of one id its own come first.
"""

import hashlib
from typing import Any
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from layout.documents import read_cutter, read_movement
from layout.errors import DocumentError, NotShippedError
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import conditional, document_response, json_bytes, json_response
from service.api.asking import asker_or_none, needs, open_and_more_with
from service.api.bodies import body_of
from service.api.describing import describes
from service.api.failures import places_told
from service.api.models.documents import DocumentQuery, DocumentsQuery
from service.api.operations import catalogue
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.catalogue import cutter_told, document_told, movement_told
from service.media_types import JSON_MEDIA_TYPE
from service.moments import moment_text
from service.parts import Parts
from service.store.documents import (
    SHIPPED_IDS,
    KeptDocument,
    KeptRevision,
    check_text,
    document_in_force,
    documents_in_force,
    revisions_of,
    shipped_document,
)
from service.store.revising import (
    AsExpected,
    DocumentAbsentError,
    DocumentMovedError,
    DocumentNotOwnError,
    Draft,
    Saved,
    Writer,
    save_document,
    withdraw_document,
)

KINDS = ("movement", "cutter")
TAG_DIGITS = 24  # hex digits: 96 bits, so that no two texts meet


def catalogue_routes(parts: Parts) -> Blueprint:
    """The routes of movements and cutters.

    Args:
        parts: What documents are kept in.
    """
    routes = Blueprint("catalogue", __name__, url_prefix="/v1")
    for kind in KINDS:
        _add_routes(routes, kind, _Shelf(parts, kind))
    return routes


def _add_routes(routes: Blueprint, kind: str, shelf: "_Shelf") -> None:
    path = f"/{kind}s/<document_id>"

    @routes.get(f"/{kind}s", endpoint=f"list_{kind}s")
    @describes(catalogue.LIST[kind])
    @open_and_more_with(Scope.READ)
    def list_all() -> Response:
        return shelf.list_all(asker_or_none(), request)

    @routes.get(path, endpoint=f"tell_{kind}")
    @describes(catalogue.TELL[kind])
    @open_and_more_with(Scope.READ)
    def tell(document_id: str) -> Response:
        return shelf.tell(asker_or_none(), document_id, request)

    @routes.get(f"{path}/revisions", endpoint=f"list_revisions_of_{kind}")
    @describes(catalogue.REVISIONS[kind])
    @open_and_more_with(Scope.READ)
    def revisions(document_id: str) -> Response:
        return shelf.revisions(asker_or_none(), document_id)

    @routes.put(path, endpoint=f"save_{kind}")
    @describes(catalogue.SAVE[kind])
    @needs(Scope.MOVEMENTS)
    def save(asker: Asker, document_id: str) -> Response:
        return shelf.save(asker, document_id, request)

    @routes.post(f"/{kind}s/check", endpoint=f"check_{kind}")
    @describes(catalogue.CHECK[kind])
    @needs(Scope.MOVEMENTS)
    def check(_: Asker) -> Response:
        return shelf.check(request)

    @routes.delete(path, endpoint=f"withdraw_{kind}")
    @describes(catalogue.WITHDRAW[kind])
    @needs(Scope.MOVEMENTS)
    def withdraw(asker: Asker, document_id: str) -> Response:
        return shelf.withdraw(asker, document_id, request)


class _Shelf:
    """The documents of a kind."""

    def __init__(self, parts: Parts, kind: str) -> None:
        self._store = parts.store
        self._limits = parts.settings.limits
        self._kind = kind

    def list_all(self, asker: Asker | None, asked: Request) -> Response:
        query = read_arguments(asked, DocumentsQuery)
        owner_id = None if asker is None else asker.owner_id
        with self._store.reading() as session:
            found = documents_in_force(session, owner_id, self._kind, after=query.after, most=query.limit + 1)
        listed = found[: query.limit]
        told = [{**_line(document), "kept_by": whose_is(document.owner_id, asker)} for document in listed]
        response = document_response({f"{self._kind}s": told}, asked)
        if len(found) > query.limit:
            following = urlencode({"after": listed[-1].id, "limit": query.limit})
            response.headers["Link"] = f'</v1/{self._kind}s?{following}>; rel="next"'  # RFC 8288
        return response

    def tell(self, asker: Asker | None, document_id: str, asked: Request) -> Response:
        query = read_arguments(asked, DocumentQuery)
        document = self._found(asker, document_id, query.revision)
        if getattr(query, "as") == "written":
            response = Response(document.text, content_type=JSON_MEDIA_TYPE)
            response.headers["Cache-Control"] = "no-cache"
        else:
            response = json_response(_resolved(document))
        response.set_etag(tag_of(document))
        return conditional(response, asked)

    def revisions(self, asker: Asker | None, document_id: str) -> Response:
        with self._store.reading() as session:
            owner_id = None if asker is None else asker.owner_id
            found = revisions_of(session, owner_id, self._kind, document_id)
        if not found:
            raise self._unknown(document_id)
        return json_response({"revisions": [self._revision_told(document_id, one, asker) for one in found]})

    def save(self, asker: Asker, document_id: str, asked: Request) -> Response:
        as_expected = _expected(asked, may_be_new=True)
        writer = _writer(asker)
        draft = Draft(kind=self._kind, id=document_id, text=self._text_of(asked))
        try:
            saved = save_document(self._store, writer, draft, as_expected)
        except DocumentMovedError as fault:
            raise ProblemError(name="document-changed", detail=str(fault)) from fault
        return self._saved_response(saved)

    def check(self, asked: Request) -> Response:
        text = self._text_of(asked)
        try:
            check_text(self._kind, text)
        except DocumentError as fault:
            return json_response({"faults": places_told(fault, self._limits), "fault_count": len(fault.problems)})
        return json_response({"faults": [], "fault_count": 0})

    def _text_of(self, asked: Request) -> bytes:
        """The document that a request brings.

        Raises:
            ProblemError: It is no JSON, or too large.
        """
        if asked.mimetype != JSON_MEDIA_TYPE:
            raise ProblemError(
                name="media-type-unsupported",
                detail=f"{asked.mimetype[:100] or 'a body without a media type'!r} is not taken; "
                f"a {self._kind} is sent as {JSON_MEDIA_TYPE}",
                more={"allowed_types": [JSON_MEDIA_TYPE]},
            )
        return body_of(asked, self._limits.document_bytes)

    def withdraw(self, asker: Asker, document_id: str, asked: Request) -> Response:
        as_expected = _expected(asked, may_be_new=False)
        try:
            withdraw_document(self._store, _writer(asker), self._kind, document_id, as_expected)
        except DocumentAbsentError as fault:
            raise self._unknown(document_id) from fault
        except DocumentMovedError as fault:
            raise ProblemError(name="document-changed", detail=str(fault)) from fault
        except DocumentNotOwnError as fault:
            raise ProblemError(
                name="document-not-own", detail=f"the {self._kind} {document_id} is the shop's, or ships"
            ) from fault
        return Response(status=204)

    def _found(self, asker: Asker | None, document_id: str, revision: int | None) -> KeptDocument:
        if asker is None:
            found = shipped_document(self._kind, document_id, revision)
        else:
            with self._store.reading() as session:
                found = document_in_force(session, asker.owner_id, self._kind, document_id, revision=revision)
        if found is None:
            raise self._unknown(document_id) if revision is None else self._no_such_revision(document_id, revision)
        return found

    def _unknown(self, document_id: str) -> NotShippedError:
        return NotShippedError(document=self._kind, document_id=document_id[:64], known_ids=SHIPPED_IDS[self._kind]())

    def _no_such_revision(self, document_id: str, revision: int) -> ProblemError:
        return ProblemError(
            name=f"{self._kind}-unknown",
            detail=f"there is no revision {revision} of a {self._kind} {document_id[:64]!r}; "
            f"GET /v1/{self._kind}s/ID/revisions lists those there are",
        )

    def _saved_response(self, saved: Saved) -> Response:
        document = saved.document
        address = f"/v1/{self._kind}s/{document.id}"
        told = {
            "id": document.id,
            "revision": document.revision,
            "sha256": document.digest,
            "entity_tag": f'"{tag_of(document)}"',
            "links": {
                "self": address,
                "revision": f"{address}?revision={document.revision}",
                "revisions": f"{address}/revisions",
            },
        }
        # No ETag: what is given is not the text that was sent, and a tag here would say it is (RFC 9110 section 9.3.4).
        response = json_response(told, status=201 if saved.is_new else 200)
        if saved.is_new:
            response.headers["Location"] = address
        return response

    def _revision_told(self, document_id: str, one: KeptRevision, asker: Asker | None) -> dict[str, Any]:
        kept_by = whose_is(one.owner_id, asker)
        return {
            "revision": one.revision,
            "sha256": one.digest,
            "kept_by": kept_by,
            "saved_at": None if one.saved_at is None else moment_text(one.saved_at),
            "saved_by": one.saved_by if kept_by == "own" else None,
            "withdrawn_at": None if one.withdrawn_at is None else moment_text(one.withdrawn_at),
            "href": f"/v1/{self._kind}s/{document_id}?revision={one.revision}",
        }


def tag_of(document: KeptDocument) -> str:
    """The entity tag of a revision: of its number, its text, and what this program makes of it."""
    seen = document.digest.encode() + json_bytes(_resolved(document))
    return f"{document.revision}-{hashlib.sha256(seen).hexdigest()[:TAG_DIGITS]}"


def _resolved(document: KeptDocument) -> dict[str, Any]:
    return document_told((read_movement if document.kind == "movement" else read_cutter)(document.text))


def _line(document: KeptDocument) -> dict[str, Any]:
    if document.kind == "movement":
        return movement_told(read_movement(document.text))
    return {**cutter_told(read_cutter(document.text)), "revision": document.revision}


def whose_is(owner_id: str | None, asker: Asker | None) -> str:
    """Who keeps a document, as who asks sees it: "own", "shop" or "shipped"."""
    if owner_id is None:
        return "shipped"
    return "own" if asker is not None and owner_id == asker.owner_id else "shop"


def _writer(asker: Asker) -> Writer:
    """The asker as one who changes documents.

    Raises:
        ProblemError: Its orders never reach the shop, and what real orders are planned with is not for it to change.
    """
    if asker.is_test:
        raise ProblemError(name="key-for-tests", detail="the key shown is for tests and changes no movement or cutter")
    return Writer(owner_id=asker.owner_id, key_id=asker.key_id)


def _expected(asked: Request, *, may_be_new: bool) -> AsExpected:
    """What must be in force for a change to be made, as the request's head says.

    Raises:
        ProblemError: It says nothing of it. If-Match: * names no revision, and so guards nobody's change.
    """
    seen = asked.if_match
    if seen and not seen.star_tag:
        return lambda document: document is not None and seen.contains(tag_of(document))
    if may_be_new and asked.if_none_match.star_tag and not seen:
        return lambda document: document is None
    raise ProblemError(
        name="precondition-required",
        detail="send If-Match with the entity tag of the newest revision"
        + (", or If-None-Match: * where there is none yet" if may_be_new else ""),
    )
