"""The search over transpositions and speeds: the most promising first, the hopeless left half way.

Every candidate has a bound that is cheap at first (all that the comb has), then lower (each part of
the tune by itself), then met (all together). The candidate with the highest bound goes one step on,
until the best found beats every bound left. After that the search goes on until the next best
transpositions are known too, as far as the report tells them.
"""

import heapq
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from layout.arrange.arrangement import Stopped, Transposed, Tried
from layout.arrange.budget import LOOKS_TO_BEGIN, LOOKS_TO_POSE, Budget
from layout.arrange.problem import Problem
from layout.arrange.solving import Impossible, Solved, Solving

MOST_TOLD = 5  # transpositions the report tells
NODES_TO_TELL = 300  # nodes; once the best is proved and so many are spent, the others are told by their bounds


@dataclass(frozen=True, slots=True, kw_only=True)
class Way:
    """A transposition and a speed."""

    semitones: int
    speed_factor: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """What a search found.

    Attributes:
        way: The best transposition and speed.
        problems: The problems posed for it, one for each disc.
        solved: Their solutions.
        kept: What they are worth together.
        bound: Nothing that was searched is worth more.
        tried: The best transpositions, each at its best speed, at most MOST_TOLD, best first.
        transpositions: All of them, the lowest first, but those known to be impossible.
        stopped: What ended the search too early, if anything did.
    """

    way: Way
    problems: tuple[Problem, ...]
    solved: tuple[Solved, ...]
    kept: int
    bound: int
    tried: tuple[Tried, ...]
    transpositions: tuple[Transposed, ...]
    stopped: Stopped | None


@dataclass(frozen=True, slots=True, kw_only=True)
class NoWay:
    """No way searched was found possible.

    Attributes:
        shown_by: Of each way known to be impossible what shows it: the disc, from 0, its problem and the plucks.
        not_known: How many ways may be possible: it was not found out, or they were not come to.
    """

    shown_by: dict[Way, tuple[int, Problem, Impossible]]
    not_known: int = 0


class _Candidate:
    """One way, as far as it has been looked at. Its problems are posed when it is first stepped.

    Attributes:
        way: The way.
        problems: As they were solved: a solving may widen its problem. Empty as `solved` is.
        solved: The solutions of its problems; empty till they are all solved, and again once they are let go.
        impossible: What shows that it cannot be solved; None where it is solved, or not known yet.
    """

    def __init__(self, way: Way, pose: Callable[[Way], Sequence[Problem]], first_bound: int) -> None:
        self.way = way
        self._pose = pose
        self._first_bound = first_bound
        self._solvings: list[Solving] | None = None
        self._kept_and_bound: tuple[int, int] | None = None
        self.problems: tuple[Problem, ...] = ()
        self.solved: tuple[Solved, ...] = ()
        self.impossible: tuple[int, Problem, Impossible] | None = None

    @property
    def is_over(self) -> bool:
        """Whether it is solved, or cannot be."""
        return self.is_solved or self.impossible is not None

    @property
    def is_solved(self) -> bool:
        """Whether it has a solution, let go or not."""
        return self._kept_and_bound is not None

    @property
    def bound(self) -> int:
        """Nothing on this way is worth more."""
        if self._kept_and_bound is not None:
            return self._kept_and_bound[1]
        if self._solvings is None:
            return self._first_bound
        return min(self._first_bound, sum(solving.bound for solving in self._solvings))

    @property
    def kept(self) -> int:
        """What its solution is worth; 0 before there is one."""
        return 0 if self._kept_and_bound is None else self._kept_and_bound[0]

    @property
    def rank(self) -> tuple[int, float, int, int]:
        """The better the greater: by bound, then nearest to as written, then lower."""
        return _rank(self.bound, self.way)

    @property
    def rank_kept(self) -> tuple[int, float, int, int]:
        """The same by what its solution is worth."""
        return _rank(self.kept, self.way)

    def step(self, budget: Budget) -> None:
        """One step on."""
        if self._solvings is None:
            self._solvings = [Solving(problem) for problem in self._pose(self.way)]
            budget.spend_looks(LOOKS_TO_POSE * sum(solving.problem.spot_count for solving in self._solvings))
        for disc, solving in enumerate(self._solvings):
            if not solving.taken_apart:
                solving.some_parts(budget)
                if solving.impossible is not None:
                    self.impossible = (disc, solving.problem, solving.impossible)
                return
        solved = []
        for disc, solving in enumerate(self._solvings):
            one = solving.together(budget)
            if isinstance(one, Impossible):
                self.impossible = (disc, solving.problem, one)
                return
            solved.append(one)
        self.problems, self.solved = tuple(solving.problem for solving in self._solvings), tuple(solved)
        self._solvings = None  # some megabytes for a long tune
        self._kept_and_bound = sum(one.worth for one in solved), sum(one.bound for one in solved)

    def let_go(self) -> None:
        """Forget problems and solutions, some megabytes for a long tune; what they are worth stays known."""
        self.problems, self.solved = (), ()


