"""The request header Prefer (RFC 7240): how long a client would wait."""

import re

from flask import Request

WAIT = re.compile(r"wait\s*=\s*\"?(\d+)\"?", re.IGNORECASE | re.ASCII)


def wait_asked(asked: Request, *, most_s: int) -> int | None:
    """How many seconds the client prefers to wait, at most `most_s`; None where it says nothing of it.

    Preferences that are not known are left aside, and of several waits the first counts, as the RFC says.
    """
    for field in asked.headers.getlist("Prefer"):
        for preference in field.split(","):
            found = WAIT.fullmatch(preference.split(";")[0].strip())
            if found is not None:
                digits = found[1].lstrip("0")[: len(str(most_s)) + 1]  # of more than `most_s` the first ones tell so
                return min(int(digits or 0), most_s)
    return None
