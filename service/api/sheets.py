"""/v1/sheets: a sheet job becomes a plan of discs on stock, or its drawings and part list in one archive."""

from flask import Blueprint, Request, Response, request

from layout.documents.sheets import read_sheet_job
from layout.sheet_walk import PLAN_FILE, plan_sheets, sheet_files_of
from layout.sheets.plan import SheetPlan
from service.api.answers import JSON_MEDIA_TYPE
from service.api.archive import ZIP_MEDIA_TYPE, archive_of
from service.api.download_names import slug
from service.api.failures import too_large
from service.api.parameters import read_query
from service.api.problems import ProblemError
from service.limits import Limits

ANSWERS = (JSON_MEDIA_TYPE, ZIP_MEDIA_TYPE)
LONGEST_TITLE = 40  # characters of a file name


def sheet_routes(limits: Limits) -> Blueprint:
    """The routes of sheet jobs.

    Args:
        limits: Read for limits.
    """
    routes = Blueprint("sheets", __name__, url_prefix="/v1/sheets")

    @routes.post("")
    def make_sheets() -> Response:
        media_type = _answer_wanted(request)
        read_query(request.args, known=(), most_reason_characters=limits.reason_characters)
        plan = plan_sheets(read_sheet_job(_posted(request, limits)))
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


def _posted(asked: Request, limits: Limits) -> bytes:
    """The sheet job as it was sent."""
    coding = asked.headers.get("Content-Encoding", "identity").strip().lower()
    if asked.mimetype != JSON_MEDIA_TYPE or coding != "identity":
        sent = repr(asked.mimetype) if coding == "identity" else f"a body packed as {coding!r}"
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{sent} is not taken; a sheet job is sent as {JSON_MEDIA_TYPE}, unpacked",
            more={"allowed_types": [JSON_MEDIA_TYPE]},
            headers={"Accept-Post": JSON_MEDIA_TYPE, "Accept-Encoding": "identity"},
        )
    body = asked.get_data()  # up to one byte more than the app's limit, which may be the larger
    if len(body) > limits.document_bytes:
        raise too_large(limits.document_bytes, "the sheet job")
    return body


def _archive_name(plan: SheetPlan) -> str:
    title = slug(plan.title, LONGEST_TITLE) or "untitled"
    return f"{'' if plan.complete else 'NOT-ALL-PLACED_'}{title}_sheets_mm_{plan.fingerprint}.zip"
