"""What will go is announced in time, in every answer and in the API document."""

from datetime import UTC, datetime, timedelta

import pytest
from flask import Flask, Response

from service.api.api_document import document_of
from service.api.asking import open_to_all
from service.api.describing import Example, Operation, describes
from service.api.models.about import HealthAnswer
from service.api.openapi import openapi_routes
from service.api.operations.common import told
from service.api.retiring import NOTICE, Retirement, tell_retirement

SINCE = datetime(2026, 12, 2, 10, 0, tzinfo=UTC)
RETIREMENT = Retirement(since=SINCE, gone_from=datetime(2028, 1, 1, tzinfo=UTC), told_at="https://discs.example/v2")


def test_the_header_fields_are_as_the_standards_write_them() -> None:
    answer = tell_retirement(Response(), RETIREMENT)

    # RFC 9745 section 2.1: a Date of RFC 9651, the seconds since 1970. 2026-12-02T10:00:00Z: 20,789 days and 10 hours
    assert answer.headers["Deprecation"] == f"@{20_789 * 86_400 + 36_000}"
    # RFC 8594 section 3: an HTTP-date. The first of January 2028 is a Saturday.
    assert answer.headers["Sunset"] == "Sat, 01 Jan 2028 00:00:00 GMT"
    assert answer.headers.getlist("Link") == [
        '<https://discs.example/v2>; rel="deprecation"',
        '<https://discs.example/v2>; rel="sunset"',
    ]


def test_a_notice_of_less_than_twelve_months_is_refused() -> None:
    Retirement(since=SINCE, gone_from=SINCE + NOTICE, told_at="/")

    with pytest.raises(ValueError, match="between 2026-12-02 and 2027-12-01 are less than 12 months"):
        Retirement(since=SINCE, gone_from=SINCE + NOTICE - timedelta(days=1), told_at="/")


def test_an_operation_that_will_go_says_so_in_its_answers_and_in_the_document() -> None:
    app = Flask("going", static_folder=None)
    app.register_blueprint(openapi_routes(None))
    going = Operation(
        id="go",
        tag="about",
        summary="Something that will go",
        answers=(told(HealthAnswer, "Still there."),),
        examples=(Example(status=200),),
        retirement=RETIREMENT,
    )
    app.add_url_rule("/going", view_func=describes(going)(open_to_all(lambda: {"status": "ok"})), endpoint="going")
    http = app.test_client()

    assert http.get("/going").headers["Sunset"] == "Sat, 01 Jan 2028 00:00:00 GMT"
    assert "Sunset" not in http.get("/openapi.json").headers
    paths = document_of(app, server="/")["paths"]
    assert paths["/going"]["get"]["deprecated"] is True
    assert "deprecated" not in paths["/openapi.json"]["get"]
