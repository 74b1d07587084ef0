"""The walk with music as makers write it: from the tune to a drawing that plays the extra plucks."""

import json
from functools import cache
from typing import Any

import numpy as np
import pytest

from layout import walk
from layout.arrange.arrangement import NO_NOTE
from layout.documents import read_settings
from layout.write.laid_out import LaidOut
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, SHIPPED

WRITING = {
    "pluck_again_s": 0.4,
    "ornaments": "over-doubled-teeth",
    "chords": "bass-first",
    "two_teeth_from_velocity": 90,
    "ringing_tooth_cost": 0.2,
    "ringing_bass_cost": 0.2,
}
PLACES = range(len(SHIPPED))


@cache
def written(place: int, *, plainly: bool = False) -> LaidOut:
    """The first half minute of the demo tune on a shipped movement."""
    asked = {"passage": {"to_s": 30}} | ({} if plainly else {"writing": WRITING})
    return walk.lay_out(demo_tune(), SHIPPED[place], LASER, read_settings(json.dumps(asked)))


@cache
def files_of(place: int, *, plainly: bool = False) -> dict[str, bytes]:
    return walk.files_of(written(place, plainly=plainly))


def read(files: dict[str, bytes], name: str) -> dict[str, Any]:
    document: dict[str, Any] = json.loads(files[name])
    return document


@pytest.mark.parametrize("place", PLACES)
def test_a_written_disc_is_proved_and_good_to_cut(place: int) -> None:
    laid_out = written(place)

    assert laid_out.good_to_cut
    assert laid_out.arrangement.worth.proved


@pytest.mark.parametrize("place", PLACES)
def test_the_layout_says_which_note_an_extra_pluck_belongs_to(place: int) -> None:
    projections = read(files_of(place), "layout.json")["projections"]

    extra = [one for one in projections if "again_of" in one]
    assert extra
    pitch_of = {note: one["pitch"] for one in projections for note in one["notes"]}
    for one in projections:
        assert ("again_of" in one) == (one["notes"] == [])
    for one in extra:
        assert one["pitch"] == pitch_of[one["again_of"]]


@pytest.mark.parametrize("place", PLACES)
def test_the_report_counts_the_extra_plucks_of_the_layout(place: int) -> None:
    projections = read(files_of(place), "layout.json")["projections"]

    report = read(files_of(place), "report.json")

    assert report["extra_pluck_count"] == sum("again_of" in one for one in projections) > 0
    assert read(files_of(place, plainly=True), "report.json")["extra_pluck_count"] == 0


@pytest.mark.parametrize("place", PLACES)
def test_read_back_from_what_is_cut_the_drawing_plays_every_extra_pluck(place: int) -> None:
    laid_out = written(place)

    checked = walk.check_drawing(files_of(place)["disc.dxf"], SHIPPED[place], LASER)

    order, as_read = (np.lexsort((p.sounds_s, p.track_index)) for p in (laid_out.plucks, checked.plucks))
    assert checked.good_to_cut
    assert checked.plucks.track_index[as_read].tolist() == laid_out.plucks.track_index[order].tolist()
    # a drawing's sixth decimal is 1e-6 mm: far below a microsecond at 5 mm/s
    assert np.abs(checked.plucks.sounds_s[as_read] - laid_out.plucks.sounds_s[order]).max() < 1e-6
    assert (laid_out.arrangement.again_of != NO_NOTE).any()


@pytest.mark.parametrize("place", PLACES)
def test_plainly_written_no_pluck_is_extra(place: int) -> None:
    projections = read(files_of(place, plainly=True), "layout.json")["projections"]

    assert all("again_of" not in one and one["notes"] for one in projections)
