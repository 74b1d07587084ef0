"""What is read again by who has it already: a head alone, found out sooner than the library does, and the same."""

import inspect
from itertools import chain, product
from typing import Any

import pytest
from flask import Flask, request
from pydantic import Field

from layout.documents.reading import Part
from service.api import layouts
from service.api.models.layouts import DespiteQuery
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.app import create_app
from service.settings import settings_from
from tests.service.conftest import environment_of, parts_of, sqlite_first
from tests.service.fakes import Client

# What differs from request to request, and the moment, which the server tells whatever the app does.
EACH_ITS_OWN = {"Request-Id", "RateLimit", "Date"}
CONDITIONS = {
    "none": {},
    "the tag": {"If-None-Match": "TAG"},
    "the tag, weakly": {"If-None-Match": "W/TAG"},
    "any": {"If-None-Match": "*"},
    "the tag among others": {"If-None-Match": '"other", TAG'},
    "another": {"If-None-Match": '"other"'},
    "a range": {"If-None-Match": "TAG", "Range": "bytes=0-4"},
    "a range of the tag": {"If-None-Match": "TAG", "Range": "bytes=0-4", "If-Range": "TAG"},
    "both the tag": {"If-None-Match": "TAG", "If-Match": "TAG"},
    "matching another": {"If-None-Match": "TAG", "If-Match": '"other"'},
    "matching the tag alone": {"If-Match": "TAG"},
    "matching the tag weakly": {"If-Match": "W/TAG"},
    "matching any": {"If-Match": "*"},
    "matching any, and the tag": {"If-None-Match": "TAG", "If-Match": "*"},
}


@sqlite_first("it says nothing of databases")
@pytest.mark.parametrize("name", ["the layout", "layout.json", "disc.svg", "disc.dxf"])
def test_a_condition_is_answered_as_the_library_answers_it(
    client: Client, name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    posted = client.post_tune()
    assert posted.json is not None
    path = posted.headers["Location"] if name == "the layout" else posted.json["links"][name]
    tag = client.get(path).headers["ETag"]

    def answers() -> dict[tuple[str, str], tuple[int, bytes, list[tuple[str, str]]]]:
        told = {}
        for method, condition in product(("GET", "HEAD"), CONDITIONS):
            fields = {field: value.replace("TAG", tag) for field, value in CONDITIONS[condition].items()}
            answer = client.http.open(path, method=method, headers=fields)
            head = [one for one in answer.headers if one[0] not in EACH_ITS_OWN]
            told[method, condition] = answer.status_code, answer.data, head
        return told

    soon = answers()
    monkeypatch.setattr(layouts, "_has_already", lambda _: False)
    plain = answers()

    for (method, condition), (status, content, head) in soon.items():
        # RFC 9110 section 15.4.5: 304 tells of what it does not bring only what a cache must know.
        unsaid = ["Content-Disposition"] if status == 304 else []
        assert [field for field, _ in head if field in unsaid] == []
        expected_status, expected_content, expected_head = plain[method, condition]
        assert (status, content) == (expected_status, expected_content), condition
        assert head == [one for one in expected_head if one[0] not in unsaid], condition
        # RFC 9110 section 13.2.2: If-Match first, where it does not hold 412; then If-None-Match.
        is_whole = condition in ("none", "another", "matching the tag alone", "matching any")
        is_refused = condition in ("matching another", "matching the tag weakly")
        assert status == (200 if is_whole else 412 if is_refused else 304), condition
        assert bool(content) == (status != 304 and method == "GET"), condition


class NeedsOne(Part):
    """A query that takes one parameter, and needs it."""

    like: str = Field()


def test_a_query_without_parameters_is_read_once_and_refused_each_time() -> None:
    app = Flask("a test")

    with app.test_request_context("/nowhere"):
        first, second = (read_arguments(request, DespiteQuery) for _ in range(2))
        refusals = []
        for _ in range(2):
            with pytest.raises(ProblemError) as refusal:
                read_arguments(request, NeedsOne)
            refusals.append(refusal.value.detail)

    assert first is second
    assert first == DespiteQuery(despite_findings=None)
    assert refusals == ["like is '': Field required"] * 2


def test_no_view_and_nothing_that_sees_a_request_is_a_coroutine(tmp_path: Any) -> None:
    parts_of(tmp_path).store.close()

    app = create_app(settings_from(environment_of(tmp_path)))

    kinds = (app.before_request_funcs, app.after_request_funcs, app.teardown_request_funcs)
    seeing = [one for kind in kinds for several in kind.values() for one in several]
    handling = [one for codes in app.error_handler_spec.values() for kinds in codes.values() for one in kinds.values()]
    called = list(chain(app.view_functions.values(), seeing, handling))
    assert len(called) > 100
    assert [one for one in called if inspect.iscoroutinefunction(one)] == []
