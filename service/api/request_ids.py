"""The id of a request: in the header field Request-Id of every answer, in every problem, and in the log.

A client may choose it, so that its log and ours tell of the same request under one name.
"""

import re
import secrets

from flask import Flask, Response, request

FIELD = "Request-Id"
# What can stand in any log or header field without quoting.
CHOSEN = re.compile(r"[A-Za-z0-9._~:-]{1,128}")
RANDOM_BYTES = 12
NOTED = "discwright.request_id"  # where the WSGI environment of a request holds it


def name_requests(app: Flask) -> None:
    """Let every answer of an app carry the id of its request."""

    @app.after_request
    def tell_id(response: Response) -> Response:
        response.headers[FIELD] = request_id()
        return response


def request_id() -> str:
    """The id of the request at hand: as the client chose it, else made here; the same each time."""
    environ = request.environ
    noted: str | None = environ.get(NOTED)
    if noted is None:
        chosen = request.headers.get(FIELD, "")
        noted = chosen if CHOSEN.fullmatch(chosen) else f"req_{secrets.token_hex(RANDOM_BYTES)}"
        environ[NOTED] = noted
    return noted
