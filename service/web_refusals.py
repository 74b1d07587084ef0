"""What a web process answers before there is a request to answer: one that is not whole."""

import secrets
from http import HTTPStatus

from gunicorn.http.errors import LimitRequestHeaders, LimitRequestLine, ParseException

from service.api.answers import NOTHING_LOADS, json_bytes
from service.api.problems import PROBLEM_MEDIA_TYPE, PROBLEMS
from service.api.request_ids import FIELD, RANDOM_BYTES
from service.wording import shortened

MOST_CHARACTERS = 200  # of what the reader of requests says, which may repeat what was sent


def refusal_of(fault: ParseException) -> bytes:
    """A whole answer that tells why gunicorn could not read a request.

    Args:
        fault: What it raised.
    """
    match fault:
        case LimitRequestLine():
            name = "address-too-long"
        case LimitRequestHeaders():
            name = "head-too-large"
        case _:
            name = "request-malformed"
    return refusal(name, shortened(str(fault) or type(fault).__name__, MOST_CHARACTERS))


def refusal(name: str, detail: str, *, retry_after_s: int | None = None) -> bytes:
    """A whole answer, head and body, that tells a problem and ends the connection.

    Args:
        name: The kind, a key of PROBLEMS.
        detail: What went wrong this time.
        retry_after_s: After how many seconds the same may do better; None where no time helps.
    """
    kind = PROBLEMS[name]
    request_id = f"req_{secrets.token_hex(RANDOM_BYTES)}"
    body = json_bytes(
        {
            "type": kind.type,
            "title": kind.title,
            "status": kind.status,
            "detail": detail,
            "request_id": request_id,
            "try_again": kind.try_again,
        }
    )
    head = (
        f"HTTP/1.1 {kind.status} {HTTPStatus(kind.status).phrase}",
        f"Content-Type: {PROBLEM_MEDIA_TYPE}",
        f"Content-Length: {len(body)}",
        f"{FIELD}: {request_id}",
        *(() if retry_after_s is None else (f"Retry-After: {retry_after_s}",)),
        "Cache-Control: no-store",
        "X-Content-Type-Options: nosniff",
        f"Content-Security-Policy: {NOTHING_LOADS}",
        "Connection: close",
    )
    return "\r\n".join((*head, "", "")).encode() + body
