"""Answers as they leave the service: JSON bytes, entity tags, and what every answer's head says."""

import hashlib
import json
import re
from typing import Any

import orjson
from flask import Request, Response

from service.media_types import JSON_MEDIA_TYPE

# Nothing the service gives may load or run anything; an SVG needs its own styles to be seen.
NOTHING_LOADS = "default-src 'none'"
ONLY_OWN_STYLES = "default-src 'none'; style-src 'unsafe-inline'"
# How orjson writes numbers between 1e-9 and 1e-4; Python writes 1e-05 and 1e-06. They stand at the end of a line, as
# nothing within a text does: that ends in a quotation mark.
_SMALL = re.compile(rb"0\.0000\d+(?=,?\n)")
_SMALLER = re.compile(rb"e-(\d)(?=,?\n)")


def json_bytes(value: Any) -> bytes:
    """A value as JSON in UTF-8, ended by a line break; the same value gives the same bytes.

    A lone surrogate, which JSON can say and UTF-8 cannot, is written as the escape JSON has for it.
    """
    text = json.dumps(value, ensure_ascii=False, indent=2, allow_nan=False)
    return (text + "\n").encode("utf-8", "backslashreplace")


def json_bytes_of_read(value: Any) -> bytes:
    """The same bytes in a twentieth of the time, of what was read from JSON that holds no NaN and no Infinity.

    Ours holds none: `layout.write.json_lines` refuses them.
    """
    try:
        written = orjson.dumps(value, option=orjson.OPT_INDENT_2 | orjson.OPT_APPEND_NEWLINE)
    except TypeError:  # half a surrogate pair, or a whole number of more than 64 bits
        return json_bytes(value)
    return _SMALL.sub(_as_python_writes, _SMALLER.sub(rb"e-0\1", written))


def _as_python_writes(found: re.Match[bytes]) -> bytes:
    is_the_end_of_a_larger_one = found.string[found.start() - 1 : found.start()].isdigit()
    return found[0] if is_the_end_of_a_larger_one else repr(float(found[0])).encode()


def json_response(value: Any, *, status: int = 200) -> Response:
    """An answer in JSON that is not kept by caches without asking."""
    return json_bytes_response(json_bytes(value), status=status)


def json_bytes_response(content: bytes, *, status: int = 200) -> Response:
    """The same of JSON that is written already."""
    response = Response(content, status=status, content_type=JSON_MEDIA_TYPE)
    response.headers["Cache-Control"] = "no-cache"
    return response


def document_response(value: Any, request: Request) -> Response:
    """An answer in JSON with an entity tag of its bytes, or 304 where the client has them already."""
    response = json_response(value)
    response.set_etag(hashlib.sha256(response.get_data()).hexdigest()[:32])
    return conditional(response, request)


def matches(tag: str, request: Request) -> bool:
    """Whether If-Match lets an answer with this entity tag be given: any tag, or this one (RFC 9110 section 13.1.1)."""
    if "If-Match" not in request.headers:
        return True
    wanted = request.if_match
    return wanted.star_tag or wanted.is_strong(tag)


def conditional(response: Response, request: Request) -> Response:
    """An answer with an entity tag as the request's conditions have it: whole, in part, 304 or 412.

    If-Match that holds is out of the way of the others (RFC 9110 section 13.2.2); the library would answer whole where
    it holds, whatever If-None-Match says, and knows no asterisk in it.
    """
    environ = dict(request.environ)
    if matches(response.get_etag()[0] or "", request):
        environ.pop("HTTP_IF_MATCH", None)
    response.make_conditional(environ)
    return response


def with_safe_head(response: Response) -> Response:
    """The answer with the header fields that every answer carries."""
    response.headers.setdefault("X-Content-Type-Options", "nosniff")
    response.headers.setdefault("Content-Security-Policy", NOTHING_LOADS)
    return response
