"""/problems: what each kind of error means and what to do about it."""

from flask import Blueprint, Response, request

from service.api.answers import document_response
from service.api.asking import open_to_all
from service.api.describing import describes
from service.api.operations import about
from service.api.problem_kinds import ProblemKind
from service.api.problems import PROBLEMS, ProblemError


def problem_pages() -> Blueprint:
    """The pages that a problem's `type` leads to."""
    pages = Blueprint("problems", __name__, url_prefix="/problems")

    @pages.get("")
    @describes(about.PROBLEM_KINDS)
    @open_to_all
    def list_kinds() -> Response:
        return document_response({"problems": [_told(kind) for kind in PROBLEMS.values()]}, request)

    @pages.get("/<name>")
    @describes(about.PROBLEM_KIND)
    @open_to_all
    def tell_kind(name: str) -> Response:
        if name not in PROBLEMS:
            raise ProblemError(
                name="route-unknown",
                detail=f"no kind of problem is called {name!r}",
                more={"known_ids": list(PROBLEMS)},
            )
        return document_response(_told(PROBLEMS[name]), request)

    return pages


def _told(kind: ProblemKind) -> dict[str, object]:
    return {
        "type": kind.type,
        "title": kind.title,
        "status": kind.status,
        "what_to_do": kind.what_to_do,
        "try_again": kind.try_again,
    }
