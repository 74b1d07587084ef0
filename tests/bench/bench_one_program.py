"""Side by side, in turn: the stage's solver and one integer program, on a piece of 1,000 notes and 67 tracks."""

import sys
import time
from collections.abc import Callable, Iterator, Sequence
from itertools import product
from pathlib import Path
from statistics import median

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.arrange.budget import Budget
from layout.arrange.posing import most_kept, pose
from layout.arrange.searching import Found, Way, search
from layout.arrange.solving import Solved, Solving
from layout.documents import shipped_movement
from tests.bench.opponents.corpus import CUTTER, score_of, settings_with
from tests.bench.opponents.one_program import Conflicts, solve_all_as_one, solve_as_one
from tests.bench.opponents.table import say, say_table
from tests.outside.posed import Posed, posed, spacing_on

PIECES = ("joplin rag", "mozart quartet finale", "wieck polonaise 3")  # each longer than that:
NOTES = 1_000  # a passage of so many, less those that sound with the next
RUNS = 5  # of either, in turn
RANGE = 12  # semitones either way, as the settings have it by default


def ours(tune: Posed, semitones: int) -> int:
    solved = Solving(tune.problem(semitones)).together(Budget())
    if not isinstance(solved, Solved) or solved.worth != solved.bound:
        raise RuntimeError("not proved")
    return solved.worth


def theirs(tune: Posed, semitones: int, conflicts: Conflicts) -> int:
    answer = solve_as_one(tune.problem(semitones), conflicts)
    if not answer.proved:
        raise RuntimeError("not proved")
    return answer.worth


def ours_over_all(tune: Posed) -> int:
    ways = [Way(semitones=semitones, speed_factor=1.0) for semitones in range(-RANGE, RANGE + 1)]
    bounds = {way: most_kept(tune.asked.wanted, way.semitones, tune.rules) for way in ways}
    found = search(bounds, lambda way: [pose(tune.asked.wanted, way.semitones, tune.rules)], Budget())
    if not isinstance(found, Found) or found.kept != found.bound:
        raise RuntimeError("not proved")
    return found.kept


def timed(work: Callable[[], int]) -> tuple[float, int]:
    start_s = time.perf_counter()
    answer = work()
    return time.perf_counter() - start_s, answer


def row(title: str, ways: Sequence[Callable[[], int]], runs: int) -> list[str]:
    """Medians of runs in turn; the answers must be the same. Ours is the first way."""
    took_s: list[list[float]] = [[] for _ in ways]
    worths = set()
    for _ in range(runs):
        for way, times_s in zip(ways, took_s, strict=True):
            one_s, worth = timed(way)
            times_s.append(one_s)
            worths.add(worth)
    if len(worths) > 1:
        raise RuntimeError(f"{title}: not one answer but {sorted(worths)}")
    mine_s, *others_s = map(median, took_s)
    cells = [cell for other_s in others_s for cell in (f"{other_s:.3f} s", f"{other_s / mine_s:.1f}")]
    return [title, str(worths.pop()), f"{mine_s:.3f} s", *cells]


def over_all(tune: Posed, conflicts: Conflicts) -> int:
    return max(theirs(tune, semitones, conflicts) for semitones in range(-RANGE, RANGE + 1))


def choosing_too(tune: Posed, conflicts: Conflicts) -> int:
    answer = solve_all_as_one([tune.problem(semitones) for semitones in range(-RANGE, RANGE + 1)], conflicts)
    if not answer.proved:
        raise RuntimeError("not proved")
    return answer.worth


def best_semitones(tune: Posed) -> int:
    worths = {semitones: ours(tune, semitones) for semitones in range(-RANGE, RANGE + 1)}
    return max(worths, key=lambda semitones: (worths[semitones], -abs(semitones), -semitones))


def rows_of(name: str, tune: Posed, octave_moves: str) -> Iterator[list[str]]:
    best = best_semitones(tune)
    answer = solve_as_one(tune.problem(best), "cliques")
    notes, plucks = len(tune.asked.notes), len(tune.asked.wanted.pitch)
    say(f"{name}, {octave_moves}: {notes} notes, {plucks} plucks, {answer.columns} columns, {answer.rows} rows")
    at_best: list[Callable[[], int]] = [
        lambda: ours(tune, best),
        lambda: theirs(tune, best, "cliques"),
        lambda: theirs(tune, best, "pairs"),
    ]
    yield row(f"{name}, {octave_moves}, at {best:+d}", at_best, RUNS)
    if octave_moves == "none":
        at_all: list[Callable[[], int]] = [
            lambda: ours_over_all(tune),
            lambda: over_all(tune, "cliques"),
            lambda: over_all(tune, "pairs"),
        ]
        yield row(f"{name}, {octave_moves}, best of 25, one by one", at_all, RUNS)
        as_one: list[Callable[[], int]] = [
            lambda: ours_over_all(tune),
            lambda: choosing_too(tune, "cliques"),
            lambda: choosing_too(tune, "pairs"),
        ]
        yield row(f"{name}, {octave_moves}, best of 25, as one", as_one, 1)


def main() -> None:
    """Print the sizes, then the table."""
    movement = shipped_movement("mossbrook-67")
    spacing = spacing_on(movement, CUTTER)
    rows: list[list[str]] = []
    for name, octave_moves in product(PIECES, ("none", "outer")):
        passage = {"to_s": float(score_of(name).onset_s[NOTES])}
        settings = settings_with(passage=passage, octave_moves=octave_moves)
        rows += rows_of(name, posed(score_of(name), movement, settings, spacing), octave_moves)
    say()
    say_table(["piece, octave moves", "worth of all", "discwright", "clique rows", "ratio", "pair rows", "ratio"], rows)


if __name__ == "__main__":
    main()
