"""Files of a layout are made when the first of them is asked for, and are those of the layout that was told."""

import hashlib
import json
import os
import time
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field, replace
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest

from layout import walk
from layout.documents import Settings, shipped_cutter, shipped_movement
from service.computing.at_hand import AT_HAND_DISCS
from service.limits import Limits
from tests.service import shop
from tests.service.api.conftest import ClientFor
from tests.service.conftest import sqlite_alone
from tests.service.fakes import LASER_FILES, THIN_WEB, TUNE, Client, FakeLayout, FakePlanner

pytestmark = sqlite_alone("layouts and their files stand in a folder beside it")

MADE_LATER = [name for name in LASER_FILES if name not in ("layout.json", "report.json")]


def kept_in(folder: Path) -> list[Path]:
    return sorted((folder / "layouts").glob("*"))


def test_no_file_is_made_until_one_is_asked_for_and_then_all_are_made_once(
    client: Client, planner: FakePlanner
) -> None:
    made = client.post_tune().json
    told = [
        client.get(path).status_code for path in (f"/v1/layouts/{made['fingerprint']}", made["links"]["report.json"])
    ]
    made_by_then = planner.files_count

    given = {name: client.get(made["links"][name]).data for name in (*LASER_FILES, *LASER_FILES)}

    assert (told, made_by_then) == ([200, 200], 0)
    assert [given[name] for name in MADE_LATER[:3]] == [f"{name} of Harvest Dance".encode() for name in MADE_LATER[:3]]
    assert (planner.files_count, planner.laid_out_count) == (1, 1)


def test_files_that_one_worker_made_are_there_for_the_other(client_for: ClientFor) -> None:
    one, other = FakePlanner(), FakePlanner()
    first, second = client_for(one), client_for(other)
    links = first.post_tune().json["links"]
    first.get(links["disc.svg"])

    assert second.get(links["disc.dxf"]).data == b"disc.dxf of Harvest Dance"
    assert (other.files_count, other.laid_out_count) == (0, 0)


@pytest.mark.parametrize(("movement", "cutter"), [("fernhollow-31", "fibre-laser"), ("mossbrook-67", "turn-press")])
def test_files_made_by_another_worker_are_those_of_the_layout_told_to_the_byte(
    client_for: ClientFor, movement: str, cutter: str
) -> None:
    at_once = walk.files_of(walk.lay_out(shop.TUNE, shipped_movement(movement), shipped_cutter(cutter), Settings()))
    one, other = client_for(walk), client_for(walk)
    asked = {"path": f"/v1/layouts?movement={movement}&cutter={cutter}", "content_type": "audio/midi"}
    links = one.http.post(**asked, data=shop.TUNE).get_json()["links"]

    given = {name: other.get(path) for name, path in links.items() if name in at_once}

    digests = {name: hashlib.sha256(answer.data).hexdigest() for name, answer in given.items()}
    assert digests == {name: hashlib.sha256(content).hexdigest() for name, content in at_once.items()}
    assert given["disc.dxf"].headers["ETag"] == one.get(links["disc.dxf"]).headers["ETag"]


@dataclass
class SlowWriter(FakePlanner):
    """Takes a while to make files, or fails the first times."""

    failures: int = 0

    def files_of(self, laid_out: FakeLayout, *, not_good: str | None = None) -> dict[str, bytes]:
        time.sleep(0.1)
        if self.failures:
            self.failures -= 1
            raise MemoryError
        return super().files_of(laid_out, not_good=not_good)


def test_several_who_ask_at_a_time_have_the_files_made_once(client_for: ClientFor) -> None:
    planner = SlowWriter()
    client = client_for(planner)
    links = client.post_tune().json["links"]

    with ThreadPoolExecutor(4) as pool:
        answers = list(pool.map(lambda name: client.http.application.test_client().get(links[name]), MADE_LATER[:4]))

    assert [answer.data for answer in answers] == [f"{name} of Harvest Dance".encode() for name in MADE_LATER[:4]]
    assert planner.files_count == 1


def test_files_that_could_not_be_made_leave_nothing_half_written_and_are_made_the_next_time(
    client_for: ClientFor, tmp_path: Path
) -> None:
    client = client_for(SlowWriter(failures=1))
    made = client.post_tune().json
    before = [path.read_bytes() for path in kept_in(tmp_path)]

    failed = client.get(made["links"]["disc.dxf"])
    after = [path.read_bytes() for path in kept_in(tmp_path)]

    assert failed.status_code == 500
    assert (len(before), after) == (1, before)
    assert client.get(f"/v1/layouts/{made['fingerprint']}").json == made
    assert client.get(made["links"]["disc.dxf"]).data == b"disc.dxf of Harvest Dance"


@dataclass
class LargeWriter(FakePlanner):
    """Writes pictures that cannot be packed smaller."""

    def files_of(self, laid_out: FakeLayout, *, not_good: str | None = None) -> dict[str, bytes]:
        return {**super().files_of(laid_out, not_good=not_good), "disc.svg": os.urandom(20_000)}


