"""A second formulation, solved by another solver, finds the same optimum on real pieces: the whole piece at once."""

import json
from collections.abc import Iterator
from functools import cache

import pytest

from layout.arrange import Arrangement, arrange
from layout.arrange.problem import Problem
from layout.documents import Cutter, Movement, Settings, read_settings, shipped_movement
from layout.read import Score, read_score
from tests.layout.examples import LASER, PRESS, cutter_with, movement_with
from tests.outside.asking_second import SecondOpinion, second_opinion
from tests.outside.pieces import public_domain_piece
from tests.outside.posed import posed, spacing_on
from tests.thorough import THOROUGH

# Every piece on a disc as a whole, however fast.
FIT = {"mode": "fit", "least": 0.25, "most": 8}

# Spread over movements and kinds of music; those that CP-SAT proves within a few seconds.
PLAIN = [
    ("bach chorale 66.6", "tarnlight-17"),
    ("bach chorale 269", "fernhollow-31"),
    ("bach prelude and fugue 846", "tarnlight-17"),
    ("bach prelude and fugue 846", "fernhollow-31"),
    ("corelli grave", "mossbrook-67"),
    ("cpe bach 186", "fernhollow-31"),
    ("mozart sonata exposition", "mossbrook-67"),
    ("schumann song", "tarnlight-17"),
    ("foster song", "mossbrook-67"),
    ("verdi canzone", "tarnlight-17"),
    ("verdi canzone", "fernhollow-31"),
    ("liliuokalani song", "mossbrook-67"),
    ("acacia reel", "tarnlight-17"),
    ("acacia reel", "mossbrook-67"),
    ("acrobats hornpipe", "fernhollow-31"),
    ("bach chorale 1.6", "tarnlight-17"),
    ("bach chorale 5.7", "fernhollow-31"),
    ("bach chorale 17.7", "mossbrook-67"),
    ("bach chorale 40.8", "tarnlight-17"),
    ("bach chorale 140.7", "fernhollow-31"),
    ("swallow tail jig", "tarnlight-17"),
    ("belle of the ball hornpipe", "mossbrook-67"),
    ("sleepy maggie reel", "tarnlight-17"),
    ("highland regiment strathspey", "fernhollow-31"),
    ("forest flower fling", "mossbrook-67"),
    ("liverpool hornpipe", "tarnlight-17"),
    ("amateur hornpipe", "fernhollow-31"),
    ("schubert lindenbaum", "tarnlight-17"),
    ("joplin rag", "tarnlight-17"),
    ("handel sarabande", "tarnlight-17"),
    ("haydn presto", "tarnlight-17"),
    ("haydn finale", "tarnlight-17"),
    ("mozart quartet finale", "tarnlight-17"),
    ("wieck polonaise 1", "tarnlight-17"),
    ("wieck polonaise 4", "tarnlight-17"),
]
TRIED = PLAIN if THOROUGH else PLAIN[::2]
MOVED = [
    ("bach chorale 66.6", "tarnlight-17", "all"),
    ("schumann song", "fernhollow-31", "all"),
    ("acrobats hornpipe", "tarnlight-17", "outer"),
    ("corelli grave", "fernhollow-31", "outer"),
]
# Newton millimetres well below the 500 that the movement states, so that chords are spread or thinned.
LIGHT_DRIVE = [
    ("bach chorale 66.6", 80, "none"),
    ("bach chorale 5.7", 80, "outer"),
    ("bach chorale 5.7", 100, "none"),
    ("schumann song", 100, "none"),
    ("corelli grave", 80, "outer"),
    ("corelli grave", 120, "none"),
    ("forest flower fling", 60, "none"),
]
# Millimetres, so wide that many pairs of tracks come too near to each other.
WIDE_WEBS = [
    ("bach chorale 66.6", "tarnlight-17", 3.0),
    ("schumann song", "mossbrook-67", 2.0),
    ("acacia reel", "tarnlight-17", 2.0),
    ("corelli grave", "fernhollow-31", 2.0),
]

RINGING_COST = 0.3  # of a pluck's worth, where its tooth still rings
RINGING = [
    ("bach chorale 5.7", "mossbrook-67"),
    ("acrobats hornpipe", "fernhollow-31"),
    ("schumann song", "tarnlight-17"),
]


