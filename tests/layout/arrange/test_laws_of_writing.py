"""What holds however the music is written: random small tunes, checked from the arrangement alone.

What law holds for the notes themselves? Plucks again and second teeth may always be left off, so with them at least as
much is kept as without; but between choices that differ little in their notes, what can be plucked again or doubled may
decide. So the notes keep at least what they keep without, less what the extra plucks are worth; and no note is left
out that would fit if one or two extra plucks made room, for two are worth less than any note.
"""

import math
from dataclasses import replace
from itertools import chain, combinations
from random import Random
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange import Arrangement, arrange
from layout.arrange.arrangement import NO_NOTE
from layout.documents import Movement, Settings
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import turning_of
from layout.read import Score
from tests.layout.arrange.small_comb import (
    CLOSE_TRACKS,
    NEARLY_NO_REST,
    SMALL_COMB,
    asking,
    broken_rules,
    comb_with,
    left_out,
    plucks_of,
    score_of,
    spacing_for,
)
from tests.layout.arrange.test_laws_of_arranging import ROUNDING, loosened, tracks_of
from tests.layout.arrange.test_stage_against_brute_force import TEETH, random_tune
from tests.thorough import tried

UNDAMPED = [tooth | {"damped": False} for tooth in TEETH]
QUICK_WHEEL = {**SMALL_COMB["star_wheel"], "engagement_arc_mm": 0.6}  # repeats after 0.06 to 0.2 s
SHORT_SLOTS = {"projection": {"kind": "slot", "width_mm": 0.5, "length_mm": 0.5}}
COMBS: dict[str, dict[str, Any]] = {
    "plain": {"teeth": TEETH},
    "undamped, nearly no rest": {"teeth": UNDAMPED, "turns": "anticlockwise", **NEARLY_NO_REST},
    "quick": {"teeth": UNDAMPED, "star_wheel": QUICK_WHEEL, **SHORT_SLOTS, **NEARLY_NO_REST},
    "close tracks": {"teeth": TEETH, **CLOSE_TRACKS, **NEARLY_NO_REST},
    "weak drive": {"teeth": UNDAMPED, **NEARLY_NO_REST, "drive": {"torque_limit_nmm": 20.3}},
}
MOVEMENTS = {name: comb_with(changes) for name, changes in COMBS.items()}
SPACINGS = {name: spacing_for(movement, min_web_mm=1.0) for name, movement in MOVEMENTS.items()}
A_COMB = st.sampled_from(sorted(COMBS))
ON_TRACKS_ALONE = st.sampled_from(["plain", "undamped, nearly no rest", "quick"])  # no webs between tracks, no drive
WITHOUT_A_DRIVE = st.sampled_from(sorted(set(COMBS) - {"weak drive"}))
SEEDS = st.integers(0, 10**9)
# The stage lets edges be 1e-9 rad nearer than stated and rounds moments and limits to a nanosecond: 2 ns are 2e-10 rad.
GRAIN_RAD = 1.3e-9
OFTEN = settings(max_examples=tried(80), deadline=None, derandomize=True)

EXTRA: dict[str, list[Any]] = {"pluck_again_s": [None, 0.1, 0.25, 0.7], "two_teeth_from_velocity": [None, 1, 64]}
COSTS: dict[str, list[Any]] = {"ringing_tooth_cost": [0, 0.3, 1], "ringing_bass_cost": [0, 0.5, 1]}
ORDER: dict[str, list[Any]] = {
    "ornaments": ["as-any-note", "over-doubled-teeth"],
    "chords": ["together", "bass-first"],
}


def tune_of(seed: int) -> Score:
    """A crowded tune, or a trill that others cross, of notes short and long."""
    random = Random(seed)
    if random.random() < 0.5:
        notes = random_tune(random)
    else:
        low, high = random.choice((("D4", "E4"), ("E4", "F#4"), ("C4", "D4")))
        notes = [(place * random.choice((0.09, 0.1)), (low, high)[place % 2], 64) for place in range(5)]
        notes += random_tune(random)[:3]
    score = score_of(notes)
    lasts_s = frozen_floats(random.choice((0.08, 0.25, 0.9, 1.6)) for _ in range(score.note_count))
    return replace(score, duration_s=lasts_s)


def asked_of(seed: int, choices: dict[str, list[Any]], **fields: Any) -> Settings:
    random = Random(seed + 1)
    free = {
        "largest_nudge_ms": random.choice((0, 10, 20, 50)),
        "largest_melody_nudge_ms": random.choice((0, 6, 50)),
        "octave_moves": random.choice(("none", "outer", "all")),
        "channels": random.choice(({}, {"lead": 2})),
        "passage": {"from_s": 0},
    }
    return asking(**{**free, "writing": {name: random.choice(some) for name, some in choices.items()}, **fields})


def plainly(asked: Settings) -> Settings:
    return asked.model_copy(update={"writing": Settings().writing})


