"""Answers as they leave the service: JSON bytes, entity tags, and what every answer's head says."""

import hashlib
import json
from typing import Any

from flask import Request, Response

from service.media_types import JSON_MEDIA_TYPE

# Nothing the service gives may load or run anything; an SVG needs its own styles to be seen.
NOTHING_LOADS = "default-src 'none'"
ONLY_OWN_STYLES = "default-src 'none'; style-src 'unsafe-inline'"


def json_bytes(value: Any) -> bytes:
    """A value as JSON in UTF-8, ended by a line break; the same value gives the same bytes.

    A lone surrogate, which JSON can say and UTF-8 cannot, is written as the escape JSON has for it.
    """
    text = json.dumps(value, ensure_ascii=False, indent=2, allow_nan=False)
    return (text + "\n").encode("utf-8", "backslashreplace")


def json_response(value: Any, *, status: int = 200) -> Response:
    """An answer in JSON that is not kept by caches without asking."""
    response = Response(json_bytes(value), status=status, content_type=JSON_MEDIA_TYPE)
    response.headers["Cache-Control"] = "no-cache"
    return response


def document_response(value: Any, request: Request) -> Response:
    """An answer in JSON with an entity tag of its bytes, or 304 where the client has them already."""
    response = json_response(value)
    response.set_etag(hashlib.sha256(response.get_data()).hexdigest()[:32])
    response.make_conditional(request)
    return response


def with_safe_head(response: Response) -> Response:
    """The answer with the header fields that every answer carries."""
    response.headers.setdefault("X-Content-Type-Options", "nosniff")
    response.headers.setdefault("Content-Security-Policy", NOTHING_LOADS)
    return response
