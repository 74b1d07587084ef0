"""The best choice of plucks that hang together by more than time on one track: an integer program.

Chains of nudges longer than the program's rows know are looked for in every solution, and
forbidden where they are found, until a solution keeps them all. So are loads: the program reckons in
floating point, and teeth a million times as stiff as others are lost in its rounding.
"""

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from layout.arrange.budget import LOOKS_TO_BEGIN, LOOKS_TO_WRITE, Budget
from layout.arrange.columns import Columns
from layout.arrange.integer_program import Answer, IntegerProgram, Row
from layout.arrange.moments_kept import overruns
from layout.arrange.problem import Problem
from layout.mechanics.arrays import IntArray

# Entries of the rows of one program. Real music makes programs of up to some ten thousand; one of several times
# MOST_ENTRIES keeps HiGHS busy for minutes before its first node, where no budget of nodes can stop it.
MOST_ENTRIES = 150_000
MOST_ENTRIES_FOR_RULINGS = 300_000  # more is allowed where rulings would be left undecided, but not minutes
MOST_LIFTED = 2_000_000  # spots lifted at moments that are looked at for a program's rows; some tenths of a second


@dataclass(frozen=True, slots=True, kw_only=True)
class Coupled:
    """What was found for a group of plucks.

    Attributes:
        spots: The spots chosen, by pluck; None where no choice was found that keeps every rule.
        worth: What they are worth; 0 for none.
        bound: No choice is worth more; None where no choice exists at all.
    """

    spots: tuple[int, ...] | None
    worth: int
    bound: int | None


def best_coupled(
    problem: Problem, plucks: IntArray, budget: Budget, *, most_entries: int | None = MOST_ENTRIES
) -> Coupled:
    """The best choice for these plucks, by every rule among them.

    Args:
        problem: The rules.
        plucks: The group, rising.
        budget: What is left; what this takes is taken off.
        most_entries: A program of more is not begun, and nothing found; None for one of any size.
    """
    columns = Columns(problem, plucks)
    budget.spend_looks(LOOKS_TO_BEGIN + LOOKS_TO_WRITE * columns.lifted)
    rows = _rows(columns, most_entries)
    if rows is None:
        return Coupled(spots=None, worth=0, bound=columns.most)
    budget.spend_looks(LOOKS_TO_WRITE * sum(len(row.columns) for row in rows))
    program = IntegerProgram(columns.worth, rows)
    bound: int | None = None
    while True:
        answer = program.solve(most_nodes=budget.nodes_left, most_s=budget.seconds_left())
        budget.spend(answer.nodes)
        budget.spend_looks(LOOKS_TO_BEGIN)
        if answer.bound is None and answer.finished:
            return Coupled(spots=None, worth=0, bound=None)
        bound = _lower(bound, answer)
        if answer.ones is None:
            return Coupled(spots=None, worth=0, bound=columns.most if bound is None else bound)
        spots = columns.spots_of(answer.ones)
        cuts = [columns.cut(one) for one in overruns(problem, spots)] + columns.load_cuts(spots)
        if not cuts:
            return Coupled(spots=spots, worth=worth_of(problem, spots), bound=bound)
        if budget.spent:
            return Coupled(spots=None, worth=0, bound=columns.most if bound is None else bound)
        program.add(cuts)


def _rows(columns: Columns, most_entries: int | None) -> list[Row] | None:
    """Every row known from the start; None, as soon as that is seen, where they have too many entries."""
    if most_entries is None:
        return list(columns.rows())
    if columns.lifted > MOST_LIFTED:
        return None
    rows, entries = [], 0
    for row in columns.rows():
        rows.append(row)
        entries += len(row.columns)
        if entries > most_entries:
            return None
    return rows


def _lower(bound: int | None, answer: Answer) -> int | None:
    if bound is None or answer.bound is None:
        return answer.bound if bound is None else bound
    return min(bound, answer.bound)


def worth_of(problem: Problem, spots: Sequence[int]) -> int:
    """The worth of a choice, costs of ringing teeth taken off."""
    worth = int(problem.worth[list(spots)].sum())
    costly = [spot for spot in spots if problem.ringing_cost[spot]]
    if not costly:
        return worth
    on_track: dict[int, list[int]] = defaultdict(list)
    for spot in spots:
        on_track[int(problem.track[spot])].append(spot)
    asked_ns = problem.unspread_ns
    for track, there in on_track.items():
        there.sort()  # spots stand by pluck
        for before, spot in pairwise(there):
            if asked_ns[spot] - asked_ns[before] < problem.ringing_ns[track]:
                worth -= int(problem.ringing_cost[spot])
    return worth