def arranged(score: Score, comb: str, asked: Settings) -> Arrangement:
    return arrange(score, MOVEMENTS[comb], asked, SPACINGS[comb])


def real_and_extra(arrangement: Arrangement) -> tuple[list[int], list[int]]:
    """The places of the plucks that play notes, and of the extra ones."""
    extra = [place for place, note in enumerate(arrangement.again_of) if note != NO_NOTE]
    return [place for place in range(len(arrangement.notes)) if place not in extra], extra


def extras_worth(arrangement: Arrangement, asked: Settings) -> int:
    """What the extra plucks are worth, octaves and costs aside: 0.2 or 0.25 of the pluck, below half the least asked.

    Notes of one pluck, left out or not, stand at one onset and pitch; all plucks weigh at least their lightest note.
    """
    real, extra = real_and_extra(arrangement)
    weight_of = {
        note: sum(int(arrangement.note_weight[one]) for one in arrangement.notes[place])
        for place in real
        for note in arrangement.notes[place]
    }
    asked_at = {note: float(arrangement.asked_s[place]) for place in real for note in arrangement.notes[place]}
    assert asked.octave_moves == "none"
    total = 0
    for place in extra:
        note = int(arrangement.again_of[place])
        second = float(arrangement.asked_s[place]) == asked_at[note]
        total += weight_of[note] * (250 if second else 200) // 1000
    return total


def assert_written_soundly(
    arrangement: Arrangement, score: Score, asked: Settings, movement: Movement, spacing: Spacing
) -> None:
    """Everything that can be told of an arrangement with extra plucks without knowing how it was found."""
    notes = [note for pluck in arrangement.notes for note in pluck] + list(left_out(arrangement))
    assert sorted(notes) == list(range(score.note_count))
    free_s = turning_of(movement).free_turn_s
    rows = zip(arrangement.notes, arrangement.asked_s.tolist(), arrangement.planned_s.tolist(), strict=True)
    melody_ms = min(asked.largest_nudge_ms, asked.largest_melody_nudge_ms)
    home = {note: place for place, pluck in enumerate(arrangement.notes) for note in pluck}
    for place, (pluck, asked_s, planned_s) in enumerate(rows):
        again_of = int(arrangement.again_of[place])
        assert (pluck == ()) == (again_of != NO_NOTE)
        own = home[again_of] if again_of != NO_NOTE else place
        melody = any(arrangement.melody[note] for note in arrangement.notes[own])
        assert abs(planned_s - asked_s) <= (melody_ms if melody else asked.largest_nudge_ms) / 1000 + ROUNDING
        assert 0 <= planned_s <= free_s + ROUNDING
    _assert_extras_belong(arrangement, score, asked)
    assert broken_rules(plucks_of(arrangement), movement, loosened(spacing, GRAIN_RAD)) == []
    if arrangement.load is not None and arrangement.load.limit_nmm is not None:
        assert arrangement.load.peak_nmm <= arrangement.load.limit_nmm + ROUNDING
    # Nudges that pile up more than the drive carries are forbidden after the bound is found: no proof then.
    assert arrangement.worth.proved == (arrangement.worth.stopped != "nudges")
    assert arrangement.worth.proved == (arrangement.worth.kept == arrangement.worth.bound)


def _assert_extras_belong(arrangement: Arrangement, score: Score, asked: Settings) -> None:
    home = {note: place for place, pluck in enumerate(arrangement.notes) for note in pluck}
    interval_s, doubled = asked.writing.pluck_again_s, asked.writing.two_teeth_from_velocity
    asked_for = [
        (int(arrangement.again_of[place]), float(arrangement.asked_s[place]))
        for place in real_and_extra(arrangement)[1]
    ]
    assert len(set(asked_for)) == len(asked_for)
    for place in real_and_extra(arrangement)[1]:
        own = home[int(arrangement.again_of[place])]
        assert arrangement.key[place] == arrangement.key[own]
        assert arrangement.octave_semitones[place] == arrangement.octave_semitones[own] == 0
        after_s = float(arrangement.asked_s[place] - arrangement.asked_s[own])
        mine = list(arrangement.notes[own])
        if after_s == 0:
            assert doubled is not None
            assert score.velocity[mine].max() >= doubled
            assert arrangement.track_index[place] != arrangement.track_index[own]
            continue
        assert interval_s is not None
        times = round(after_s / interval_s)
        assert abs(times * interval_s - after_s) < 1e-9
        assert (times + 0.5) * interval_s <= score.duration_s[mine].max() + 1e-6


@OFTEN
@given(A_COMB, SEEDS)
def test_however_it_is_written_the_arrangement_is_sound_and_proved(comb: str, seed: int) -> None:
    score, asked = tune_of(seed), asked_of(seed, EXTRA | COSTS | ORDER)

    arrangement = arranged(score, comb, asked)

    assert_written_soundly(arrangement, score, asked, MOVEMENTS[comb], SPACINGS[comb])


