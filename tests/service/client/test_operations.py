"""What each operation of the client sends, held against the API document.

A generator writes the client; here every method is called, and what it sends is read off a caller that only notes.
"""

import inspect
import json
import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any
from urllib.parse import quote

import pytest

from service.client.calling import IDEMPOTENCY_KEY, JSON, Answer, Caller, Fields, Form, Headers, Query
from service.client.operations import Operations
from service.describe import document_here

FORM, FIELDS = "multipart/form-data", "application/x-www-form-urlencoded"
ODD = "a/b c"  # as no id is, so that what is not quoted is seen
QUERY = {"after": 3}
BODY = {"said": True}
PARTS: dict[str, bytes | Mapping[str, Any]] = {"tune": b"MThd", "order": BODY}
OPERATIONS = [
    (verb.upper(), path, operation)
    for path, operations in json.loads(document_here())["paths"].items()
    for verb, operation in operations.items()
]
NEEDS_NO_BODY = [case for case in OPERATIONS if not case[2].get("requestBody", {}).get("required")]


def name_of(part: Any) -> str:
    """How a case is called: by its operation's id."""
    return part["operationId"] if isinstance(part, dict) else ""


@dataclass(frozen=True, kw_only=True)
class Sent:
    """What a method has sent."""

    method: str
    path: str
    query: Query | None
    headers: Headers
    body: Any


class NotingCaller(Caller):
    """Sends nothing; every request is answered with an empty object."""

    def __init__(self) -> None:
        super().__init__("https://discs.example", None)
        self.sent: list[Sent] = []

    def send(
        self, method: str, path: str, *, query: Query | None = None, headers: Headers | None = None, body: Any = None
    ) -> Answer:
        self.sent.append(Sent(method=method, path=path, query=query, headers=headers or {}, body=body))
        return Answer(status=200, headers={}, body=b"{}")


def sent_by(operation: Any, *, all_that_can_be_said: bool) -> Sent:
    """What the method of an operation sends: with all that it takes, or with what it must be given alone."""
    caller = NotingCaller()
    method = getattr(Operations(caller), operation["operationId"])
    given = {"query": QUERY, "body": BODY, "parts": PARTS, "fields": {"key": "dw_x"}}
    asked = {
        name: given.get(name, ODD)
        for name, parameter in inspect.signature(method).parameters.items()
        if all_that_can_be_said or parameter.default is inspect.Parameter.empty
    }
    method(**asked)
    [sent] = caller.sent
    return sent


@pytest.mark.parametrize(("verb", "path", "operation"), OPERATIONS, ids=name_of)
def test_an_operation_goes_to_the_address_that_the_document_names(verb: str, path: str, operation: Any) -> None:
    sent = sent_by(operation, all_that_can_be_said=True)

    assert (sent.method, sent.path) == (verb, re.sub(r"{\w+}", quote(ODD, safe=""), path))


@pytest.mark.parametrize(("verb", "path", "operation"), OPERATIONS, ids=name_of)
def test_an_operation_sends_what_the_document_takes_and_once_where_it_is_done_once(
    verb: str, path: str, operation: Any
) -> None:
    parameters = {(one["in"], one["name"]) for one in operation.get("parameters", [])}
    content = operation.get("requestBody", {}).get("content", {})
    sent = sent_by(operation, all_that_can_be_said=True)

    assert (sent.query == QUERY) == any(where == "query" for where, _ in parameters)
    assert (IDEMPOTENCY_KEY in sent.headers) == (("header", IDEMPOTENCY_KEY) in parameters)
    if JSON in content:
        assert sent.body == BODY
    elif FORM in content:
        assert sent.body == Form(PARTS)
    elif FIELDS in content:
        assert sent.body == Fields({"key": "dw_x"})
    else:
        assert sent.body is None


@pytest.mark.parametrize(("verb", "path", "operation"), NEEDS_NO_BODY, ids=name_of)
def test_what_need_not_be_said_is_left_out(verb: str, path: str, operation: Any) -> None:
    sent = sent_by(operation, all_that_can_be_said=False)

    assert (sent.query, sent.body) == (None, None)
