"""Whether the service is ready: told in time, whatever is away."""

import logging
import shutil
import threading
import time
from collections.abc import Iterator
from dataclasses import replace

import pytest
from flask import Flask
from flask.testing import FlaskClient

from service.access.rates import Rates
from service.api.asking import guard
from service.api.failures import answer_failures
from service.api.readiness import TOLD_AGAIN_S, WITHIN_S, readiness_routes
from service.parts import Parts
from service.store.store import Store
from tests.service.api.guarded import problem_of

AWAY = "postgresql://nobody@127.0.0.1:1/none"  # port 1 is for TCPMUX (RFC 1078), which nobody runs
# Seconds that a busy machine may take to answer beyond the wait itself.
BUSY_S = 2.0


def client_of(parts: Parts) -> FlaskClient:
    app = Flask("ready", static_folder=None)
    answer_failures(app, parts.settings.limits)
    guard(app, parts, Rates(parts.settings.access))
    app.register_blueprint(readiness_routes(parts))
    return app.test_client()


@pytest.fixture
def hanging(parts: Parts) -> Iterator[Parts]:
    """Parts whose store of files does not answer before the test ends."""
    let_go = threading.Event()

    class Hanging:
        asked = 0

        def check(self) -> None:
            Hanging.asked += 1
            let_go.wait(60)

    yield replace(parts, files=Hanging())  # type: ignore[arg-type]
    let_go.set()


def test_a_service_whose_parts_answer_is_ready(any_parts: Parts) -> None:
    answer = client_of(any_parts).get("/readyz")

    assert answer.status_code == 200
    assert answer.json == {"status": "ready", "parts": {"database": "ok", "files": "ok", "queue": "ok"}}


def test_a_database_that_is_away_is_named(parts: Parts, caplog: pytest.LogCaptureFixture) -> None:
    away = replace(parts, store=Store(AWAY.replace("postgresql", "postgresql+psycopg")))

    with caplog.at_level(logging.WARNING):
        answer = client_of(away).get("/readyz")

    assert answer.status_code == 503
    problem_of(answer, "not-ready")
    assert answer.json["away"] == ["database"]
    assert answer.headers["Retry-After"] == "5"
    assert "database: the database does not answer" in caplog.text


def test_a_folder_of_files_that_is_gone_is_named(parts: Parts) -> None:
    shutil.rmtree(parts.settings.places.data_directory / "files")

    answer = client_of(parts).get("/readyz")

    assert (answer.status_code, answer.json["away"]) == (503, ["files"])


def test_a_queue_that_is_away_is_named(parts: Parts) -> None:
    places = replace(parts.settings.places, queue_url=AWAY)

    answer = client_of(replace(parts, settings=replace(parts.settings, places=places))).get("/readyz")

    assert (answer.status_code, answer.json["away"]) == (503, ["queue"])


def test_a_part_that_hangs_is_told_in_time_and_asked_by_one_thread_however_often(hanging: Parts) -> None:
    client = client_of(hanging)

    took_s = []
    for _ in range(2):
        begun_s = time.monotonic()
        answer = client.get("/readyz")
        took_s.append(time.monotonic() - begun_s)
        assert (answer.status_code, answer.json["away"]) == (503, ["files"])

    assert all(WITHIN_S - 0.1 < one < WITHIN_S + BUSY_S for one in took_s), took_s
    assert type(hanging.files).asked == 1  # type: ignore[attr-defined]


def test_a_part_that_is_back_is_ready_again_after_a_moment(parts: Parts) -> None:
    client = client_of(parts)
    files = parts.settings.places.data_directory / "files"
    files.rename(files.with_name("away"))
    assert client.get("/readyz").status_code == 503

    files.with_name("away").rename(files)

    time.sleep(TOLD_AGAIN_S + 0.1)
    assert client.get("/readyz").status_code == 200


def test_a_part_that_fails_in_a_way_nobody_foresaw_is_away_and_its_words_are_not_told(
    parts: Parts, caplog: pytest.LogCaptureFixture
) -> None:
    class Odd:
        def check(self) -> None:
            raise ZeroDivisionError("geheim")

    answer = client_of(replace(parts, files=Odd())).get("/readyz")  # type: ignore[arg-type]

    problem_of(answer, "not-ready")
    assert answer.json["away"] == ["files"]  # type: ignore[index]  # an answer in JSON
    assert "files: ZeroDivisionError" in caplog.text
    assert "geheim" not in caplog.text + answer.text
