"""The body of a request, within a limit: whole, or piece by piece."""

from collections.abc import Iterator

from flask import Request

from service.api.failures import too_large
from service.api.problems import ProblemError

PIECE_BYTES = 256 * 1024  # read at a time


def body_of(request: Request, most_bytes: int, what: str = "the request body") -> bytes:
    """The whole body; the web library would cut off a chunked one at its limit and say nothing.

    Args:
        request: The request; its body is read here.
        most_bytes: How large it may be.
        what: The body, as the subject of a sentence.

    Raises:
        ProblemError: It is larger, or ends before the length that was announced.
    """
    return b"".join(pieces_of(request, most_bytes, what))


def pieces_of(request: Request, most_bytes: int, what: str = "the request body") -> Iterator[bytes]:
    """The body piece by piece; as `body_of`.

    Raises:
        ProblemError: It is larger, or ends before the length that was announced.
    """
    length = request.content_length
    if length is not None and length > most_bytes:
        raise too_large(most_bytes, what)
    request.max_content_length = most_bytes + 1  # one more, to see that it is too large
    seen = 0
    while piece := request.stream.read(min(PIECE_BYTES, most_bytes + 1 - seen)):
        seen += len(piece)
        if seen > most_bytes:
            raise too_large(most_bytes, what)
        yield piece
    if length is not None and seen < length:
        raise ProblemError(
            name="request-malformed",
            detail=f"the body ended after {seen} bytes, but Content-Length says {length}; send it again",
        )
