"""Where links lead that are handed on to others.

The header Host says whatever its sender likes, and a link made of it could lead a customer to another's page. So it
is believed where it names this machine itself, and nowhere else.
"""

from urllib.parse import urlsplit

from flask import Request

from service.access.loopback import is_loopback
from service.api.problems import ProblemError


def public_link(asked: Request, path: str, public_url: str | None) -> str:
    """A link to an address of the service: whole where it is known how others reach it, else the path alone.

    Args:
        asked: The request.
        path: Of the address, from its first slash on.
        public_url: How the service is reached from outside; None where nobody said.

    Raises:
        ProblemError: The request names no host at all.
    """
    if public_url is not None:
        return public_url.rstrip("/") + path
    if not asked.host:  # what is no host, the web library leaves out
        raise ProblemError(name="request-malformed", detail="the header Host names no host to link to")
    near = is_loopback(urlsplit(f"//{asked.host}").hostname or "")
    return asked.host_url.rstrip("/") + path if near else path