def _rank(worth: int, way: Way) -> tuple[int, float, int, int]:
    return worth, -abs(way.speed_factor - 1), -abs(way.semitones), -way.semitones


class _Finished:
    """The candidates that are solved. Of them all only the best is still held with its solutions.

    Attributes:
        all: In the order in which they were solved.
        best: The best of them, of equals the one solved first; None of none.
        best_ranks: Of the best transpositions, at most MOST_TOLD, that of the best speed of each; the best first.
    """

    def __init__(self) -> None:
        self.all: list[_Candidate] = []
        self.best: _Candidate | None = None
        self.best_ranks: list[tuple[int, float, int, int]] = []
        self._rank_of: dict[int, tuple[int, float, int, int]] = {}  # of each transposition, at its best speed

    def add(self, candidate: _Candidate) -> None:
        """Add one that is solved."""
        self.all.append(candidate)
        if self.best is None:
            self.best = candidate
        elif candidate.rank_kept > self.best.rank_kept:
            self.best.let_go()
            self.best = candidate
        else:
            candidate.let_go()
        rank, semitones = candidate.rank_kept, candidate.way.semitones
        self._rank_of[semitones] = max(rank, self._rank_of.get(semitones, rank))
        self.best_ranks = sorted(self._rank_of.values(), reverse=True)[:MOST_TOLD]


def search(ways: Mapping[Way, int], pose: Callable[[Way], Sequence[Problem]], budget: Budget) -> Found | NoWay:
    """The way that keeps the most.

    Of equal ones it is the one whose speed is nearest to as written, then the smallest
    transposition, then the lower one. The most promising is solved to its end first, so that
    something is found whatever the rest of the search costs.

    Args:
        ways: What to search, at least one, each with a bound that no solution of it is worth more than.
        pose: The problems of a way, one for each disc.
        budget: What may be spent.
    """
    left = [_Candidate(way, pose, bound) for way, bound in ways.items()]
    heap = [(_reversed(candidate), place) for place, candidate in enumerate(left)]
    heapq.heapify(heap)
    finished = _Finished()
    over = _begun(left, heap, budget, finished)
    while finished.all and heap and not (budget.spent or _enough(finished, left[heap[0][1]], budget)):
        _, place = heapq.heappop(heap)
        candidate = left[place]
        candidate.step(budget)
        if not candidate.is_over:
            heapq.heappush(heap, (_reversed(candidate), place))
            continue
        over.append(candidate)
        if candidate.is_solved:
            finished.add(candidate)
    known = {one.way: one.impossible for one in over if one.impossible is not None and one.impossible[2].is_known}
    if finished.best is not None:
        not_known = [one for one in over if not one.is_solved and one.way not in known]
        return _found(finished.best, finished.all, [left[place] for _, place in heap] + not_known, budget)
    return NoWay(shown_by=known, not_known=len(left) - len(known))


