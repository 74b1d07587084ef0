"""Reports of arrangements small enough to count by hand."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.arrange.arrangement import NO_NOTE, Arrangement, LeftOut, Load, Transposed, Tried
from layout.mechanics.arrays import BoolArray, frozen_floats, frozen_ints
from layout.read.score import Score
from layout.report import report_on
from layout.report.report import BarLoss, Loaded, Report, Tally
from tests.layout.examples import PLAIN, arrangement_of, cutter_with, disc_of, movement_with

NOTHING = Tally(
    note_count=0,
    kept_count=0,
    asked_weight=0,
    kept_weight=0,
    octave_count=0,
    nudged_count=0,
    largest_nudge_ms=0.0,
    mean_nudge_ms=0.0,
    covered_count=0,
    left_out=(),
)
WEB, STEP = "web", "wheel-still-stepping"


def score_of(onset_s: list[float], bar_s: list[float] | None = None) -> Score:
    """A tune with notes at these moments and bars that start at those; one bar of a million seconds by default."""
    count = len(onset_s)
    return Score(
        onset_s=frozen_floats(onset_s),
        duration_s=frozen_floats([0.5] * count),
        pitch=frozen_ints([60] * count),
        velocity=frozen_ints([64] * count),
        channel=frozen_ints([1] * count),
        bar_s=frozen_floats(bar_s or [0.0, 1e6]),
        beat_s=frozen_floats(bar_s or [0.0, 1e6]),
        title="",
        midi_format=1,
        sequence=1,
        sequence_count=1,
        percussion_count=0,
        warnings=(),
    )


def marks(*notes: int, of: int) -> BoolArray:
    """An array over so many notes that is true at these."""
    return np.isin(np.arange(of), notes)


def reported(arrangement: Arrangement, score: Score | None = None) -> Report:
    """The report on an arrangement, on the plain movement with its three tracks."""
    plucks = [
        (track + 1, sounds)
        for track, sounds in zip(arrangement.track_index.tolist(), arrangement.planned_s.tolist(), strict=True)
    ]
    score = score or score_of([float(note) for note in range(len(arrangement.note_weight))])
    return report_on(score, arrangement, disc_of(PLAIN, plucks))


def test_every_voice_is_counted_with_its_weight() -> None:
    # Notes 0 to 3 are played, 4 and 5 are not. Note 3 sounds alone: highest and lowest, so of the top line.
    lost = (LeftOut(note=4, reason=WEB), LeftOut(note=5, reason=STEP))
    arrangement = replace(
        arrangement_of([(1, 0.0), (2, 0.0), (3, 0.0), (1, 9.0)], lost),
        note_weight=frozen_ints([2000, 1400, 1000, 2200, 1600, 900]),
        highest=marks(0, 3, of=6),
        lowest=marks(1, 3, 4, of=6),
        melody=marks(0, 3, of=6),
    )

    report = reported(arrangement)

    assert report.highest == replace(NOTHING, note_count=2, kept_count=2, asked_weight=4200, kept_weight=4200)
    # the bass: 1400 of 1400 + 1600
    bass = replace(NOTHING, note_count=2, kept_count=1, asked_weight=3000, kept_weight=1400, left_out=((WEB, 1),))
    assert report.lowest == bass
    assert report.inner == replace(
        NOTHING, note_count=2, kept_count=1, asked_weight=1900, kept_weight=1000, left_out=((STEP, 1),)
    )
    assert report.total == replace(
        NOTHING,
        note_count=6,
        kept_count=4,
        asked_weight=9100,  # 4200 + 3000 + 1900
        kept_weight=6600,  # 4200 + 1400 + 1000
        left_out=((WEB, 1), (STEP, 1)),  # in the order of their names
    )
    assert report.lowest.kept_share == pytest.approx(1400 / 3000)
    assert report.total.kept_share == pytest.approx(6600 / 9100)


def test_the_melody_is_told_apart_only_where_it_is_not_the_top_line() -> None:
    alike = replace(arrangement_of([(1, 0.0), (2, 0.0)]), highest=marks(1, of=2), melody=marks(1, of=2))
    led = replace(alike, melody=marks(0, of=2))

    assert reported(alike).melody is None
    assert reported(led).melody == replace(NOTHING, note_count=1, kept_count=1, asked_weight=1000, kept_weight=1000)


def test_notes_not_asked_for_are_counted_apart() -> None:
    not_asked = (LeftOut(note=1, reason="past-the-turn"), LeftOut(note=2, reason="outside-passage"))
    more = (LeftOut(note=3, reason="outside-passage"), LeftOut(note=4, reason="no-such-pitch"))
    arrangement = replace(arrangement_of([(1, 0.0)], not_asked + more), note_weight=frozen_ints([1000, 0, 0, 0, 700]))

    report = reported(arrangement)

    assert report.not_asked == (("outside-passage", 2), ("past-the-turn", 1))
    assert report.total == replace(
        NOTHING,
        note_count=2,
        kept_count=1,
        asked_weight=1700,
        kept_weight=1000,
        left_out=(("no-such-pitch", 1),),
    )


def test_notes_moved_by_octaves_and_notes_covered_are_counted_by_note() -> None:
    # Pluck 0 plays notes 0, 1 and 2 an octave down, pluck 1 note 3 as written.
    arrangement = replace(
        arrangement_of([(1, 0.0), (2, 1.0)]),
        notes=((0, 1, 2), (3,)),
        octave_semitones=frozen_ints([-12, 0]),
        note_weight=frozen_ints([1000] * 4),
        highest=marks(1, of=4),
        lowest=marks(0, of=4),
        melody=marks(1, of=4),
    )

    report = reported(arrangement)

    assert (report.total.octave_count, report.total.covered_count, report.total.kept_count) == (3, 2, 4)
    assert (report.lowest.octave_count, report.lowest.covered_count) == (1, 0)  # the first of its pluck
    assert (report.highest.octave_count, report.highest.covered_count) == (1, 1)
    assert (report.inner.octave_count, report.inner.covered_count) == (1, 1)  # notes 2 and 3


def test_nudges_are_counted_by_note_from_more_than_a_microsecond_on() -> None:
    # 1 µs is not counted, 2 µs is; pluck 2 plays two notes 5 ms early, pluck 3 one 2.5 ms late.
    arrangement = arrangement_of([(1, 0.0), (2, 3.0), (1, 9.0), (3, 12.0)])
    shift_s = np.array([1e-6, 2e-6, -0.005, 0.0025])
    arrangement = replace(
        arrangement,
        planned_s=frozen_floats(arrangement.asked_s + shift_s),
        notes=((0,), (1,), (2, 3), (4,)),
        note_weight=frozen_ints([1000] * 5),
        highest=marks(4, of=5),
        lowest=marks(of=5),
        melody=marks(4, of=5),
    )

    report = reported(arrangement)

    assert (report.total.nudged_count, report.total.largest_nudge_ms) == (4, 5.0)
    assert report.total.mean_nudge_ms == pytest.approx(3.1255)  # (0.002 + 5 + 5 + 2.5) / 4
    assert (report.highest.nudged_count, report.highest.largest_nudge_ms, report.highest.mean_nudge_ms) == (1, 2.5, 2.5)
    # tracks 1, 2 and 3: the greatest of plucks 0 and 2, then pluck 1, then pluck 3
    assert [track.largest_nudge_ms for track in report.tracks] == [5.0, 0.002, 2.5]


def test_extra_plucks_are_counted_and_are_no_notes() -> None:
    arrangement = replace(
        arrangement_of([(1, 0.0), (2, 1.0), (1, 9.0)]),
        notes=((0,), (), ()),
        again_of=frozen_ints([NO_NOTE, 0, 0]),
        note_weight=frozen_ints([1000]),
        highest=marks(0, of=1),
        lowest=marks(0, of=1),
        melody=marks(0, of=1),
    )

    report = reported(arrangement)

    assert (report.projection_count, report.extra_pluck_count) == (3, 2)
    assert (report.total.note_count, report.total.kept_count) == (1, 1)


def test_the_worst_bars_come_first_and_only_those_that_lose() -> None:
    # Bars start at 0, 2, 4 …; bar b has the notes 2(b − 1) and 2b − 1, at its start and a second later.
    bars = 8
    lost_weight = {
        1: 500,
        2: 900,
        4: 900,
        5: 100,
        6: 300,
        7: 800,
    }  # of the second note of the bar; bars 3 and 8 keep all
    lost = tuple(LeftOut(note=2 * bar - 1, reason=WEB) for bar in lost_weight)
    kept = [note for note in range(2 * bars) if note not in {left.note for left in lost}]
    weight = [1000] * (2 * bars)
    for bar, lost_of_bar in lost_weight.items():
        weight[2 * bar - 1] = lost_of_bar
    arrangement = replace(
        arrangement_of([(1, float(note)) for note in kept], lost),
        notes=tuple((note,) for note in kept),
        note_weight=frozen_ints(weight),
    )
    score = score_of([float(note) for note in range(2 * bars)], [2.0 * bar for bar in range(bars + 1)])

    worst = reported(arrangement, score).worst_bars

    # 900 twice, the earlier first; the fifth is bar 6 with 300, and bar 5 with 100 is the sixth
    assert [bar.bar for bar in worst] == [2, 4, 7, 1, 6]
    assert worst[0] == BarLoss(bar=2, start_s=2.0, note_count=2, lost_count=1, asked_weight=1900, lost_weight=900)
    assert worst[0].lost_share == pytest.approx(900 / 1900)


def test_a_note_on_a_bar_line_is_of_the_bar_that_starts_there() -> None:
    arrangement = arrangement_of([(1, 0.0)], (LeftOut(note=1, reason=WEB), LeftOut(note=2, reason=WEB)))

    worst = reported(arrangement, score_of([0.0, 1.9999999, 2.0], [0.0, 2.0, 4.0])).worst_bars

    assert [(bar.bar, bar.note_count, bar.lost_count) for bar in worst] == [(1, 2, 1), (2, 1, 1)]


def test_the_timing_error_of_a_track_follows_from_the_tolerances_of_the_cutter() -> None:
    changes = {"tracks/0/radius_mm": 40, "tracks/2/radius_mm": 190, "disc/outer_diameter_mm": 400}
    movement = movement_with(changes)  # one turn is 60 s
    cutter = cutter_with({"position_tolerance_mm": 0.1, "angle_tolerance_deg": 0.05})
    plucks = [(1, 0.0), (1, 5.0), (3, 9.0)]

    inner, outer = report_on(score_of([0.0] * 3), arrangement_of(plucks), disc_of(movement, plucks, cutter)).tracks

    assert (inner.track, inner.radius_mm, inner.pluck_count) == (1, 40.0, 2)
    assert (outer.track, outer.radius_mm, outer.pluck_count) == (3, 190.0, 1)
    # 0.1 mm at a turn of 60 s: 100 · 60 / (2π · 40) = 23.873 ms, and at 190 mm 5.026 ms
    assert (inner.error.position_ms, outer.error.position_ms) == pytest.approx((23.873, 5.026), abs=0.001)
    # 0.05° of 360° is 60 000 ms / 7200, on every track
    assert inner.error.angle_ms == outer.error.angle_ms == pytest.approx(8.333, abs=0.001)
    assert outer.error.together_ms == pytest.approx(5.026 + 8.333, abs=0.001)


def test_the_greatest_load_is_told_with_its_chord() -> None:
    load = Load(peak_nmm=45.0, at_s=9.0, plucks=(1, 2), limit_nmm=60.0)
    arrangement = replace(
        arrangement_of([(1, 0.0), (2, 9.0), (3, 9.0)]), key=frozen_ints([72, 76, 79]), load=load
    )  # C5, E5 and G5: A4 is 69

    report = reported(arrangement)

    assert report.load is not None
    assert report.load.chord == (Loaded(track=2, pitch="E5"), Loaded(track=3, pitch="G5"))
    assert (report.load.peak_nmm, report.load.limit_nmm, report.load.at_s) == (45.0, 60.0, 9.0)
    assert report.load.share_of_limit == pytest.approx(0.75)  # 45 / 60
    assert report.no_load_because is None


def test_a_load_without_a_limit_has_no_share_of_it() -> None:
    load = Load(peak_nmm=45.0, at_s=0.0, plucks=(0,), limit_nmm=None)

    told = reported(replace(arrangement_of([(1, 0.0)]), load=load)).load

    assert told is not None
    assert (told.limit_nmm, told.share_of_limit) == (None, None)


def test_a_load_that_is_not_known_says_why() -> None:
    assert reported(arrangement_of([])).no_load_because == "nothing is plucked"
    assert reported(arrangement_of([(1, 0.0)])).no_load_because == (
        "the movement does not state the stiffness and lift of every usable tooth"
    )


def test_the_transpositions_tried_and_the_worth_are_told_as_they_are() -> None:
    tried = (
        Tried(semitones=2, speed_factor=1.0, kept=2000, bound=2000),
        Tried(semitones=-5, speed_factor=1.0, kept=None, bound=1900),
    )
    transpositions = (
        Transposed(semitones=-5, kept=None, bound=1900),
        Transposed(semitones=2, kept=2000, bound=2000),
    )
    arrangement = replace(arrangement_of([(1, 0.0), (2, 0.0)]), tried=tried, transpositions=transpositions)

    report = reported(arrangement)

    assert report.tried == tried
    assert report.transpositions == transpositions
    assert report.worth == arrangement.worth


@pytest.mark.parametrize("lost", [(), (LeftOut(note=0, reason="no-such-pitch"),)], ids=["no notes", "none kept"])
def test_an_arrangement_without_plucks_gives_zeros(lost: tuple[LeftOut, ...]) -> None:
    report = reported(arrangement_of([], lost))

    asked = replace(NOTHING, note_count=len(lost), asked_weight=1000 * len(lost))
    assert report.total == replace(asked, left_out=tuple((left.reason, 1) for left in lost))
    assert report.highest == report.lowest == NOTHING
    assert report.highest.kept_share is None
    assert report.total.kept_share == (0.0 if lost else None)
    assert (report.projection_count, report.extra_pluck_count, report.tracks) == (0, 0, ())
    assert len(report.worst_bars) == len(lost)


@given(st.data())
def test_the_voices_make_the_total_and_every_note_is_kept_or_left_out(data: st.DataObject) -> None:
    count = data.draw(st.integers(0, 12))
    some = st.lists(st.booleans(), min_size=count, max_size=count)
    weight = data.draw(st.lists(st.integers(0, 5000), min_size=count, max_size=count))
    kept_count = data.draw(st.integers(0, count))
    reasons = st.sampled_from([WEB, STEP, "no-such-pitch"])
    lost = tuple(LeftOut(note=note, reason=data.draw(reasons)) for note in range(kept_count, count))
    arrangement = replace(
        arrangement_of([(note % 3 + 1, float(note)) for note in range(kept_count)], lost),
        note_weight=frozen_ints(weight),
        highest=np.array(data.draw(some), dtype=np.bool_),
        lowest=np.array(data.draw(some), dtype=np.bool_),
        octave_semitones=frozen_ints([12 * (note % 2) for note in range(kept_count)]),
    )

    report = reported(arrangement)

    voices = (report.highest, report.lowest, report.inner)
    for field in ("note_count", "kept_count", "asked_weight", "kept_weight", "octave_count", "nudged_count"):
        assert sum(getattr(voice, field) for voice in voices) == getattr(report.total, field)
    for tally in (*voices, report.total):
        assert tally.note_count == tally.kept_count + sum(number for _, number in tally.left_out)
    assert report.total.note_count + sum(number for _, number in report.not_asked) >= count - kept_count
