"""What is kept of the same pieces by the same weights: the best, the first chooser, and a greedy pass."""

import sys
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.arrange import arrange
from layout.arrange.coupled import worth_of
from layout.arrange.problem import Problem
from layout.documents import Movement, shipped_movement
from tests.bench.opponents.corpus import CUTTER, MOVEMENT_IDS, score_of, settings_with
from tests.bench.opponents.first_chooser import choose, choose_greedily
from tests.bench.opponents.table import say, say_table
from tests.outside.pieces import ALL_PIECE_NAMES
from tests.outside.posed import posed, spacing_on

SEMITONES = range(-12, 13)
Choose = Callable[[Problem], tuple[int, ...]]


def kept_by(way: Choose, problems: dict[int, Problem]) -> dict[int, int]:
    return {semitones: worth_of(problem, way(problem)) for semitones, problem in problems.items()}


def kept_of(name: str, movement: Movement) -> tuple[int, ...]:
    """The best; the first chooser and the greedy pass at the same transposition; both at their own best."""
    settings, spacing = settings_with(load_limit="ignore"), spacing_on(movement, CUTTER)
    best = arrange(score_of(name), movement, settings, spacing)
    tune = posed(score_of(name), movement, settings, spacing)
    problems = {semitones: tune.problem(semitones) for semitones in SEMITONES}
    first, greedy = kept_by(choose, problems), kept_by(choose_greedily, problems)
    there = best.transposed_semitones
    if max(*first.values(), *greedy.values()) > best.worth.bound:
        raise RuntimeError(f"{name} on {movement.id}: a bound is not true")
    return best.worth.kept, first[there], greedy[there], max(first.values()), max(greedy.values())


def cells(worths: tuple[int, ...]) -> list[str]:
    best, *others = worths
    return [f"{best}", *(f"{100 * other / best:.2f} %" for other in others)]


def main() -> None:
    """Print a table for each movement, with its total, and one for all."""
    heads = ["piece", "best worth", "first, same key", "greedy, same key", "first, own best", "greedy, own best"]
    say("the others in parts of the best; load limits ignored and no nudges for them, since they know of neither")
    totals = []
    for movement_id in MOVEMENT_IDS:
        movement = shipped_movement(movement_id)
        worths = {name: kept_of(name, movement) for name in ALL_PIECE_NAMES}
        total = tuple(map(sum, zip(*worths.values(), strict=True)))
        totals.append(total)
        say(f"\n{movement_id}")
        rows = [[name, *cells(worth)] for name, worth in worths.items()]
        say_table(heads, [*rows, ["all pieces", *cells(total)]])
    say_table(heads, [["all movements", *cells(tuple(map(sum, zip(*totals, strict=True))))]])


if __name__ == "__main__":
    main()
