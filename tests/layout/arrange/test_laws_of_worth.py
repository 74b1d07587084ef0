"""Laws of the best worth: what more teeth, longer repeats, larger nudges and rulings may and may not change."""

import json
from dataclasses import replace
from random import Random
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange import Arrangement, arrange
from layout.arrange.budget import Budget
from layout.arrange.problem import Problem
from layout.arrange.solving import Impossible, Solving
from layout.documents import Movement, Settings
from layout.documents.settings import read_settings
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import turning_of
from layout.read import Score
from tests.layout.arrange.random_problems import problem_of, problems
from tests.layout.arrange.small_comb import broken_rules, comb_with, left_out, plucks_of, score_of, spacing_for
from tests.layout.arrange.test_laws_of_arranging import loosened
from tests.layout.arrange.test_stage_against_brute_force import (
    COMBS,
    MOVEMENTS,
    SPACINGS,
    random_settings,
    random_tune,
)
from tests.thorough import tried

SEEDS = st.integers(0, 10**9)
WITH_LOAD = ("weak drive", "weak drive, close tracks")
A_COMB = st.sampled_from(sorted(COMBS))
OFTEN = settings(max_examples=tried(60), deadline=None, derandomize=True)


def tune_of(seed: int) -> tuple[Score, Settings]:
    random = Random(seed)
    return score_of(random_tune(random)), random_settings(random)


def worth_on(movement: Movement, score: Score, asked: Settings, spacing: Spacing | None = None) -> int:
    """What is kept, proved."""
    arrangement = arrange(score, movement, asked, spacing or spacing_for(movement, min_web_mm=1.0))
    assert arrangement.worth.proved
    return arrangement.worth.kept


def changed(asked: Settings, **fields: Any) -> Settings:
    return read_settings(json.dumps({**asked.model_dump(mode="json"), **fields}))


def best_of(problem: Problem) -> int | None:
    solved = Solving(problem).together(Budget())
    if isinstance(solved, Impossible):
        return None
    assert solved.worth == solved.bound
    return solved.worth


# On an outermost track it takes no web from the others; and a tooth loads the disc only where it is plucked.
@OFTEN
@given(A_COMB, SEEDS, st.sampled_from(["C4", "D4", "E4", "E5", "A4"]))
def test_a_tooth_more_never_lowers_the_worth(comb: str, seed: int, pitch: str) -> None:
    score, asked = tune_of(seed)
    document = COMBS[comb]
    radii = [track.radius_mm for track in MOVEMENTS[comb].tracks] + [108.0]
    more = comb_with(
        {
            **document,
            "tracks": [{"track": place, "radius_mm": radius} for place, radius in enumerate(radii, start=1)],
            "teeth": [
                *document["teeth"],
                {"tooth": 7, "track": 7, "pitch": pitch, "stiffness_n_per_mm": 0.5, "lift_mm": 0.4},
            ],
        }
    )

    assert worth_on(more, score, asked) >= worth_on(MOVEMENTS[comb], score, asked)


@OFTEN
@given(SEEDS, st.sampled_from(["plain", "nearly no rest", "weak drive"]), st.floats(1.0, 1.5))
def test_a_longer_repeat_never_raises_the_worth(seed: int, comb: str, factor: float) -> None:
    score, asked = tune_of(seed)
    spacing = SPACINGS[comb]
    longer = replace(spacing, wheel_rad=spacing.wheel_rad * factor)

    assert worth_on(MOVEMENTS[comb], score, asked, longer) <= worth_on(MOVEMENTS[comb], score, asked, spacing)


@OFTEN
@given(SEEDS, st.sampled_from(["plain", "nearly no rest", "close tracks"]), st.integers(0, 50), st.integers(0, 50))
def test_a_larger_nudge_never_lowers_the_worth(seed: int, comb: str, one_ms: int, two_ms: int) -> None:
    score, asked = tune_of(seed)
    small, large = (changed(asked, largest_nudge_ms=ms, largest_melody_nudge_ms=ms) for ms in sorted((one_ms, two_ms)))

    assert worth_on(MOVEMENTS[comb], score, small) <= worth_on(MOVEMENTS[comb], score, large)


@settings(max_examples=tried(100), deadline=None, derandomize=True)
@given(problems(), st.integers(2, 50))
def test_scaling_all_weights_changes_no_choice(problem: Problem, factor: int) -> None:
    scaled = replace(problem, worth=problem.worth * factor, ringing_cost=problem.ringing_cost * factor)

    one, two = Solving(problem).together(Budget()), Solving(scaled).together(Budget())

    if isinstance(one, Impossible) or isinstance(two, Impossible):
        assert type(one) is type(two)
        return
    assert two.worth == one.worth * factor
    assert two.spots == one.spots


