"""Rulings of which it is not found out, within what may be spent, whether they can be followed."""

from layout.arrange import budget
from layout.arrange.budget import Budget
from layout.arrange.refusals import undecided
from layout.arrange.searching import NoWay, Way, search
from layout.arrange.solving import Impossible, Solving
from tests.layout.arrange.by_hand import Asked, problem_with

CLASHING = problem_with([Asked(at_ms=1000, must_sound=True), Asked(at_ms=1030, must_sound=True)])


def nothing_left() -> Budget:
    """A budget that is spent, with nothing to be spent on rulings either."""
    spent = Budget(states=0)
    spent.for_rulings.spend_looks(budget.MOST_LOOKS_FOR_RULINGS)
    return spent


def test_what_is_not_found_out_is_not_called_impossible() -> None:
    known, not_known = Solving(CLASHING).together(Budget()), Solving(CLASHING).together(nothing_left())

    assert isinstance(known, Impossible)
    assert isinstance(not_known, Impossible)
    assert (known.is_known, not_known.is_known) == (True, False)


def test_ways_that_were_not_come_to_are_counted_as_not_known() -> None:
    ways = {Way(semitones=semitones, speed_factor=1.0): 2000 for semitones in range(3)}

    found = search(ways, lambda _: [CLASHING], nothing_left())

    assert isinstance(found, NoWay)
    assert (found.shown_by, found.not_known) == ({}, 3)


def test_the_error_tells_what_is_known_and_what_to_do() -> None:
    [problem] = undecided(3000, 12, 85).problems

    assert problem.pointer == "/rulings"
    assert problem.message == (
        "whether all 3000 notes that must sound fit on the disc was not found out within the work that a search may "
        "take (85 of 97 transpositions and speeds searched were found impossible, the others are not known); make "
        "fewer notes must-sound, or fix the transposition and the speed"
    )
