"""Asks a running service over HTTP, as any other client would."""

import json
import urllib.error
import urllib.request
from dataclasses import dataclass

ANSWER_WITHIN_S = 120.0  # as long as service/up lets a worker compute


class DemoFailedError(Exception):
    """The demo could not be finished; its text is one line fit to show."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Upload:
    """What is posted: the bytes of the request and the media type they have; what it is to be answered with."""

    body: bytes
    media_type: str
    accept: str = "*/*"


def fetch(url: str, upload: Upload | None = None) -> bytes:
    """The body that a URL answers with: to a GET, or to a POST where something is uploaded.

    Raises:
        DemoFailedError: The service cannot be reached, or answers with an error.
    """
    request = urllib.request.Request(url)
    if upload is not None:
        request.data = upload.body
        request.add_header("Content-Type", upload.media_type)
        request.add_header("Accept", upload.accept)
    # No proxy that the surroundings name: the service is on this machine.
    opener = urllib.request.build_opener(urllib.request.ProxyHandler({}))
    try:
        with opener.open(request, timeout=ANSWER_WITHIN_S) as answer:
            return bytes(answer.read())
    except urllib.error.HTTPError as refusal:
        with refusal:
            said = f"{refusal.code}, {_detail(refusal.read())}"
        raise DemoFailedError(f"{request.get_method()} {url} was refused: {said}") from refusal
    except OSError as failure:
        raise DemoFailedError(f"{url} does not answer: {failure}") from failure


def _detail(body: bytes) -> str:
    """What problem details (RFC 9457) say, on one line; the start of the text where it is something else."""
    try:
        problem = json.loads(body)
        return " ".join(str(problem.get("detail") or problem.get("title")).split())
    except (ValueError, AttributeError):
        return " ".join(body.decode(errors="replace").split())[:200]
