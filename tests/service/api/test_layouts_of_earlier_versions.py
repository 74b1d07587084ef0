"""Links of layouts after the program was put up to date: laid out again where it is the same, else told what to do."""

import json
import time
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest

from service.api import layout_cache
from service.limits import Limits
from tests.service.api.conftest import ClientFor
from tests.service.api.guarded import problem_of
from tests.service.conftest import sqlite_alone
from tests.service.fakes import TUNE, Client, FakeLayout, FakePlanner

pytestmark = sqlite_alone("layouts stand in a folder beside it")

HTML = {"Accept": "text/html"}


@dataclass
class NewerPlanner(FakePlanner):
    """Of a newer program: it tells more, perhaps another beginning; with another engine, fingerprints are others."""

    engine: str = ""
    from_s: float = 0.75

    def fingerprint_of(self, tune: bytes, movement: Any, cutter: Any, settings: Any, number: int = 1) -> str:
        return super().fingerprint_of(tune + self.engine.encode(), movement, cutter, settings, number)

    def _laid_out(self, tune: bytes, movement: Any, cutter: Any, settings: Any, number: int) -> FakeLayout:
        layout = super()._laid_out(tune, movement, cutter, settings, number)
        layout.record["from_s"] = self.from_s
        layout.record["told_since"] = True
        return layout


@pytest.fixture
def newer(client_for: ClientFor, monkeypatch: pytest.MonkeyPatch) -> Any:
    """Makes a client of the same folders, served by a newer program."""

    def newer(planner: FakePlanner, *limits: Limits) -> Client:
        monkeypatch.setattr(layout_cache, "program_digest", lambda: "0ther000")
        return client_for(planner, *limits)

    return newer


def test_the_same_engine_lays_a_disc_out_again_under_its_address(client: Client, newer: Any) -> None:
    planner = NewerPlanner(from_s=0.5)
    made = client.post_tune()
    later = newer(planner)

    told = later.get(made.headers["Location"])
    file = later.get(made.json["links"]["disc.dxf"])

    assert (told.status_code, told.json["fingerprint"]) == (200, made.json["fingerprint"])
    assert told.json["layout"]["told_since"]  # it is the newer program's
    assert told.headers["ETag"] != made.headers["ETag"]
    assert file.data == b"disc.dxf of Harvest Dance"
    assert planner.laid_out_count == 1


def post(client: Client, settings: str = "{}") -> Any:
    return client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": settings})


@pytest.mark.parametrize(
    ("settings", "planner", "most_s", "said"),
    [
        ({}, NewerPlanner(), 60, ("this one comes to another disc", 1)),
        ({"time_limit_s": 1}, NewerPlanner(from_s=0.5), 60, ("time stopped the search", 0)),
        ({}, NewerPlanner(from_s=0.5, needs_s=2), 1, ("stopped after 1 s", 1)),
    ],
    ids=["another disc", "time stopped it", "the service stops it now"],
)
def test_a_disc_that_need_not_be_the_same_again_is_told_to_be_outdated_and_searched_for_once(
    client_for: ClientFor, newer: Any, settings: Any, planner: Any, most_s: int, said: tuple[str, int]
) -> None:
    made = post(client_for(FakePlanner(needs_s=2 if settings else 0)), json.dumps(settings))
    planner = replace(planner)
    later, address = newer(planner, Limits(search_s=most_s)), made.headers["Location"]

    told = [later.get(path) for path in (address, made.json["links"]["disc.dxf"], address)]

    for answer in told:
        problem_of(answer, "layout-outdated")
    assert (said[0] in told[0].json["detail"], planner.laid_out_count) == (True, said[1])
    assert later.get(told[0].json["settings"]).json == settings


