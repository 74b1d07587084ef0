"""The body of a request, whole and within a limit."""

from flask import Request

from service.api.failures import too_large
from service.api.problems import ProblemError


def body_of(request: Request, most_bytes: int, what: str = "the request body") -> bytes:
    """The whole body; the web library would cut off a chunked one at its limit and say nothing.

    Args:
        request: The request; its body is read here.
        most_bytes: How large it may be.
        what: The body, as the subject of a sentence.

    Raises:
        ProblemError: It is larger, or ends before the length that was announced.
    """
    length = request.content_length
    if length is not None and length > most_bytes:
        raise too_large(most_bytes, what)
    request.max_content_length = most_bytes + 1  # one more, to see that it is too large
    body = bytearray()
    while len(body) <= most_bytes and (chunk := request.stream.read(most_bytes + 1 - len(body))):
        body += chunk
    if len(body) > most_bytes:
        raise too_large(most_bytes, what)
    if length is not None and len(body) < length:
        raise ProblemError(
            name="request-malformed",
            detail=f"the body ended after {len(body)} bytes, but Content-Length says {length}; send it again",
        )
    return bytes(body)
