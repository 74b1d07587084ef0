"""Every kind of error the service answers with, in one table (RFC 9457 problem details)."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from flask import Response

from service.api import document_problem_kinds, hook_problem_kinds, order_problem_kinds, problem_kinds
from service.api.answers import json_bytes
from service.api.problem_kinds import ProblemKind
from service.api.request_ids import request_id

PROBLEM_MEDIA_TYPE = "application/problem+json"


_ALL = (
    *problem_kinds.KINDS,
    *order_problem_kinds.KINDS,
    *document_problem_kinds.KINDS,
    *hook_problem_kinds.KINDS,
)
PROBLEMS: Mapping[str, ProblemKind] = {kind.name: kind for kind in _ALL}


@dataclass(kw_only=True, eq=False)  # not frozen: Python sets an exception's traceback
class ProblemError(Exception):
    """Ends a request with problem details.

    Attributes:
        name: The kind, a key of PROBLEMS.
        detail: What went wrong this time: the thing, the value seen, what is allowed.
        more: Extension members (RFC 9457 section 3.2), named with letters, digits and underscores.
        headers: Header fields of the answer.
    """

    name: str
    detail: str
    more: Mapping[str, Any] = field(default_factory=dict)
    headers: Mapping[str, str] = field(default_factory=dict)

    def __str__(self) -> str:
        return f"{self.name}: {self.detail}"


def problem_response(problem: ProblemError, *, instance: str) -> Response:
    """The answer that tells a problem.

    Args:
        problem: What went wrong.
        instance: The path of the request, as a URI reference.
    """
    kind = PROBLEMS[problem.name]
    told = {
        "type": kind.type,
        "title": kind.title,
        "status": kind.status,
        "detail": problem.detail,
        "instance": instance,
        "request_id": request_id(),
        "try_again": kind.try_again,
        **problem.more,
    }
    response = Response(json_bytes(told), status=kind.status, content_type=PROBLEM_MEDIA_TYPE)
    response.headers.update(problem.headers)
    response.headers["Cache-Control"] = "no-store"
    return response
