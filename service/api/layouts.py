"""/v1/layouts: a tune becomes a layout; a layout gives its files."""

import hashlib
import json
import re
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from layout.walk import CUTTING_FILES, FILES
from service.api.answers import JSON_MEDIA_TYPE, ONLY_OWN_STYLES, json_response
from service.api.desk import LayoutDesk
from service.api.download_names import NamedDisc, content_disposition
from service.api.layout_cache import KeptLayout
from service.api.parameters import read_query
from service.api.posted import read_posted
from service.api.problems import ProblemError
from service.limits import Limits

FINGERPRINT = re.compile(r"[0-9a-f]{16}")
MEDIA_TYPES = {
    "disc.dxf": "image/vnd.dxf",
    "record.dxf": "image/vnd.dxf",
    "disc.svg": "image/svg+xml",
    "hits.csv": "text/csv; charset=utf-8",
    "layout.json": JSON_MEDIA_TYPE,
    "report.json": JSON_MEDIA_TYPE,
}
# What a POST can answer with, by media type; the first where the client does not mind.
ANSWERS: dict[str, str | None] = {JSON_MEDIA_TYPE: None, "image/svg+xml": "disc.svg", "image/vnd.dxf": "disc.dxf"}


def layout_routes(desk: LayoutDesk, limits: Limits) -> Blueprint:
    """The routes of layouts.

    Args:
        desk: Computes and keeps layouts.
        limits: Read for limits.
    """
    routes = Blueprint("layouts", __name__, url_prefix="/v1/layouts")
    teller = LayoutTeller(desk, limits)

    def reason_asked(*known: str) -> str | None:
        return read_query(request.args, known=known, most_reason_characters=limits.reason_characters).reason

    @routes.post("")
    def make_layout() -> Response:
        file_name = _answer_wanted(request)
        query = read_query(
            request.args,
            known=("movement", "cutter", "despite_findings"),
            most_reason_characters=limits.reason_characters,
        )
        kept = desk.lay_out(read_posted(request, query, limits))
        if file_name is None:
            response = teller.layout(kept, query.reason)
            response.status_code = 201
            response.headers["Location"] = teller.address(kept, None, query.reason)
        else:
            response = teller.file(kept, file_name, query.reason)
            response.headers["Content-Location"] = teller.address(kept, file_name, query.reason)
        response.vary.add("Accept")
        return response

    @routes.get("/<fingerprint>")
    def tell_layout(fingerprint: str) -> Response:
        kept = _found(desk, fingerprint)
        response = teller.layout(kept, reason_asked("despite_findings"))
        response.make_conditional(request)
        return response

    @routes.get("/<fingerprint>/<file_name>")
    def give_file(fingerprint: str, file_name: str) -> Response:
        if file_name not in FILES:
            raise ProblemError(
                name="route-unknown",
                detail=f"a layout has no file called {file_name!r}; it has {', '.join(FILES)}",
                more={"known_files": list(FILES)},
            )
        kept = _found(desk, fingerprint)
        response = teller.file(kept, file_name, reason_asked("despite_findings"))
        response.make_conditional(request)
        return response

    return routes


class LayoutTeller:
    """Tells layouts and gives their files, as they were made or marked NOT GOOD TO CUT."""

    def __init__(self, desk: LayoutDesk, limits: Limits) -> None:
        self._desk = desk
        self._limits = limits

    def address(self, kept: KeptLayout, file_name: str | None, reason: str | None) -> str:
        """The path of a layout, or of one of its files, on the service; it carries the reason on."""
        path = f"/v1/layouts/{kept.fingerprint}" + (f"/{file_name}" if file_name else "")
        return path if kept.good_to_cut or reason is None else f"{path}?{urlencode({'despite_findings': reason})}"

    def layout(self, kept: KeptLayout, reason: str | None) -> Response:
        """A layout in JSON, with links to the files that can be had; those kept back are left out."""
        files = kept.files if reason is None or kept.good_to_cut else self._desk.marked_files(kept, reason)
        response = json_response(
            {
                "fingerprint": kept.fingerprint,
                "title": kept.title,
                "good_to_cut": kept.good_to_cut,
                "links": {name: self.address(kept, name, reason) for name in FILES if name in files},
                "layout": json.loads(files["layout.json"]),
            }
        )
        response.set_etag(self._tag(kept, "layout", reason))
        return response

    def file(self, kept: KeptLayout, file_name: str, reason: str | None) -> Response:
        """One of a layout's files.

        Raises:
            ProblemError: It is a cutting file, and an error-level finding stands, and no reason is given.
        """
        marked = reason is not None and not kept.good_to_cut
        if reason is not None and marked:
            content = self._desk.marked_files(kept, reason)[file_name]
        elif file_name in CUTTING_FILES and not kept.good_to_cut:
            raise _kept_back(kept, file_name)
        else:
            content = kept.files[file_name]
        response = Response(content, content_type=MEDIA_TYPES[file_name])
        is_picture = file_name == "disc.svg"
        if is_picture:
            response.headers["Content-Security-Policy"] = ONLY_OWN_STYLES
        read = kept.inputs.read()
        disc = NamedDisc(
            title=kept.title,
            movement=read.movement,
            cutter=read.cutter,
            fingerprint=kept.fingerprint,
            not_good=marked,
        )
        response.headers["Content-Disposition"] = content_disposition(
            disc, file_name, how="inline" if is_picture else "attachment"
        )
        response.headers["Cache-Control"] = f"private, max-age={self._limits.file_max_age_s}, immutable"
        response.set_etag(self._tag(kept, file_name, reason))
        return response

    def _tag(self, kept: KeptLayout, what: str, reason: str | None) -> str:
        mark = "" if kept.good_to_cut or reason is None else "-" + hashlib.sha256(reason.encode()).hexdigest()[:16]
        return f"{kept.fingerprint}-{self._desk.program}-{what}{mark}"


def _answer_wanted(asked: Request) -> str | None:
    """The file that a POST shall be answered with; None for the layout in JSON."""
    if not asked.headers.get("Accept", "").strip():
        return None
    best = asked.accept_mimetypes.best_match(ANSWERS)
    if best is None:
        raise ProblemError(
            name="not-acceptable",
            detail=f"Accept is {asked.headers['Accept'][:200]!r}; the answer can be {', '.join(ANSWERS)}",
            more={"allowed_types": list(ANSWERS)},
        )
    return ANSWERS[best]


def _found(desk: LayoutDesk, fingerprint: str) -> KeptLayout:
    kept = desk.find(fingerprint) if FINGERPRINT.fullmatch(fingerprint) else None
    if kept is None:
        raise ProblemError(
            name="layout-unknown",
            detail=f"no layout is kept under {fingerprint[:64]!r}; post the tune again: "
            "the same input gives the same layout and the same fingerprint",
        )
    return kept


def _kept_back(kept: KeptLayout, file_name: str) -> ProblemError:
    findings = json.loads(kept.files["layout.json"])["findings"]
    errors = [finding for finding in findings if finding["level"] == "error"]
    return ProblemError(
        name="not-good-to-cut",
        detail=f"{file_name} is kept back: {len(errors)} error(s), the first: {errors[0]['message']}",
        more={"fingerprint": kept.fingerprint, "findings": findings},
    )
