"""Layouts asked for with a key: by the documents its owner keeps, and for no other owner to see."""

import json
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from layout.documents import shipped_text
from service.access.scopes import Scope
from service.app import OPENED, create_app
from service.parts import Parts
from service.settings import AccessSettings, ServiceSettings
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.fakes import MANY, FakePlanner
from tests.service.fakes import TUNE as ANY_TUNE


class Bench:
    """A service on loopback, open to this machine's own programs, with keys of two web shops."""

    def __init__(self, parts: Parts, folder: Path) -> None:
        self.planner = FakePlanner()
        settings = ServiceSettings(
            places=replace(parts.settings.places, cache_directory=folder / "kept"),
            access=AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY),
        )
        self.http: FlaskClient = create_app(settings, planner=self.planner).test_client()
        self.web = bearing(new_key(parts, *Scope, owner="Bellgrove"))
        self.other = bearing(new_key(parts, *Scope, owner="Thornbury"))

    def keep(self, kind: str, value: dict[str, object]) -> None:
        path = f"/v1/{kind}s/{value['id']}"
        answer = self.http.put(path, json=value, headers={**self.web, "If-None-Match": "*"})
        assert answer.status_code == 201, answer.text

    def lay_out(self, query: str, who: dict[str, str]) -> TestResponse:
        return self.http.post(f"/v1/layouts?{query}", data=ANY_TUNE, content_type="audio/midi", headers=who)


@pytest.fixture
def bench(parts: Parts, tmp_path: Path) -> Iterator[Bench]:
    opened = Bench(parts, tmp_path)
    yield opened
    for one in opened.http.application.extensions[OPENED]:
        one.close()


def test_a_layout_is_for_the_movement_and_the_cutter_that_an_owner_keeps(bench: Bench) -> None:
    bench.keep("movement", {**json.loads(shipped_text("tarnlight-17")), "id": "larkfield-9", "title": "ours"})
    bench.keep("cutter", {**json.loads(shipped_text("fibre-laser")), "id": "our-laser"})

    answer = bench.lay_out("movement=larkfield-9&cutter=our-laser", bench.web)

    assert answer.status_code == 201, answer.text
    layout = answer.json["layout"]  # type: ignore[index]  # an answer in JSON
    assert (layout["movement"], layout["cutter"]) == ({"id": "larkfield-9", "revision": 1}, {"id": "our-laser"})
    assert bench.http.get(f"{answer.headers['Location']}/disc.dxf", headers=bench.web).status_code == 200
    piece = bench.http.post("/v1/trial-pieces?movement=larkfield-9&cutter=our-laser", headers=bench.web)
    assert piece.status_code == 200, piece.text


@pytest.mark.parametrize("who", ["other", "nobody"])
def test_what_an_owner_keeps_is_not_there_for_others(bench: Bench, who: str) -> None:
    bench.keep("movement", {**json.loads(shipped_text("tarnlight-17")), "id": "larkfield-9"})
    headers = bench.other if who == "other" else {}

    problem_of(bench.lay_out("movement=larkfield-9", headers), "movement-unknown")


@pytest.mark.parametrize("who", ["other", "nobody"])
def test_a_layout_of_an_owner_is_not_there_for_others_who_know_its_fingerprint(bench: Bench, who: str) -> None:
    headers = bench.other if who == "other" else {}
    made = bench.lay_out("movement=tarnlight-17", bench.web)

    for path in (made.headers["Location"], made.headers["Location"] + "/disc.dxf"):
        assert bench.http.get(path, headers=bench.web).status_code == 200
        problem_of(bench.http.get(path, headers=headers), "layout-unknown")


def test_the_same_inputs_are_laid_out_for_each_owner_and_kept_apart(bench: Bench) -> None:
    answers = [bench.lay_out("movement=tarnlight-17", who) for who in (bench.web, bench.other, {}, bench.web)]

    assert len({answer.data for answer in answers}) == 1
    assert bench.planner.laid_out_count == 3  # the last was kept


def test_what_was_laid_out_for_nobody_in_particular_is_there_for_all(bench: Bench) -> None:
    made = bench.lay_out("movement=tarnlight-17", {})

    assert bench.http.get(made.headers["Location"], headers=bench.web).status_code == 200
