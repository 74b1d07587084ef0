"""From whatever was raised to problem details: the one place where exceptions become answers."""

import logging
from contextlib import suppress
from http import HTTPStatus
from typing import Any
from urllib.parse import quote

from flask import Flask, Response, request
from werkzeug.exceptions import HTTPException, MethodNotAllowed, NotFound, RequestEntityTooLarge
from werkzeug.wrappers import Response as AnyResponse

from layout.errors import DocumentError, LayoutError, MidiReadError, NotShippedError, RulingError
from service.api.order_failures import problem_of_order, problem_of_store
from service.api.problems import ProblemError, problem_response
from service.limits import Limits
from service.orders.faults import OrderFault
from service.store.faults import StoreError
from service.web_gathering import SlowBodyError
from service.wording import shortened, told_in_short

log = logging.getLogger("discwright")

DRAIN_STEP_BYTES = 64 * 1024  # bytes read at a time of a body that is thrown away; of no consequence


def answer_failures(app: Flask, limits: Limits) -> None:
    """Make an app answer everything that is raised with problem details.

    Args:
        app: The app.
        limits: Read for limits.
    """

    def tell(problem: ProblemError) -> Response:
        _drain(limits.drained_bytes)
        return problem_response(problem, instance=quote(request.path))

    @app.errorhandler(ProblemError)
    def _(problem: ProblemError) -> Response:
        return tell(problem)

    @app.errorhandler(LayoutError)
    def _(error: LayoutError) -> Response:
        return tell(problem_of(error, limits))

    @app.errorhandler(OrderFault)
    def _(fault: OrderFault) -> Response:
        return tell(problem_of_order(fault, limits))

    @app.errorhandler(StoreError)
    def _(fault: StoreError) -> Response:
        return tell(problem_of_store(fault))

    @app.errorhandler(SlowBodyError)
    def _(fault: SlowBodyError) -> Response:
        return tell(ProblemError(name="request-too-slow", detail="the body came too slowly to be waited for"))

    @app.errorhandler(HTTPException)
    def _(refusal: HTTPException) -> Response | AnyResponse:
        if refusal.code is None or refusal.code < HTTPStatus.BAD_REQUEST:
            return refusal.get_response()
        return tell(_problem_of_refusal(refusal, limits))

    @app.errorhandler(Exception)
    def _(failure: Exception) -> Response:
        return tell(_internal(failure))


def problem_of(error: LayoutError, limits: Limits) -> ProblemError:
    """The problem that tells an error of the computation.

    Args:
        error: What the computation raised.
        limits: Read for how much is told.

    Returns:
        internal-error for an error that no request can lead to.
    """
    match error:
        case MidiReadError():
            more: dict[str, Any] = {
                "byte_offset": error.byte_offset,
                "found": error.found,
                "expected": error.expected,
                "remedy": error.remedy,
            }
            return ProblemError(name="midi-unreadable", detail=str(error), more=more)
        case DocumentError():
            name = "rulings-contradict" if isinstance(error, RulingError) else "document-invalid"
            return _problem_of_document(name, error, limits)
        case NotShippedError():
            return ProblemError(
                name=f"{error.document}-unknown", detail=str(error), more={"known_ids": list(error.known_ids)}
            )
    return _internal(error)


def _problem_of_document(name: str, error: DocumentError, limits: Limits) -> ProblemError:
    more: dict[str, Any] = {
        "document": error.document,
        "invalid_params": places_told(error, limits),
        "problem_count": len(error.problems),
    }
    return ProblemError(name=name, detail=told_in_short(error, limits.shown_characters), more=more)


def places_told(error: DocumentError, limits: Limits) -> list[dict[str, str]]:
    """The faults of a document as answers tell them: the place of each and what it is, the first so many."""
    most = limits.shown_characters
    shown = error.problems[: limits.shown_problems]
    return [{"pointer": shortened(p.pointer, most), "detail": shortened(p.message, most)} for p in shown]


def _problem_of_refusal(refusal: HTTPException, limits: Limits) -> ProblemError:
    match refusal:
        case RequestEntityTooLarge():
            return too_large(limits.upload_bytes, "the request body")
        case MethodNotAllowed():
            allowed = sorted(refusal.valid_methods or ())
            return ProblemError(
                name="method-not-allowed",
                detail=f"{request.method} is not taken here; taken are {', '.join(allowed)}",
                headers={"Allow": ", ".join(allowed)},
            )
        case NotFound():
            return ProblemError(
                name="route-unknown",
                detail=f"there is nothing at {shortened(request.path, limits.shown_characters)}",
            )
    if refusal.code is not None and refusal.code >= HTTPStatus.INTERNAL_SERVER_ERROR:
        return _internal(refusal)
    return ProblemError(name="request-malformed", detail=refusal.description or refusal.name)


def too_large(limit_bytes: int, what: str) -> ProblemError:
    """The problem that something sent is larger than its limit.

    Args:
        limit_bytes: The limit.
        what: The thing, as the subject of a sentence.
    """
    return ProblemError(
        name="upload-too-large",
        detail=f"{what} is larger than {limit_bytes} bytes",
        more={"limit_bytes": limit_bytes},
    )


def _internal(failure: Exception) -> ProblemError:
    log.error("%s %r failed", request.method, request.path, exc_info=failure)
    return ProblemError(name="internal-error", detail="the service failed; its log holds the trace")


def _drain(most_bytes: int) -> None:
    """Read what is left of a body, so that a sender still sending gets to read the answer, not a reset."""
    if not request.environ.get("wsgi.input_terminated"):
        return  # the server does not mark the end of a body; reading on would wait for ever
    body = request.environ["wsgi.input"]
    left = most_bytes
    with suppress(SlowBodyError):  # who sends no more gets the answer now
        while left > 0 and (chunk := body.read(min(left, DRAIN_STEP_BYTES))):
            left -= len(chunk)
