"""/v1/trial-pieces: a movement and a cutter become a trial piece; nothing is kept of it."""

import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from flask import Blueprint, Request, Response, request

from layout.documents import Cutter, Movement
from service.access.scopes import Scope
from service.api.answers import ONLY_OWN_STYLES, json_response
from service.api.archive import ZIP_MEDIA_TYPE, archive_of
from service.api.asking import asker_or_none, open_on_loopback
from service.api.bodies import body_of
from service.api.computing_queue import computing_queue
from service.api.describing import describes
from service.api.failures import too_large
from service.api.models.layouts import TrialPieceQuery
from service.api.multipart import parts_of
from service.api.operations import layouts
from service.api.posted import machines_of
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.computation import trial_files
from service.documents import cutter_from, kept_for, movement_from
from service.limits import Limits
from service.media_types import JSON_MEDIA_TYPE
from service.parts import Parts

FORM_MEDIA_TYPE = "multipart/form-data"
DOCUMENT_PARTS = ("movement", "cutter")
ALL_FILES, PICTURE = "trial-piece.zip", "trial-piece.svg"
# What a POST can answer with, by media type; the first where the client does not mind.
ANSWERS = {
    JSON_MEDIA_TYPE: "trial-piece.json",
    "image/vnd.dxf": "trial-piece.dxf",
    "image/svg+xml": PICTURE,
    "application/pdf": "measure.pdf",
    ZIP_MEDIA_TYPE: ALL_FILES,
}
TrialMaker = Callable[[Movement, Cutter], Mapping[str, bytes]]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Asked:
    """The documents of a trial piece, as they were asked for."""

    movement: Movement
    cutter: Cutter


def trial_piece_routes(parts: Parts, make: TrialMaker = trial_files) -> Blueprint:
    """The route of trial pieces.

    Args:
        parts: Read for limits, and for the documents that owners keep.
        make: The computation: the files by name.
    """
    routes = Blueprint("trial_pieces", __name__, url_prefix="/v1/trial-pieces")

    @routes.post("")
    @describes(layouts.TRIAL_PIECE)
    @open_on_loopback(Scope.ORDER)
    def make_trial_piece() -> Response:
        file_name = _answer_wanted(request)  # what is not acceptable is refused before anything is read
        query = read_arguments(request, TrialPieceQuery)
        asked = _read(request, query, parts)
        with computing_queue().admitted():
            files = make(asked.movement, asked.cutter)
        response = _answer(asked, files, file_name)
        response.vary.add("Accept")
        return response

    return routes


def _answer(asked: _Asked, files: Mapping[str, bytes], file_name: str) -> Response:
    if file_name == "trial-piece.json":
        return json_response(json.loads(files[file_name]))
    if file_name == ALL_FILES:
        content = archive_of({_saved_as(asked, name): inside for name, inside in files.items()})
    else:
        content = files[file_name]
    media_type = next(media_type for media_type, name in ANSWERS.items() if name == file_name)
    response = Response(content, content_type=media_type)
    how = "attachment"
    if file_name == PICTURE:
        response.headers["Content-Security-Policy"] = ONLY_OWN_STYLES
        how = "inline"
    response.headers["Content-Disposition"] = f'{how}; filename="{_saved_as(asked, file_name)}"'
    response.headers["Cache-Control"] = "no-cache"
    return response


def _saved_as(asked: _Asked, file_name: str) -> str:
    """The name of a file as it is saved: ids are plain letters, digits and hyphens, so it needs no quoting."""
    stem, _, ending = file_name.rpartition(".")
    side = asked.cutter.drawn_from
    return f"{stem}_{asked.movement.id}-r{asked.movement.revision}_{asked.cutter.id}_{side}_mm.{ending}"


def _answer_wanted(asked: Request) -> str:
    if not asked.headers.get("Accept", "").strip():
        return ANSWERS[JSON_MEDIA_TYPE]
    best = asked.accept_mimetypes.best_match(ANSWERS)
    if best is None:
        raise ProblemError(
            name="not-acceptable",
            detail=f"Accept is {asked.headers['Accept'][:200]!r}; the answer can be {', '.join(ANSWERS)}",
            more={"allowed_types": list(ANSWERS)},
        )
    return ANSWERS[best]


def _read(asked: Request, query: TrialPieceQuery, opened: Parts) -> _Asked:
    """The documents that a request names or brings.

    Raises:
        ProblemError: The body is too large, of another media type, or cannot be taken apart; a document is
            missing or given twice.
        LayoutError: A document does not ship or is not valid.
    """
    limits = opened.settings.limits
    parts = _parts(asked, limits)
    for name, part in parts.items():
        if len(part) > limits.document_bytes:
            raise too_large(limits.document_bytes, f"the part {name}")
    movement, cutter = machines_of(query, parts)
    asker = asker_or_none()
    owner_id = None if asker is None else asker.owner_id
    movement = kept_for(opened.store, owner_id, "movement", movement)
    cutter = kept_for(opened.store, owner_id, "cutter", cutter)
    return _Asked(movement=movement_from(movement), cutter=cutter_from(cutter))


def _parts(asked: Request, limits: Limits) -> dict[str, bytes]:
    body = body_of(asked, limits.upload_bytes)
    if asked.mimetype == FORM_MEDIA_TYPE:
        return parts_of(
            body,
            boundary=asked.mimetype_params.get("boundary"),
            known=DOCUMENT_PARTS,
            most_parts=limits.form_parts,
        )
    if body:
        sent = repr(asked.mimetype) if asked.mimetype else "a body without a media type"
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{sent} is not taken; documents of your own come as parts of {FORM_MEDIA_TYPE}, and a trial piece "
            "needs no tune",
            more={"allowed_types": [FORM_MEDIA_TYPE]},
            headers={"Accept-Post": FORM_MEDIA_TYPE},
        )
    return {}
