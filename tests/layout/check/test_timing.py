"""Fast passages of the top line on tracks cut too coarsely: 60 s a turn, tracks at 50, 60 and 100 mm."""

from dataclasses import replace

import numpy as np
import pytest

from layout import walk
from layout.arrange.arrangement import NO_NOTE, Arrangement
from layout.check import Code, Finding, Level, check
from layout.check.timing import fast_passages_are_held
from layout.documents import Cutter, Movement, read_settings
from layout.mechanics.arrays import frozen_floats, frozen_ints
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, arrangement_of, cutter_with, disc_of, movement_with

# 0.1 mm at 60 s is 19.10 ms at 50 mm, 15.92 at 60 and 9.55 at 100; 0.01 degrees are 1.67 ms.
COARSE = cutter_with({"position_tolerance_mm": 0.1, "angle_tolerance_deg": 0.01})


def top_line(plucks: list[tuple[int, float]], *, top: list[int] | None = None) -> Arrangement:
    """An arrangement in which these notes, or all, are the top line."""
    every = range(len(plucks)) if top is None else top
    return replace(arrangement_of(plucks), highest=np.isin(np.arange(len(plucks)), list(every)))


def found(arrangement: Arrangement, cutter: Cutter = COARSE, movement: Movement = PLAIN) -> list[Finding]:
    plucks = [
        (track + 1, at_s)
        for track, at_s in zip(arrangement.track_index.tolist(), arrangement.planned_s.tolist(), strict=True)
    ]
    return fast_passages_are_held(arrangement, disc_of(movement, plucks, cutter))


def test_a_fast_passage_on_a_coarse_track_is_told_with_its_worst_place() -> None:
    # 250, 200 and 230 ms apart: the note at 1.0 is not fast, those at 1.25, 1.45 and 1.68 are
    [finding] = found(top_line([(1, 1.0), (1, 1.25), (1, 1.45), (3, 1.68)]))

    assert (finding.code, finding.level, finding.unit) == (Code.TIMING_TOO_COARSE, Level.WARNING, "ms")
    assert finding.measured == pytest.approx(100 * 60 / (2 * np.pi * 50) + 0.01 / 360 * 60_000)
    assert finding.limit == 20.0
    assert (finding.at.tracks, finding.at.projections, finding.at.sounds_s) == ((1,), (1,), 1.25)
    assert (finding.at.radius_mm, finding.at.angle_deg) == pytest.approx((50.0, 30 + 6 * 1.25))
    assert finding.message == (
        "Track 1, at 50.00 mm, can be cut within 20.8 ms either way; at 1.250 s it plays a note of the top line "
        "200 ms from the next, where more than 20 ms is heard; 2 notes of such passages lie on tracks cut as coarsely."
    )
    assert "transpose it further out" in finding.remedy


def test_the_nearest_notes_of_the_coarsest_track_come_first() -> None:
    coarser = cutter_with({"position_tolerance_mm": 0.15})  # 15.9 ms even at 100 mm, 23.9 and 28.6 further in

    [finding] = found(top_line([(2, 1.0), (2, 1.05), (1, 9.0), (3, 9.2), (1, 20.0), (3, 20.1)]), coarser)

    assert (finding.at.tracks, finding.at.sounds_s) == ((1,), 20.0)
    assert "100 ms from the next" in finding.message
    assert "4 notes of such passages" in finding.message


@pytest.mark.parametrize(
    ("plucks", "why"),
    [
        ([(1, 1.0), (1, 1.241), (1, 2.0)], "slow"),
        ([(2, 1.0), (3, 1.1), (2, 1.2)], "on tracks that hold 17.6 ms"),
        ([(1, 1.0), (1, 1.0)], "one moment"),
        ([(1, 1.0)], "one note"),
        ([], "none"),
    ],
)
def test_a_passage_that_is_slow_or_on_finer_tracks_passes(plucks: list[tuple[int, float]], why: str) -> None:
    assert found(top_line(plucks)) == [], why


def test_only_the_top_line_counts() -> None:
    plucks = [(1, 1.0), (1, 1.1), (1, 1.2)]

    assert len(found(top_line(plucks, top=[1, 2]))) == 1
    assert found(top_line(plucks, top=[2])) == []
    assert found(top_line(plucks, top=[])) == []


def test_the_time_between_is_that_asked_for_and_extra_plucks_are_no_notes() -> None:
    asked = top_line([(1, 1.0), (1, 1.3), (1, 1.6)])
    nudged = replace(asked, planned_s=frozen_floats([1.0, 1.2, 1.6]))
    doubled = replace(asked, notes=((0,), (), (1,)), again_of=frozen_ints([NO_NOTE, 0, NO_NOTE]))

    assert found(nudged) == []
    assert found(doubled) == []


def test_the_play_of_the_centre_hole_moves_a_passage_together_and_is_left_out() -> None:
    loose = movement_with({"disc/centre_hole_play_mm": 0.5})
    fine = cutter_with({"position_tolerance_mm": 0.09, "angle_tolerance_deg": 0.0})

    assert found(top_line([(1, 1.0), (1, 1.1)]), fine, loose) == []


def test_a_tolerance_class_counts_where_the_cutter_states_one() -> None:
    by_class = cutter_with({"tolerance_class": "iso-9013-1"})  # 0.2 mm from 35 to 125 mm: 38.2 ms at 50 mm

    [finding] = found(top_line([(1, 1.0), (1, 1.1)]), by_class)

    assert finding.measured == pytest.approx(200 * 60 / (2 * np.pi * 50) + 0.02 / 360 * 60_000)
    assert found(top_line([(1, 1.0), (1, 1.1)]), LASER) == []


def test_it_is_judged_where_the_arrangement_is_known_and_not_on_a_drawing() -> None:
    arrangement = top_line([(1, 1.0), (1, 1.2)])
    disc = disc_of(PLAIN, [(1, 1.0), (1, 1.2)], COARSE)

    assert Code.TIMING_TOO_COARSE in [finding.code for finding in check(disc, arrangement)]
    assert Code.TIMING_TOO_COARSE not in [finding.code for finding in check(disc)]


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_demo_tune_has_nothing_small_weak_or_coarse(movement: Movement, cutter: Cutter) -> None:
    laid_out = walk.lay_out(demo_tune(), movement, cutter, read_settings("{}"))

    ours = {Code.TIMING_TOO_COARSE, Code.SMALL_FOR_SHEET, Code.LINE_CUT_THROUGH, Code.RING_CUT_THROUGH}
    assert {finding.code for finding in laid_out.findings} & ours == set()
