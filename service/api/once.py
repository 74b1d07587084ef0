"""Idempotency-Key: a request that is sent again gets the answer it got, and its work is done once.

After draft-ietf-httpapi-idempotency-key-header-07. The field is a structured string, "…"; without quotes it is
taken too. What a request brings is compared by the digests of its parts, since a form's boundary changes.
"""

import hashlib
import re
from collections.abc import Callable, Mapping
from typing import TypeVar

from flask import Request, Response
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.api.problems import ProblemError
from service.orders.kept_answers import (
    AnotherRequestError,
    AskedOnce,
    Claim,
    Given,
    StillRunningError,
    claim_or_answer,
    give_up,
    keep_answer,
    renewed,
)
from service.orders.placing import nothing_more
from service.parts import Parts

FIELD = "Idempotency-Key"
KEY = re.compile(r'"([\x20\x21\x23-\x5b\x5d-\x7e]{1,255})"|([\x21\x23-\x5b\x5d-\x7e]{1,255})')
RETRY_AFTER_S = 1  # s; a request is answered within that, or a little later

Done = TypeVar("Done")  # what the work gives, such as an order


def once(
    parts: Parts,
    asked: Request,
    asker: Asker,
    brought: Mapping[str, bytes],
    work: Callable[[Callable[[Session, Done], None]], Done],
    answer: Callable[[Done], Given],
) -> Response:
    """The answer to a request, its work done once for its key.

    Args:
        parts: Read for the database and how long answers are kept.
        asked: The request, for its key; without one the work is done each time.
        asker: Who asks.
        brought: The parts of the request by name.
        work: Does the work; what it is handed is written in the same transaction.
        answer: The answer to give for what was done.

    Raises:
        ProblemError: The key is none, was used for something else, or its request is still running.
    """
    key = _key(asked)
    if key is None:
        return _response(answer(work(nothing_more)))
    claim = _claimed(parts, asker, asked, key, brought)
    if isinstance(claim, Given):
        if not claim.body:
            raise ProblemError(
                name="answer-deleted",
                detail=f"the request with the {FIELD} {key!r} was done, and what it made was deleted since",
            )
        return _response(claim)
    try:
        with renewed(parts.store, claim):
            done = work(lambda session, view: keep_answer(session, claim, answer(view)))
    except StillRunningError as fault:  # it took so long that another took its claim over; nothing was done
        raise _still_running(key) from fault
    except BaseException:
        give_up(parts.store, claim)
        raise
    return _response(answer(done))


def _claimed(parts: Parts, asker: Asker, asked: Request, key: str, brought: Mapping[str, bytes]) -> Claim | Given:
    # What was tried out with a key for tests is still to be done when it is meant: the same key is another one there.
    kind = "test " if asker.is_test else ""
    operation = f"{kind}{asked.method} {asked.path}"[:200]
    asked_once = AskedOnce(owner_id=asker.owner_id, operation=operation, key=key, digest=_digest(brought))
    try:
        return claim_or_answer(parts.store, asked_once, kept_days=parts.settings.retention.answers_days)
    except AnotherRequestError as fault:
        raise ProblemError(
            name="key-reused", detail=f"the {FIELD} {key!r} was used for a request that brought something else"
        ) from fault
    except StillRunningError as fault:
        raise _still_running(key) from fault


def _still_running(key: str) -> ProblemError:
    return ProblemError(
        name="still-running",
        detail=f"a request with the {FIELD} {key!r} is being answered at this moment",
        headers={"Retry-After": str(RETRY_AFTER_S)},
    )


def _key(asked: Request) -> str | None:
    text = asked.headers.get(FIELD)
    if text is None:
        return None
    found = KEY.fullmatch(text.strip())
    if found is None:
        raise ProblemError(
            name="request-malformed",
            detail=f'the {FIELD} is {text[:60]!r}; send 1 to 255 printable ASCII characters in quotes, such as "a-1"',
        )
    return found[1] or found[2]


def _digest(brought: Mapping[str, bytes]) -> str:
    told = hashlib.sha256()
    for name, content in sorted(brought.items()):
        told.update(f"{name}\0{hashlib.sha256(content).hexdigest()}\n".encode())
    return told.hexdigest()


def _response(given: Given) -> Response:
    response = Response(given.body, status=given.status)
    for name, value in given.headers.items():
        response.headers[name] = value
    return response