def test_files_made_later_count_among_what_all_layouts_may_take(client_for: ClientFor, tmp_path: Path) -> None:
    client = client_for(LargeWriter(), Limits(cache_bytes=30_000))
    first, second = (
        client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": json.dumps({"title": title})}).json
        for title in ("First", "Second")
    )
    kept_at_first = len(kept_in(tmp_path))

    for place, made in enumerate((first, second)):
        client.get(made["links"]["disc.svg"])
        for path in kept_in(tmp_path):
            os.utime(path, (1000 + place, 1000 + place))  # older than anything written now

    assert kept_at_first == 2
    assert [path.name.partition("-")[0] for path in kept_in(tmp_path)] == [second["fingerprint"]]


@dataclass
class WanderingPlanner(FakePlanner):
    """Comes to another disc each time, as no planner should."""

    starts: list[float] = field(default_factory=list)

    def lay_out_discs(self, *given: Any, **named: Any) -> tuple[FakeLayout, ...]:
        layouts = super().lay_out_discs(*given, **named)
        self.starts.append(float(len(self.starts)))
        return tuple(replace(layout, record={**layout.record, "from_s": self.starts[-1]}) for layout in layouts)


@pytest.mark.parametrize(("between", "searches"), [(AT_HAND_DISCS - 1, 2), (AT_HAND_DISCS, 3)])
def test_as_many_discs_as_are_said_are_at_hand_however_they_were_asked_for(
    client: Client, planner: FakePlanner, between: int, searches: int
) -> None:
    first = client.post_tune().json["links"]
    client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": json.dumps({"discs": between})})

    client.get(first["disc.dxf"])

    assert planner.laid_out_count == searches


def test_a_layout_that_comes_to_another_disc_gives_no_file_and_is_kept_no_longer(
    client_for: ClientFor, tmp_path: Path
) -> None:
    one, other = client_for(WanderingPlanner()), client_for(WanderingPlanner(starts=[0.0]))
    links = one.post_tune().json["links"]

    refused = other.get(links["disc.dxf"])

    assert (refused.status_code, refused.json["type"]) == (404, "/problems/layout-unknown")
    assert "was laid out again and came to another disc, so that it is kept no longer" in refused.json["detail"]
    assert kept_in(tmp_path) == []


def test_a_reason_takes_no_kept_disc_away_whose_search_time_stopped(client_for: ClientFor, tmp_path: Path) -> None:
    one = client_for(WanderingPlanner(findings=(THIN_WEB,), needs_s=2))
    planner = WanderingPlanner(findings=(THIN_WEB,), needs_s=2, starts=[0.0])
    made = one.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": '{"time_limit_s": 1}'}).json
    other, address = client_for(planner), f"/v1/layouts/{made['fingerprint']}"
    before = [path.read_bytes() for path in kept_in(tmp_path)]

    refused = [other.get(f"{address}{file}?despite_findings=trial") for file in ("/disc.dxf", "", "/layout.json")]

    assert [(answer.status_code, answer.json["type"]) for answer in refused] == [(410, "/problems/layout-outdated")] * 3
    assert "came to another disc, as a search may that time stopped" in refused[0].json["detail"]
    assert refused[0].json["settings"] == f"{address}/settings.json"
    assert planner.laid_out_count == 1  # and is not searched for again and again
    assert [path.read_bytes() for path in kept_in(tmp_path)] == before
    assert other.get(address).json == made
    marked = one.get(f"{address}/disc.dxf?despite_findings=trial").data  # where it was made, it is at hand
    assert marked == b"disc.dxf of Harvest Dance NOT GOOD TO CUT: trial"


def test_what_time_stopped_has_its_files_made_at_once(client_for: ClientFor) -> None:
    planner, other = FakePlanner(needs_s=2), FakePlanner(needs_s=2)
    client = client_for(planner)

    answer = client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": '{"time_limit_s": 1}'})
    made_by_then = planner.files_count

    assert made_by_then == 1
    assert client_for(other).get(answer.json["links"]["disc.dxf"]).data == b"disc.dxf of Harvest Dance"
    assert other.laid_out_count == 0


def test_no_file_is_made_for_a_client_that_says_it_has_it(client: Client, planner: FakePlanner) -> None:
    made = client.post_tune().json
    tag = client.get(f"/v1/layouts/{made['fingerprint']}").headers["ETag"].replace("-layout", "-disc.dxf")

    same = client.get(made["links"]["disc.dxf"], If_None_Match=tag)

    assert (same.status_code, same.data, same.headers["ETag"]) == (304, b"", tag)
    assert planner.files_count == 0
    assert client.get(made["links"]["disc.dxf"]).headers["ETag"] == tag


def test_a_reason_marks_what_is_told_without_making_files(client_for: ClientFor) -> None:
    planner = FakePlanner(findings=(THIN_WEB,))
    client = client_for(planner)

    told = client.post_tune(query="movement=fernhollow-31&despite_findings=trial").json

    assert told["layout"]["despite_findings"] == "trial"
    assert (list(told["links"])[:2], planner.files_count) == (["disc.dxf", "record.dxf"], 0)
