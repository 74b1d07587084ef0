import json
import math
from dataclasses import replace

import numpy as np
import pytest

from layout.arrange.arrangement import LeftOut, Load, Transposed, Tried, Worth
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.report import report_on
from layout.version import ENGINE_VERSION
from layout.write import report_record, write_report
from layout.write.laid_out import LaidOut
from tests.layout.write.examples import (
    EMPTY_DISC,
    EXAMPLE_DISCS,
    FINGERPRINT,
    MOSSBROOK,
    ONE_FOLD,
    PRESS,
    THIN_WEB,
    THREE_FOLDS,
    full_disc,
    laid_out_of,
)

FIELDS = [
    *("format", "title", "fingerprint", "disc", "good_to_cut", "movement", "cutter", "engine_version"),
    *("transposed_semitones", "speed_factor", "from_s", "worth", "projection_count", "extra_pluck_count"),
    *("total", "highest", "lowest", "inner", "melody", "not_asked", "worst_bars", "tried", "transpositions"),
    *("load", "no_load_because", "drive", "net_section", "depth", "tracks"),
]
TALLY_FIELDS = [
    *("note_count", "kept_count", "asked_weight", "kept_weight", "kept_share", "octave_count"),
    *("nudged_count", "largest_nudge_ms", "mean_nudge_ms", "covered_count", "left_out"),
]


def with_arrangement(laid_out: LaidOut, **changes: object) -> LaidOut:
    """The layout with parts of its arrangement changed, and reported on again."""
    arrangement = replace(laid_out.arrangement, **changes)  # type: ignore[arg-type]  # replace checks the names
    return replace(laid_out, arrangement=arrangement, report=report_on(laid_out.score, arrangement, laid_out.disc))


def test_the_fields_stand_in_their_order_with_what_the_report_holds() -> None:
    record = json.loads(write_report(laid_out_of(ONE_FOLD, title="Evening tune")))

    assert list(record) == FIELDS
    assert record["format"] == "discwright-report/1"
    assert (record["title"], record["fingerprint"], record["good_to_cut"]) == ("Evening tune", FINGERPRINT, True)
    assert (record["movement"], record["cutter"]) == ({"id": "fernhollow-31", "revision": 1}, {"id": "fibre-laser"})
    assert record["engine_version"] == ENGINE_VERSION
    assert (record["transposed_semitones"], record["speed_factor"], record["from_s"]) == (-3, 1.25, 0.5)
    assert record["worth"] == {"kept": 1000, "bound": 2000, "proved": False, "stopped": None}
    assert (record["projection_count"], record["extra_pluck_count"]) == (1, 0)
    # one note of two is kept, both of the top line
    assert [list(record[voice]) for voice in ("total", "highest", "lowest", "inner")] == [TALLY_FIELDS] * 4
    assert record["total"] == record["highest"]
    assert record["total"] == {
        "note_count": 2,
        "kept_count": 1,
        "asked_weight": 2000,
        "kept_weight": 1000,
        "kept_share": 0.5,
        "octave_count": 0,
        "nudged_count": 0,
        "largest_nudge_ms": 0.0,
        "mean_nudge_ms": 0.0,
        "covered_count": 0,
        "left_out": {"no-such-pitch": 1},
    }
    assert record["inner"]["kept_share"] is None
    assert (record["melody"], record["not_asked"]) == (None, {})
    assert record["worst_bars"] == [
        {
            "bar": 1,
            "start_s": 0.0,
            "note_count": 2,
            "lost_count": 1,
            "asked_weight": 2000,
            "lost_weight": 1000,
            "lost_share": 0.5,
        }
    ]
    assert (record["tried"], record["load"]) == ([], None)
    assert record["no_load_because"].startswith("the movement does not state the stiffness and lift")


