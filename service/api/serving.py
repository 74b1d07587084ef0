"""Files out of the store: entity tags, digests, ranges, names, and caching for ever, since they never change."""

import base64
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Protocol

from flask import Request, Response
from werkzeug.http import parse_range_header

from service.api.problems import ProblemError


@dataclass(frozen=True, slots=True, kw_only=True)
class Served:
    """A file as it is given out.

    Attributes:
        digest: SHA-256 in hex digits.
        byte_count: Its size.
        media_type: What it is.
        saved_as: The name of the download, in ASCII.
        how: "attachment" or "inline".
        max_age_s: How long it may be kept without asking.
    """

    digest: str
    byte_count: int
    media_type: str
    saved_as: str
    how: str
    max_age_s: int


class Pieces(Protocol):
    """What keeps files by their digests, such as the store of files."""

    def chunks(self, digest: str, *, start: int = 0, end: int | None = None) -> Iterator[bytes]:
        """A file in pieces, from byte `start` up to but without `end`."""


def served(files: Pieces, file: Served, asked: Request) -> Response:
    """A file, or the range of it that is asked for, read piece by piece.

    The digest of the whole is told by Repr-Digest, and by Content-Digest where the whole is sent (RFC 9530). Of
    several ranges none is honoured, as RFC 9110 allows: the whole is sent.

    Raises:
        ProblemError: The range is not in the file.
        StoreError: The file cannot be read.
    """
    span = _span(file, asked)
    start, end = span or (0, file.byte_count)
    is_known = asked.if_none_match.contains(file.digest)
    is_wanted = asked.method != "HEAD" and not is_known  # else the file is not even opened
    pieces = files.chunks(file.digest, start=start, end=end) if is_wanted else ()
    response = Response(pieces, content_type=file.media_type)
    response.content_length = end - start
    response.set_etag(file.digest)
    digest = f"sha-256=:{base64.b64encode(bytes.fromhex(file.digest)).decode()}:"
    response.headers["Repr-Digest"] = digest
    response.headers["Accept-Ranges"] = "bytes"
    response.headers["Content-Disposition"] = f'{file.how}; filename="{file.saved_as}"'
    response.headers["Cache-Control"] = f"private, max-age={file.max_age_s}, immutable"
    if span is None:
        response.headers["Content-Digest"] = digest
    else:
        response.status_code = 206
        response.headers["Content-Range"] = f"bytes {start}-{end - 1}/{file.byte_count}"
    if is_known:
        response.status_code = 304
        for name in ("Content-Length", "Content-Range", "Content-Digest", "Content-Type"):
            response.headers.pop(name, None)
    return response


def _span(file: Served, asked: Request) -> tuple[int, int] | None:
    """The range to send, None for the whole."""
    text = asked.headers.get("Range")
    if text is None or asked.method != "GET" or asked.if_none_match:
        return None
    if "If-Range" in asked.headers and asked.if_range.etag != file.digest:
        return None
    wanted = parse_range_header(text)
    if wanted is None or wanted.units != "bytes" or len(wanted.ranges) != 1:
        return None  # a range that is not understood is as if it were not there (RFC 9110 section 14.2)
    begin, _ = wanted.ranges[0]
    if begin is not None and -begin > file.byte_count > 0:
        return 0, file.byte_count  # more of its end than there is: all of it (RFC 9110 section 14.1.2)
    span = wanted.range_for_length(file.byte_count)
    if span is None:
        raise ProblemError(
            name="range-unsatisfiable",
            detail=f"Range is {text[:60]!r}, and the file has {file.byte_count} bytes",
            headers={"Content-Range": f"bytes */{file.byte_count}"},
        )
    return span