@pytest.fixture(scope="module")
def second() -> Iterator[SecondOpinion]:
    with second_opinion() as process:
        yield process


@cache
def score_of(name: str) -> Score:
    return read_score(public_domain_piece(name), sequence=1)


def settings_with(octave_moves: str, semitones: int | None = None) -> Settings:
    transpose = {} if semitones is None else {"mode": "fixed", "semitones": semitones}
    return read_settings(json.dumps({"speed": FIT, "octave_moves": octave_moves, "transpose": transpose}))


def arranged(name: str, movement: Movement, cutter: Cutter, settings: Settings) -> Arrangement:
    return arrange(score_of(name), movement, settings, spacing_on(movement, cutter))


def problem_of(name: str, movement: Movement, cutter: Cutter, settings: Settings) -> Problem:
    assert settings.transpose.semitones is not None
    return posed(score_of(name), movement, settings, spacing_on(movement, cutter)).problem(settings.transpose.semitones)


@pytest.mark.parametrize(
    ("name", "movement_id", "octave_moves"), [(name, movement_id, "none") for name, movement_id in TRIED] + MOVED
)
def test_on_real_pieces_the_best_choice_is_worth_what_the_second_formulation_says(
    name: str, movement_id: str, octave_moves: str, second: SecondOpinion
) -> None:
    movement = shipped_movement(movement_id)

    best = arranged(name, movement, LASER, settings_with(octave_moves))

    problem = problem_of(name, movement, LASER, settings_with(octave_moves, best.transposed_semitones))
    assert best.worth.proved
    assert second.of(problem) == (best.worth.kept, best.worth.kept)


@pytest.mark.parametrize(("name", "limit_nmm", "octave_moves"), LIGHT_DRIVE)
def test_where_the_drive_is_too_weak_the_second_formulation_agrees(
    name: str, limit_nmm: float, octave_moves: str, second: SecondOpinion
) -> None:
    strong = shipped_movement("mossbrook-67")
    weak = movement_with({"drive/torque_limit_nmm": limit_nmm}, strong.model_dump(mode="json"))
    free = arranged(name, strong, LASER, settings_with(octave_moves))
    settings = settings_with(octave_moves, free.transposed_semitones)

    worth = arranged(name, weak, LASER, settings).worth

    # The case is one: what the strong drive plays, the weak one does not carry.
    assert free.load is not None
    assert free.load.peak_nmm > limit_nmm
    assert worth.proved
    assert second.of(problem_of(name, weak, LASER, settings)) == (worth.kept, worth.kept)


@pytest.mark.parametrize(("name", "movement_id", "web_mm"), WIDE_WEBS)
def test_where_webs_forbid_much_the_second_formulation_agrees(
    name: str, movement_id: str, web_mm: float, second: SecondOpinion
) -> None:
    movement, wide = shipped_movement(movement_id), cutter_with({"min_web_mm": web_mm}, PRESS)
    free = arranged(name, movement, PRESS, settings_with("none"))
    settings = settings_with("none", free.transposed_semitones)

    worth = arranged(name, movement, wide, settings).worth

    problem = problem_of(name, movement, wide, settings)
    # The case is one: webs between tracks cost worth.
    assert problem.besides
    assert worth.kept < free.worth.kept
    assert worth.proved
    assert second.of(problem) == (worth.kept, worth.kept)


@pytest.mark.parametrize(("name", "movement_id"), RINGING)
def test_where_ringing_teeth_cost_worth_the_second_formulation_agrees(
    name: str, movement_id: str, second: SecondOpinion
) -> None:
    movement = shipped_movement(movement_id)
    free = arranged(name, movement, LASER, settings_with("none"))
    settings = settings_with("none", free.transposed_semitones)
    writing = settings.writing.model_copy(update={"ringing_tooth_cost": RINGING_COST})
    costly = settings.model_copy(update={"writing": writing})

    worth = arranged(name, movement, LASER, costly).worth

    assert worth.kept < free.worth.kept
    assert worth.proved
    assert second.of(problem_of(name, movement, LASER, costly)) == (worth.kept, worth.kept)
