"""/v1/sheets: a sheet job becomes a plan of discs on stock, or its drawings and part list in one archive.

The job is the body as JSON, or the part `job` of a multipart form. In a form, discs may have drawings: the part
`drawing-ID` is the disc.dxf of the disc with that id in the job. A disc without a drawing is a plain circle.
"""

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from flask import Blueprint, Request, Response, request

from layout.documents.sheets import LIMITS, read_sheet_job
from layout.file_names import PLAN_FILE
from service.access.scopes import Scope
from service.api.archive import ZIP_MEDIA_TYPE, archive_of
from service.api.asking import open_on_loopback
from service.api.bodies import body_of
from service.api.computing_queue import computing_queue
from service.api.describing import describes
from service.api.failures import too_large
from service.api.models.layouts import NoQuery
from service.api.multipart import ID, parts_of
from service.api.operations import layouts
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.computation import plan_sheets, sheet_files_of
from service.download_names import slug
from service.limits import Limits
from service.media_types import JSON_MEDIA_TYPE

if TYPE_CHECKING:
    from layout.sheets.plan import SheetPlan

ANSWERS = (JSON_MEDIA_TYPE, ZIP_MEDIA_TYPE)
FORM_MEDIA_TYPE = "multipart/form-data"
MEDIA_TYPES = (JSON_MEDIA_TYPE, FORM_MEDIA_TYPE)
JOB_PART, DRAWING_PART = "job", "drawing-"
LONGEST_TITLE = 40  # characters of a file name
_MOST_PARTS = 1 + LIMITS.disc_kinds
_JOB = "the sheet job"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Posted:
    """The sheet job as it was sent, and the drawings by the id of their disc."""

    job: bytes
    drawings: dict[str, bytes] = field(default_factory=dict)


def sheet_routes(limits: Limits) -> Blueprint:
    """The routes of sheet jobs.

    Args:
        limits: Read for limits.
    """
    routes = Blueprint("sheets", __name__, url_prefix="/v1/sheets")

    @routes.post("")
    @describes(layouts.SHEETS)
    @open_on_loopback(Scope.ORDER)
    def make_sheets() -> Response:
        media_type = _answer_wanted(request)
        read_arguments(request, NoQuery)
        posted = _posted(request, limits)
        job = read_sheet_job(posted.job)
        with computing_queue().admitted():
            plan = plan_sheets(job, posted.drawings)
            files = sheet_files_of(plan)
        if media_type == ZIP_MEDIA_TYPE:
            response = Response(archive_of(files), content_type=ZIP_MEDIA_TYPE)
            response.headers["Content-Disposition"] = f'attachment; filename="{_archive_name(plan)}"'
        else:
            response = Response(files[PLAN_FILE], content_type=JSON_MEDIA_TYPE)
        response.headers["Cache-Control"] = "no-cache"
        response.vary.add("Accept")
        return response

    return routes


def _answer_wanted(asked: Request) -> str:
    """The media type of the answer; the plan in JSON where the client does not mind."""
    if not asked.headers.get("Accept", "").strip():
        return JSON_MEDIA_TYPE
    best = asked.accept_mimetypes.best_match(ANSWERS)
    if best is None:
        raise ProblemError(
            name="not-acceptable",
            detail=f"Accept is {asked.headers['Accept'][:200]!r}; the answer can be {', '.join(ANSWERS)}",
            more={"allowed_types": list(ANSWERS)},
        )
    return best


def _posted(asked: Request, limits: Limits) -> _Posted:
    """What was sent.

    Raises:
        ProblemError: The body or the job is too large, of another media type, or cannot be taken apart.
    """
    coding = asked.headers.get("Content-Encoding", "identity").strip().lower()
    if asked.mimetype not in MEDIA_TYPES or coding != "identity":
        sent = repr(asked.mimetype) if asked.mimetype else "a body without a media type"
        sent = sent if coding == "identity" else f"a body packed as {coding[:80]!r}"
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{sent} is not taken; a sheet job is sent as {JSON_MEDIA_TYPE}, or with the drawings of its discs "
            f"as {FORM_MEDIA_TYPE}, unpacked",
            more={"allowed_types": list(MEDIA_TYPES)},
            headers={"Accept-Post": ", ".join(MEDIA_TYPES), "Accept-Encoding": "identity"},
        )
    if asked.mimetype == JSON_MEDIA_TYPE:
        return _Posted(job=body_of(asked, limits.document_bytes, _JOB))
    posted = _from_form(asked, limits)
    if len(posted.job) > limits.document_bytes:
        raise too_large(limits.document_bytes, _JOB)
    return posted


def _from_form(asked: Request, limits: Limits) -> _Posted:
    parts = parts_of(
        body_of(asked, limits.sheet_form_bytes, "the form with the sheet job and its drawings"),
        boundary=asked.mimetype_params.get("boundary"),
        known=(JOB_PART, f"{DRAWING_PART}{ID}"),
        most_parts=_MOST_PARTS,
    )
    if JOB_PART not in parts:
        raise ProblemError(
            name="parameter-missing",
            detail=f"the form has no part {JOB_PART}; it is the sheet job, beside parts {DRAWING_PART}ID for the "
            "drawings of its discs",
            more={"parameter": JOB_PART},
        )
    job = parts.pop(JOB_PART)
    return _Posted(job=job, drawings={name.removeprefix(DRAWING_PART): dxf for name, dxf in parts.items()})


def _archive_name(plan: "SheetPlan") -> str:
    title = slug(plan.title, LONGEST_TITLE) or "untitled"
    return f"{'' if plan.complete else 'NOT-ALL-PLACED_'}{title}_sheets_mm_{plan.fingerprint}.zip"