def test_a_track_tells_its_timing() -> None:
    [track] = report_record(laid_out_of(ONE_FOLD))["tracks"]

    # fernhollow-31 turns in 66 s; track 5 lies at 36 + 4 · 2.62 = 46.48 mm; the fibre laser states 0.05 mm, 0.02°
    position_ms, angle_ms = 0.05 * 66000 / (2 * math.pi * 46.48), 0.02 / 360 * 66000
    assert track == {
        "track": 5,
        "radius_mm": 46.48,
        "pluck_count": 1,
        "position_mm": 0.05,
        "placed_by": "position_tolerance_mm",
        "no_class_because": None,
        "position_ms": pytest.approx(position_ms),
        "angle_ms": pytest.approx(angle_ms),
        "play_ms": None,
        "depth_ms": 0.0,
        "together_ms": pytest.approx(position_ms + angle_ms),
        "root_square_ms": pytest.approx(math.sqrt(position_ms**2 + angle_ms**2)),
        # depth 1.41 ± 0.20: let go at acos((3.75 − 1.21)/3.2) = 37.46°, 3.2 · (sin 37.46° − sin 14°) past the release;
        # met at −3.2 · sin(60° − acos((3.75 − 1.61)/3.2)) = −0.638, 1.413 before it
        "engagement_mm": pytest.approx(3.2 * (math.sin(math.acos(2.54 / 3.2)) - math.sin(math.radians(14)))),
        "largest_nudge_ms": 0.0,
    }


def test_the_metal_left_is_written_with_its_places_and_what_the_cutter_asks_for() -> None:
    record = report_record(laid_out_of(ONE_FOLD))["net_section"]

    # The band of all tracks, 36 to 114.6 mm; openings are 2.04 across, their far corners 1.8945 beside the radius.
    from_mm, to_mm = 36 - 1.02, math.hypot(114.6 + 1.02, 1.8945)
    assert (record["from_mm"], record["to_mm"]) == pytest.approx((from_mm, to_mm), abs=1e-3)
    # One opening at 46.48 mm: most is cut on the ray through its far corner, 2.04 · sec atan(1.8945/47.5)
    left_mm = to_mm - from_mm - 2.04 * math.hypot(47.5, 1.8945) / 47.5
    assert record["line"]["left_mm"] == pytest.approx(left_mm, abs=2e-3)
    assert record["line"]["share"] == pytest.approx(left_mm / (to_mm - from_mm), abs=1e-4)
    ring = record["ring"]
    assert ring["left_mm"] == pytest.approx(ring["share"] * 2 * math.pi * ring["radius_mm"])
    assert (record["line"]["least_share"], ring["least_share"]) == (0.4, 0.4)
    assert list(record["line"]) == ["left_mm", "share", "angle_deg", "least_share"]
    assert list(ring) == ["left_mm", "share", "radius_mm", "least_share"]
    assert report_record(laid_out_of(EMPTY_DISC))["net_section"] is None


def test_melody_transpositions_load_and_notes_not_asked_for_are_written() -> None:
    laid_out = with_arrangement(
        laid_out_of(THREE_FOLDS),
        melody=np.array([True, False, False, False]),
        note_weight=frozen_ints([1000, 1000, 1000, 0]),
        left_out=(LeftOut(note=3, reason="outside-passage"),),
        worth=Worth(kept=3000, bound=3100, proved=False, stopped="time"),
        tried=(
            Tried(semitones=2, speed_factor=1.0, kept=3000, bound=3000),
            Tried(semitones=0, speed_factor=0.9, kept=None, bound=2500),
        ),
        transpositions=(
            Transposed(semitones=0, kept=None, bound=2500),
            Transposed(semitones=2, kept=3000, bound=3000),
        ),
        load=Load(peak_nmm=12.0, at_s=3.5, plucks=(0, 2), limit_nmm=48.0),
    )

    record = json.loads(write_report(laid_out))

    assert record["melody"]["note_count"] == 1
    assert record["not_asked"] == {"outside-passage": 1}
    assert record["worth"]["stopped"] == "time"
    assert record["tried"] == [
        {"semitones": 2, "speed_factor": 1.0, "kept": 3000, "bound": 3000},
        {"semitones": 0, "speed_factor": 0.9, "kept": None, "bound": 2500},
    ]
    assert record["transpositions"] == [
        {"semitones": 0, "kept": None, "bound": 2500},
        {"semitones": 2, "kept": 3000, "bound": 3000},
    ]
    assert record["load"] == {
        "peak_nmm": 12.0,
        "limit_nmm": 48.0,
        "share_of_limit": 0.25,
        "at_s": 3.5,
        "chord": [{"track": 1, "pitch": "C4"}, {"track": 31, "pitch": "C4"}],  # key 60
    }
    assert record["no_load_because"] is None


