"""Links of layouts after the program was put up to date: laid out again where it is the same, else told what to do."""

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from service.api import layout_cache
from tests.service.api.conftest import ClientFor
from tests.service.api.guarded import problem_of
from tests.service.conftest import sqlite_alone
from tests.service.fakes import Client, FakeLayout, FakePlanner

pytestmark = sqlite_alone("layouts stand in a folder beside it")

HTML = {"Accept": "text/html"}


@dataclass
class NewerPlanner(FakePlanner):
    """Of a newer program: it tells another beginning; with another engine, fingerprints are others too."""

    engine: str = ""

    def fingerprint_of(self, tune: bytes, movement: Any, cutter: Any, settings: Any, number: int = 1) -> str:
        return super().fingerprint_of(tune + self.engine.encode(), movement, cutter, settings, number)

    def _laid_out(self, tune: bytes, movement: Any, cutter: Any, settings: Any, number: int) -> FakeLayout:
        layout = super()._laid_out(tune, movement, cutter, settings, number)
        layout.record["from_s"] = 0.75
        return layout


@pytest.fixture
def newer(client_for: ClientFor, monkeypatch: pytest.MonkeyPatch) -> Any:
    """Makes a client of the same folders, served by a newer program."""

    def newer(planner: FakePlanner) -> Client:
        monkeypatch.setattr(layout_cache, "program_digest", lambda: "0ther000")
        return client_for(planner)

    return newer


def test_the_same_engine_lays_a_disc_out_again_under_its_address(client: Client, newer: Any) -> None:
    planner = NewerPlanner()
    made = client.post_tune()
    later = newer(planner)

    told = later.get(made.headers["Location"])
    file = later.get(made.json["links"]["disc.dxf"])

    assert (told.status_code, told.json["fingerprint"]) == (200, made.json["fingerprint"])
    assert told.json["layout"]["from_s"] == 0.75  # it is the newer program's
    assert told.headers["ETag"] != made.headers["ETag"]
    assert file.data == b"disc.dxf of Harvest Dance"
    assert planner.laid_out_count == 1


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