def test_the_tunes_try_everything() -> None:
    found = [
        (comb, tune_of(seed), asked_of(seed, EXTRA | COSTS | ORDER))
        for seed in range(40)
        for comb in ("plain", "quick")
    ]
    arrangements = [(asked, score, arranged(score, comb, asked)) for comb, score, asked in found]

    extras = [real_and_extra(one)[1] for _, _, one in arrangements]
    assert sum(map(bool, extras)) > 20
    assert any(one.planned_s.tolist() != one.asked_s.tolist() for _, _, one in arrangements)


@OFTEN
@given(WITHOUT_A_DRIVE, SEEDS)
def test_extra_plucks_never_lower_the_worth_and_cost_the_notes_no_more_than_they_are_worth(
    comb: str, seed: int
) -> None:
    score, asked = tune_of(seed), asked_of(seed, EXTRA, octave_moves="none")

    with_extra, without = arranged(score, comb, asked), arranged(score, comb, plainly(asked))

    assert with_extra.worth.kept >= without.worth.kept
    notes_kept = sum(int(with_extra.note_weight[note]) for pluck in with_extra.notes for note in pluck)
    assert with_extra.worth.kept <= notes_kept + extras_worth(with_extra, asked)
    assert notes_kept >= without.worth.kept - extras_worth(with_extra, asked)
    assert notes_kept <= without.worth.kept


@OFTEN
@given(ON_TRACKS_ALONE, SEEDS)
def test_no_note_is_left_out_for_one_or_two_extra_plucks(comb: str, seed: int) -> None:
    score = tune_of(seed)
    movement, spacing = MOVEMENTS[comb], SPACINGS[comb]
    asked = asked_of(seed, EXTRA, octave_moves="none", largest_nudge_ms=0)

    arrangement = arranged(score, comb, asked)

    plucks, extra = plucks_of(arrangement), real_and_extra(arrangement)[1]
    for one in arrangement.left_out:
        for track in tracks_of(movement, int(score.pitch[one.note])) if one.reason != "past-the-turn" else []:
            with_it = (float(score.onset_s[one.note]), track)
            for gone in chain([()], combinations(extra, 1), combinations(extra, 2)):
                others = [pluck for place, pluck in enumerate(plucks) if place not in gone]
                assert broken_rules([*others, with_it], movement, loosened(spacing, -1e-9)) != []


@OFTEN
@given(A_COMB, SEEDS)
def test_ornaments_over_doubled_teeth_never_keep_more(comb: str, seed: int) -> None:
    score, asked = tune_of(seed), asked_of(seed, {"ornaments": ["over-doubled-teeth"]})

    over, without = arranged(score, comb, asked), arranged(score, comb, plainly(asked))

    assert over.worth.kept <= without.worth.kept


@OFTEN
@given(A_COMB, SEEDS)
def test_ringing_never_adds_to_the_worth(comb: str, seed: int) -> None:
    score, asked = tune_of(seed), asked_of(seed, COSTS)

    costly, without = arranged(score, comb, asked), arranged(score, comb, plainly(asked))

    assert costly.worth.kept <= without.worth.kept


def with_ringing_teeth(arrangement: Arrangement, cost: float) -> int:
    """What its notes weigh, less the cost where the last pluck of a tooth was asked for less than 2 s before."""
    kept, sounded_s = 0, dict[int, float]()
    by_moment = sorted(
        zip(arrangement.asked_s.tolist(), arrangement.track_index.tolist(), arrangement.notes, strict=True)
    )
    for asked_s, track, notes in by_moment:
        weight = sum(int(arrangement.note_weight[note]) for note in notes)
        rings = asked_s - sounded_s.get(track, -math.inf) < 2.0 - ROUNDING
        kept += weight - min(weight * round(1000 * cost) // 1000, weight - 1) * rings
        sounded_s[track] = asked_s
    return kept


@OFTEN
@given(A_COMB, SEEDS)
def test_ringing_teeth_cost_their_share_and_no_more_than_the_choice_made_without(comb: str, seed: int) -> None:
    choices = {"ringing_tooth_cost": COSTS["ringing_tooth_cost"]}
    score, asked = tune_of(seed), asked_of(seed, choices, octave_moves="none")
    cost = asked.writing.ringing_tooth_cost

    costly, without = arranged(score, comb, asked), arranged(score, comb, plainly(asked))

    assert costly.worth.kept == with_ringing_teeth(costly, cost) >= with_ringing_teeth(without, cost)


@settings(OFTEN, max_examples=tried(200))
@given(ON_TRACKS_ALONE, SEEDS)
def test_where_no_other_track_is_in_the_way_chords_from_the_bass_keep_as_much(comb: str, seed: int) -> None:
    score = tune_of(seed)
    asked = asked_of(seed, {"chords": ["bass-first"]}, largest_nudge_ms=50, largest_melody_nudge_ms=30)

    spread, together = arranged(score, comb, asked), arranged(score, comb, plainly(asked))

    assert spread.worth == together.worth
    assert sorted(spread.notes) == sorted(together.notes)