def test_every_bar_transposition_and_track_stands_on_its_own_line() -> None:
    written = write_report(laid_out_of(THREE_FOLDS)).decode()

    record = json.loads(written)
    assert all(f"\n{json.dumps(row)}" in written for row in (*record["tracks"], *record["worst_bars"]))
    assert len(record["tracks"]) == 3


@pytest.mark.parametrize("name", EXAMPLE_DISCS)
def test_the_same_layout_gives_the_same_bytes(name: str) -> None:
    first = write_report(laid_out_of(EXAMPLE_DISCS[name]))

    assert write_report(laid_out_of(EXAMPLE_DISCS[name])) == first


def test_a_faulty_disc_has_a_report_that_says_so() -> None:
    record = json.loads(write_report(laid_out_of(ONE_FOLD, findings=(THIN_WEB,))))

    assert record["good_to_cut"] is False
    assert record["total"]["kept_count"] == 1


def test_an_empty_disc_has_a_report_of_zeros() -> None:
    record = json.loads(write_report(laid_out_of(EMPTY_DISC)))

    assert (record["total"]["kept_count"], record["total"]["kept_share"], record["tracks"]) == (0, 0.0, [])
    assert record["no_load_because"] == "nothing is plucked"


def test_any_title_comes_back_as_it_was() -> None:
    written = write_report(laid_out_of(ONE_FOLD, title='Ljus över "tjärnen"\ud800'))

    assert json.loads(written.decode("utf-8"))["title"] == 'Ljus över "tjärnen"\ud800'


def test_a_number_that_is_none_is_refused_rather_than_written() -> None:
    laid_out = with_arrangement(laid_out_of(ONE_FOLD), planned_s=frozen_floats([math.nan]), speed_factor=math.nan)

    with pytest.raises(ValueError, match="not JSON compliant"):
        write_report(laid_out)


def test_the_drive_is_written_with_its_units_and_what_is_not_stated() -> None:
    record = json.loads(write_report(laid_out_of(ONE_FOLD)))["drive"]

    assert record == {
        "start": None,
        "torque": None,
        "winding": None,
        "revolution": {"stated_s": 66.0, "by_brake_and_train_s": None},
        "clearing_turn": {"track_count": 1},
        "not_stated": ["drive", "teeth.stiffness_n_per_mm", "teeth.lift_mm"],
    }


def test_a_stated_drive_is_written_whole() -> None:
    record = json.loads(write_report(laid_out_of(full_disc(MOSSBROOK, PRESS))))["drive"]

    assert list(record["start"]) == [
        *("inertia_kg_m2", "time_constant_s", "to_speed_s", "to_speed_deg", "to_speed_at_fastest_deg"),
        *("before_music_deg", "at_least"),
    ]
    assert list(record["torque"]) == ["peak_nmm", "limit_nmm", "at_s", "chord", "mean_nmm", "over_the_turn"]
    assert list(record["winding"]) == [
        *("full_nmm", "spent_nmm", "needed_nmm", "turns", "ended_by", "upper_bound"),
        *("last_turn_slows_share", "winding_slows_share", "first_revolution_s", "last_revolution_s"),
    ]
    over_the_turn = record["torque"]["over_the_turn"]
    assert len(over_the_turn["at_s"]) == len(over_the_turn["torque_nmm"]) > 67
    # before_music_deg 16 of a turn of 90 s is 4 s
    assert (over_the_turn["at_s"][0], over_the_turn["at_s"][-1]) == (-4.0, 86.0)
    assert record["not_stated"] == []