@pytest.mark.parametrize("change", ["longer repeats", "no webs", "wider windows", "no drive"])
def test_what_lets_less_be_chosen_never_keeps_more(change: str) -> None:
    for seed in range(150):
        problem = problem_of(seed)
        if change == "wider windows" and problem.drive is not None:
            continue  # wider windows may let chords be spread that were not: another law, below
        freer = {
            "longer repeats": replace(problem, least_ns=problem.least_ns // 2),
            "no webs": replace(problem, besides=()),
            "wider windows": replace(
                problem,
                earliest_ns=np.maximum(problem.earliest_ns - 5_000_000, 0),
                latest_ns=problem.latest_ns + 5_000_000,
            ),
            "no drive": replace(problem, drive=None),
        }[change]
        one, two = best_of(problem), best_of(freer)

        assert one is None or (two is not None and one <= two)


@OFTEN
@given(A_COMB, SEEDS)
def test_the_best_given_as_rulings_is_the_best_again(comb: str, seed: int) -> None:
    score, asked = tune_of(seed)
    movement, spacing = MOVEMENTS[comb], SPACINGS[comb]
    free = arrange(score, movement, asked, spacing)
    rulings = [
        {"note": notes[0], "do": "place", "track": track + 1}
        for notes, track in zip(free.notes, free.track_index.tolist(), strict=True)
    ]
    rulings += [{"note": note, "do": "leave-out"} for note in left_out(free)]
    same = changed(asked, rulings=rulings)

    ruled = arrange(score, movement, same, spacing)

    assert set(left_out(ruled).values()) <= {"ruled-out"}
    assert set(ruled.notes) == set(free.notes)
    assert {*zip(ruled.notes, ruled.track_index.tolist(), strict=True)} == {
        *zip(free.notes, free.track_index.tolist(), strict=True)
    }
    assert ruled.worth.proved
    # Voices, and so weights, are those of the notes asked for: judged by what is asked now.
    fit = round(asked.octave_fit * 1000)
    assert ruled.worth.kept == sum(
        int(ruled.note_weight[list(notes)].sum()) * (1000 if octave == 0 else fit) // 1000
        for notes, octave in zip(ruled.notes, ruled.octave_semitones.tolist(), strict=True)
    )


@OFTEN
@given(A_COMB, SEEDS)
def test_the_same_asked_again_gives_the_same(comb: str, seed: int) -> None:
    score, asked = tune_of(seed)

    one, two = (arrange(score, MOVEMENTS[comb], asked, SPACINGS[comb]) for _ in range(2))

    assert plucks_of(one) == plucks_of(two)
    assert (one.notes, one.left_out, one.worth, one.tried, one.load) == (
        two.notes,
        two.left_out,
        two.worth,
        two.tried,
        two.load,
    )


def nudge_allowed_s(arrangement: Arrangement, asked: Settings, pluck: int) -> float:
    melody = bool(arrangement.melody[list(arrangement.notes[pluck])].any())
    melody_ms = min(asked.largest_nudge_ms, asked.largest_melody_nudge_ms)
    return (melody_ms if melody else asked.largest_nudge_ms) / 1000


@settings(max_examples=tried(150), deadline=None, derandomize=True)
@given(A_COMB, SEEDS)
def test_planned_moments_keep_every_rule_on_the_disc(comb: str, seed: int) -> None:
    score, asked = tune_of(seed)
    movement, spacing = MOVEMENTS[comb], SPACINGS[comb]

    arrangement = arrange(score, movement, asked, spacing)

    planned_s, asked_s = arrangement.planned_s, arrangement.asked_s
    for pluck in range(len(planned_s)):
        assert abs(planned_s[pluck] - asked_s[pluck]) <= nudge_allowed_s(arrangement, asked, pluck) + 2e-9
    assert (planned_s >= 0).all()
    assert (planned_s <= turning_of(movement).free_turn_s + 2e-9).all()
    for track in set(arrangement.track_index.tolist()):
        there = arrangement.track_index == track
        assert (np.diff(asked_s[there]) > 0).all()  # plucks stand in the order of planned_s
    # From radii and arcs, by one pair after the other: repeats, webs and the end of the turn.
    assert broken_rules(plucks_of(arrangement), movement, loosened(spacing)) == []
    if comb in WITH_LOAD and asked.load_limit == "keep" and arrangement.load is not None:
        assert arrangement.load.limit_nmm is not None
        assert arrangement.load.peak_nmm <= arrangement.load.limit_nmm + 0.01


@OFTEN
@given(A_COMB, SEEDS, st.floats(0.1, 2.0))
def test_a_passage_that_ends_sooner_moves_no_note_out_of_its_place_in_time(comb: str, seed: int, to_s: float) -> None:
    score, asked = tune_of(seed)
    short = changed(asked, passage={"from_s": 0, "to_s": to_s})

    arrangement = arrange(score, MOVEMENTS[comb], short, SPACINGS[comb])

    for notes, asked_s in zip(arrangement.notes, arrangement.asked_s.tolist(), strict=True):
        assert all(score.onset_s[note] == asked_s < to_s for note in notes)
    gone = {note for note, reason in left_out(arrangement).items() if reason == "outside-passage"}
    assert gone == set(np.flatnonzero(score.onset_s >= to_s).tolist())