def test_the_page_that_lays_a_disc_out_again_says_where_the_service_stopped_the_search(
    client: Client, newer: Any
) -> None:
    made = client.post_tune().json
    later = newer(NewerPlanner(needs_s=2), Limits(search_s=1))

    led = later.http.get(f"/discs/{made['fingerprint']}?lay_out_again=yes", headers=HTML)

    assert led.status_code == 410
    assert "was stopped after 1 s now" in led.text


@dataclass
class SlowPlanner(NewerPlanner):
    """Takes a while to lay out."""

    def lay_out_discs(self, *given: Any, **named: Any) -> tuple[FakeLayout, ...]:
        time.sleep(0.2)
        return super().lay_out_discs(*given, **named)


def test_two_who_ask_at_a_time_have_a_disc_laid_out_again_once(client: Client, newer: Any) -> None:
    planner, address = SlowPlanner(from_s=0.5), client.post_tune().headers["Location"]
    app = newer(planner).http.application

    with ThreadPoolExecutor(2) as pool:
        answers = list(pool.map(lambda _: app.test_client().get(address).status_code, range(2)))

    assert (answers, planner.laid_out_count) == ([200, 200], 1)


def test_files_of_what_time_stopped_are_asked_after_each_time_and_tagged_by_their_disc(client_for: ClientFor) -> None:
    one, other = FakePlanner(needs_s=2), NewerPlanner(needs_s=2)
    file, tags = "disc.dxf", []
    for planner in (one, other):
        client = client_for(planner, Limits(cache_layouts=1))
        given = client.get(post(client, '{"time_limit_s": 1}').json["links"][file])
        tags.append(given.headers["ETag"])
        client.post_tune()  # and with it the first is let go

    assert given.headers["Cache-Control"] == "private, no-cache"
    assert tags[0] != tags[1]


def test_a_disc_of_an_earlier_engine_is_told_to_be_one_and_what_it_was_made_from_leads_to_a_new_one(
    client: Client, newer: Any
) -> None:
    made, planner = client.post_tune(), NewerPlanner(engine="2")
    later, address = newer(planner), made.headers["Location"]

    for path in (address, *(f"{address}/{name}" for name in ("disc.dxf", "layout.json", "hearing.wav"))):
        problem_of(later.get(path), "layout-outdated")
    told = later.get(address).json
    settings = later.get(told["settings"])
    before = planner.laid_out_count
    again = later.http.post(told["again"], data=settings.data, content_type="application/json")

    assert "laid out by an earlier version of the engine" in told["detail"]
    assert (settings.status_code, before, again.status_code) == (200, 0, 201)
    assert again.get_json()["fingerprint"] != made.json["fingerprint"]
    assert later.get(again.headers["Location"]).status_code == 200
    assert later.get(address).status_code == 410  # under its own address it stays what it was


def test_the_page_of_such_a_disc_leads_to_the_new_one_when_a_person_says_so(client: Client, newer: Any) -> None:
    made, later = client.post_tune().json, newer(NewerPlanner(engine="2"))

    shown = later.http.get(f"/discs/{made['fingerprint']}", headers=HTML)
    led = later.http.get(f"/discs/{made['fingerprint']}?lay_out_again=yes", headers=HTML)

    assert shown.status_code == 410
    assert f'href="/discs/{made["fingerprint"]}?lay_out_again=yes"' in shown.text
    assert led.status_code == 303
    new = led.headers["Location"].rpartition("/")[2]
    assert new != made["fingerprint"]
    assert later.get(f"/v1/layouts/{new}").json["layout"]["from_s"] == 0.75


def test_a_damaged_disc_of_an_earlier_version_is_removed_and_counts_as_not_kept(
    client: Client, newer: Any, tmp_path: Path
) -> None:
    made = client.post_tune()
    [kept] = (tmp_path / "layouts").iterdir()
    later = newer(NewerPlanner())
    kept.write_bytes(kept.read_bytes()[:-30])

    problem_of(later.get(made.headers["Location"]), "layout-unknown")

    assert list((tmp_path / "layouts").iterdir()) == []