def _begun(
    left: Sequence[_Candidate], heap: list[tuple[tuple[float, ...], int]], budget: Budget, finished: _Finished
) -> list[_Candidate]:
    """The candidates that are solved to their end before the search begins, or found impossible on the way.

    They are the most promising, and the same transposition at the slowest speed: slower leaves more
    room on every track, so hardly any other speed keeps more. Where rulings forbid one after the other, the
    search goes on with what may be spent on rulings once its own is spent.
    """
    over: list[_Candidate] = []
    while heap and not finished.all and not (over and budget.spent and budget.for_rulings.spent):
        _, place = heapq.heappop(heap)
        was_spent, before = budget.spent, budget.looks_spent
        over.append(_to_its_end(left[place], budget, finished))
        if was_spent:
            budget.for_rulings.spend_looks(budget.looks_spent - before + LOOKS_TO_BEGIN)
    if finished.all and heap:
        same = [entry for entry in heap if left[entry[1]].way.semitones == finished.all[0].way.semitones]
        if same:
            slowest = min(same, key=lambda entry: left[entry[1]].way.speed_factor)
            heap.remove(slowest)
            heapq.heapify(heap)
            over.append(_to_its_end(left[slowest[1]], budget, finished))
    return over


def _to_its_end(candidate: _Candidate, budget: Budget, finished: _Finished) -> _Candidate:
    while not candidate.is_over:
        candidate.step(budget)
    if candidate.is_solved:
        finished.add(candidate)
    return candidate


def _reversed(candidate: _Candidate) -> tuple[float, ...]:
    return tuple(-one for one in candidate.rank)


def _enough(finished: _Finished, next_one: _Candidate, budget: Budget) -> bool:
    """Whether nothing left can be the best, nor among the transpositions told unless those cost too much to know."""
    told = finished.best_ranks
    if not told or next_one.rank >= told[0]:
        return False
    return budget.nodes_spent > NODES_TO_TELL or (len(told) == MOST_TOLD and next_one.rank < told[-1])


def _found(best: _Candidate, finished: Sequence[_Candidate], left: Sequence[_Candidate], budget: Budget) -> Found:
    bound = max(candidate.bound for candidate in [*finished, *left])
    told: dict[int, Tried] = {}
    ranked = sorted(finished, key=lambda candidate: candidate.rank_kept, reverse=True)
    for candidate in [*ranked, *sorted(left, key=lambda candidate: candidate.rank, reverse=True)]:
        told.setdefault(
            candidate.way.semitones,
            Tried(
                semitones=candidate.way.semitones,
                speed_factor=candidate.way.speed_factor,
                kept=candidate.kept if candidate.is_solved else None,
                bound=candidate.bound,
            ),
        )
    return Found(
        way=best.way,
        problems=best.problems,
        solved=best.solved,
        kept=best.kept,
        bound=max(bound, best.kept),
        tried=tuple(list(told.values())[:MOST_TOLD]),
        transpositions=_by_transposition([*finished, *left]),
        stopped=_what_stopped(best, budget) if bound > best.kept else None,
    )


def _by_transposition(known: Sequence[_Candidate]) -> tuple[Transposed, ...]:
    """Each transposition with the most that any of its speeds keeps, and the most that any could keep."""
    speeds: dict[int, list[_Candidate]] = {}
    for candidate in known:
        speeds.setdefault(candidate.way.semitones, []).append(candidate)
    return tuple(
        Transposed(
            semitones=semitones,
            kept=max((one.kept for one in speeds[semitones] if one.is_solved), default=None),
            bound=max(one.bound for one in speeds[semitones]),
        )
        for semitones in sorted(speeds)
    )


def _what_stopped(best: _Candidate, budget: Budget) -> Stopped:
    """Why the best is not proved; where nothing else tells, a group was too large for one program."""
    piled = any(problem.piled for problem in best.problems)
    return budget.stopped or ("nudges" if piled else "nodes")
