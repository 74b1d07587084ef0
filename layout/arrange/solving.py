"""The best choice for one problem: parts alone first, then together what a choice breaks together.

Parts solved alone are worth at least as much as any choice for all of them: leaving rules aside only
allows more. So their sum is a bound, and where their choices break none of the rules between parts
they are the best. Where they do, the parts that break a rule are put into one group, which an integer
program solves by all rules; and so on, until nothing is broken.

Last, the choice is nudged to its moments. Where that piles up more than the drive carries, the plucks
at fault are forbidden together and the choice is made anew. The bound stays what it was before: other
moments than those the nudging finds might have done.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from layout.arrange.broken import broken_by
from layout.arrange.budget import LOOKS_TO_JUDGE, LOOKS_TO_NARROW, LOOKS_TO_PLAY, LOOKS_TO_WRITE, Budget
from layout.arrange.by_time import Best, Stuck, best_by_time, narrow_by_time
from layout.arrange.coupled import MOST_ENTRIES_FOR_RULINGS, MOST_LIFTED, best_coupled, worth_of
from layout.arrange.fitting import fitted
from layout.arrange.loads import lifted_count, piled_up
from layout.arrange.parts import parts_of
from layout.arrange.playing import Playing
from layout.arrange.problem import Problem
from layout.arrange.spreading import with_spread_chords
from layout.arrange.steps import Steps
from layout.mechanics.arrays import IntArray, begins_run

MOST_TOGETHER = 1_500  # plucks in one integer program; real music puts some hundreds together at most
MOST_AT_LEISURE = 2_000  # plucks that are nudged with all care although the time is over: some tenths of a second
PLUCKS_AT_A_TIME = 200  # in parts solved at one step; between steps other problems may look more promising


@dataclass(frozen=True, slots=True, kw_only=True)
class Solved:
    """A choice that keeps every rule.

    Attributes:
        spots: The spots chosen, by pluck.
        worth: What they are worth.
        bound: No choice is worth more; equal to `worth` where the choice is proved the best.
        playing: The same plucks with their moments, worked out when they are asked for.
    """

    spots: tuple[int, ...]
    worth: int
    bound: int
    playing: Playing


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Impossible:
    """No choice plays all plucks that must sound.

    Attributes:
        plucks: Plucks among which those that must sound have no room; rising.
        is_known: False where none was found, and what may be spent on rulings did not do to find out.
    """

    plucks: IntArray
    is_known: bool = True


class _NotFoundOut(Exception):
    """Whether some plucks that must sound have room together was not found out."""

    def __init__(self, plucks: IntArray) -> None:
        super().__init__(f"{len(plucks)} plucks")
        self.plucks = plucks


@dataclass(slots=True, kw_only=True, eq=False)
class _Group:
    plucks: IntArray
    spots: tuple[int, ...]
    bound: int
    is_best: bool


class Solving:
    """One problem on its way to its best choice, step by step, so that hopeless ones can be left half way.

    `bound` is true at every moment: no choice is worth more. It falls with every step.
    """

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self._widened = False
        self._most = np.zeros(problem.pluck_count, dtype=np.int64)
        np.maximum.at(self._most, problem.pluck, problem.worth)
        self.bound = int(self._most.sum())
        self._steps: Steps
        self._waiting: list[IntArray] | None = None  # parts still to be solved; None before it is taken apart
        self._open = 0  # what the waiting parts could be worth
        self.impossible: Impossible | None = None
        self._silent = np.flatnonzero(problem.must_sound & (np.diff(problem.first_spot) == 0))
        self._groups: list[_Group] = []
        self._alone: dict[int, int] = {}  # the spot of each pluck that touches no other, and is not yet in a group
        self._alone_worth = 0
        self._last_played: Playing | None = None

    @property
    def taken_apart(self) -> bool:
        """Whether every part has been solved by itself."""
        return self._waiting == []

    def some_parts(self, budget: Budget) -> None:
        """A step of the first kind: some more parts, each by itself."""
        if len(self._silent):
            self.impossible = Impossible(plucks=self._silent)
            return
        if self._waiting is None:
            self._take_apart()
        looked_at = 0
        while self._waiting and looked_at < PLUCKS_AT_A_TIME:
            plucks = self._waiting.pop()
            looked_at += len(plucks)
            try:
                group = self._part(self._steps, plucks, budget)
            except _NotFoundOut as unknown:
                self.impossible = Impossible(plucks=unknown.plucks, is_known=False)
                return
            if group is None:
                self.impossible = Impossible(plucks=plucks)
                return
            self._groups.append(group)
            self._open -= int(self._most[plucks].sum())
        self._lower_bound()

    def _take_apart(self) -> None:
        parts = parts_of(self.problem)
        self._alone = self._best_spots(parts.alone)
        self._alone_worth = int(self.problem.worth[list(self._alone.values())].sum())
        # The longest first: they are the most crowded, and lower the bound most.
        self._waiting = sorted(parts.together, key=len)
        self._open = sum(int(self._most[plucks].sum()) for plucks in self._waiting)
        self._steps = Steps(self.problem, np.concatenate([np.zeros(0, dtype=np.int64), *parts.together]))

    def together(self, budget: Budget) -> Solved | Impossible:
        """The last step: what is broken together, solved together."""
        while not self.taken_apart and self.impossible is None:
            self.some_parts(budget)
        if self.impossible is not None:
            return self.impossible
        try:
            return self._joined_up(budget)
        except _NotFoundOut as unknown:
            return Impossible(plucks=unknown.plucks, is_known=False)

    def _joined_up(self, budget: Budget) -> Solved | Impossible:
        """Parts that a choice breaks together, solved together, until nothing is broken."""
        if lifted_count(self.problem, np.array(self._chosen(), dtype=np.int64)) > MOST_LIFTED:
            return self._as_it_stands(self._chosen(), budget)
        while broken := self._broken(budget):
            if not self._widened and self.problem.drive is not None and budget.stopped != "time":
                self._widened = True
                if self._widen(budget):
                    continue
                return self._as_it_stands(self._chosen(), budget)
            if budget.spent:
                return self._as_it_stands(self._chosen(), budget)
            chosen = self._chosen()
            joined = self._joined(broken)
            if not all(self._fits_a_program(plucks) for plucks in joined):
                return self._as_it_stands(chosen, budget)
            for plucks in joined:
                group = self._as_one(plucks, budget)
                if group is None:
                    return Impossible(plucks=plucks)
                self._groups.append(group)
            self._lower_bound()
        return self._solved(self._chosen(), budget)

    def _solved(self, spots: tuple[int, ...], budget: Budget) -> Solved:
        worth = worth_of(self.problem, spots)
        return Solved(spots=spots, worth=worth, bound=max(self.bound, worth), playing=self._play(spots, budget))

    def _broken(self, budget: Budget) -> list[tuple[int, ...]]:
        chosen = self._chosen()
        budget.spend_looks(LOOKS_TO_JUDGE * len(chosen))
        return broken_by(self.problem, chosen) or self._piled(chosen, budget)

    def _play(self, spots: tuple[int, ...], budget: Budget) -> Playing:
        """A choice with its moments; kept, since what nothing is wrong with is asked for once more."""
        last = self._last_played
        if last is None or (last.spots, last.problem.piled) != (spots, self.problem.piled):
            budget.spend_looks(LOOKS_TO_PLAY * len(spots))  # played or not: where a search stops must not hang on that
            in_haste = len(spots) > MOST_AT_LEISURE and budget.stopped == "time"
            last = self._last_played = Playing(problem=self.problem, spots=spots, in_haste=in_haste)
        return last

    def _piled(self, chosen: tuple[int, ...], budget: Budget) -> list[tuple[int, ...]]:
        """The spots of a choice that its nudges bring too near for the drive; forbidden together from now on.

        Those that must all sound are left: a ruling is not refused for moments that might have done.
        """
        problem = self.problem
        if problem.drive is None:
            return []
        piles = []
        for heavy in self._play(chosen, budget).too_heavy:
            if not problem.must_sound[problem.pluck[list(heavy)]].all():
                piles.append(tuple(sorted({equal for spot in heavy for equal in problem.equals(spot)})))
        self.problem = replace(problem, piled=(*problem.piled, *piles))
        return piled_up(self.problem, np.array(chosen, dtype=np.int64))

    def _widen(self, budget: Budget) -> bool:
        """Let chords too heavy for the drive be spread; what is chosen so far stays as it is.

        False where it would take too long: what is found without is not proved then.
        """
        lifted = lifted_count(self.problem, np.arange(self.problem.spot_count))
        budget.spend_looks(LOOKS_TO_WRITE * lifted)
        if lifted > MOST_LIFTED:
            return False
        problem = with_spread_chords(self.problem)
        if problem is self.problem:
            return True
        now = np.flatnonzero(problem.spread == 0)
        for group in self._groups:
            group.spots = tuple(now[list(group.spots)].tolist())
        self._alone = {pluck: int(now[spot]) for pluck, spot in self._alone.items()}
        self.problem = replace(problem, piled=tuple(tuple(now[list(pile)].tolist()) for pile in problem.piled))
        return True

    def _lower_bound(self) -> None:
        if self.problem.piled:
            return  # what follows is less than all there might be
        self.bound = min(self.bound, self._open + self._alone_worth + sum(group.bound for group in self._groups))

    def _best_spots(self, plucks: IntArray) -> dict[int, int]:
        """The first of the best unspread spots of each of these plucks."""
        problem = self.problem
        is_asked = np.zeros(problem.pluck_count, dtype=np.bool_)
        is_asked[plucks] = True
        spots = np.flatnonzero((problem.spread == 0) & is_asked[problem.pluck])
        spots = spots[np.lexsort((-problem.worth[spots], problem.pluck[spots]))]
        firsts = spots[begins_run(problem.pluck[spots])]
        return dict(zip(problem.pluck[firsts].tolist(), firsts.tolist(), strict=True))

    def _part(self, steps: Steps, plucks: IntArray, budget: Budget) -> _Group | None:
        found = best_by_time(steps, plucks, budget)
        if isinstance(found, Stuck):
            return None
        if isinstance(found, Best):
            return _Group(plucks=plucks, spots=found.spots, bound=found.worth, is_best=True)
        group = None
        if not budget.spent and self._fits_a_program(plucks):
            group = self._as_one(plucks, budget)
            if group is None or group.is_best:
                return group
        narrow = narrow_by_time(steps, plucks)
        budget.spend_looks(LOOKS_TO_NARROW * len(plucks))
        bound = narrow.bound if group is None else min(narrow.bound, group.bound)
        choices = [group.spots] if group is not None else []
        choices += [narrow.best.spots] if narrow.best is not None else []
        if not choices:
            by_hand = self._by_hand(plucks, (), budget)
            if by_hand is None:
                return None
            choices.append(by_hand)
        best = max(choices, key=lambda spots: worth_of(self.problem, spots))
        return _Group(plucks=plucks, spots=best, bound=bound, is_best=False)

    def _as_one(self, plucks: IntArray, budget: Budget) -> _Group | None:
        found = best_coupled(self.problem, plucks, budget)
        if found.bound is None:
            return None
        spots = found.spots
        if spots is None or found.worth < found.bound:
            by_hand = self._by_hand(plucks, spots or (), budget)
            if by_hand is None:
                return None
            if spots is None or worth_of(self.problem, by_hand) > found.worth:
                spots = by_hand
        is_best = worth_of(self.problem, spots) == found.bound
        return _Group(plucks=plucks, spots=spots, bound=found.bound, is_best=is_best)

    def _fits_a_program(self, plucks: IntArray) -> bool:
        return len(plucks) <= MOST_TOGETHER

    def _chosen(self) -> tuple[int, ...]:
        spots = [spot for group in self._groups for spot in group.spots]
        return tuple(sorted([*spots, *self._alone.values()]))

    def _joined(self, broken: Sequence[Sequence[int]]) -> list[IntArray]:
        """Take the groups with a part in a breach off the list, and give their plucks, joined as the breaches say."""
        groups = self._groups
        for spot in [spot for spots in broken for spot in spots]:
            pluck = int(self.problem.pluck[spot])
            if pluck in self._alone:
                del self._alone[pluck]
                worth = int(self.problem.worth[spot])
                self._alone_worth -= worth
                groups.append(_Group(plucks=np.array([pluck]), spots=(spot,), bound=worth, is_best=True))
        group_of = {pluck: place for place, group in enumerate(groups) for pluck in group.plucks.tolist()}
        sets: list[set[int]] = []
        for spots in broken:
            joined = {group_of[int(self.problem.pluck[spot])] for spot in spots}
            apart = []
            for one in sets:
                if one & joined:
                    joined |= one
                else:
                    apart.append(one)
            sets = [*apart, joined]
        taken = set().union(*sets)
        self._groups = [group for place, group in enumerate(groups) if place not in taken]
        return [np.sort(np.concatenate([groups[place].plucks for place in sorted(one)])) for one in sets]

    def _as_it_stands(self, chosen: Sequence[int], budget: Budget) -> Solved | Impossible:
        """A choice so far, less what breaks a rule."""
        plucks = np.flatnonzero(np.diff(self.problem.first_spot) > 0)
        spots = self._by_hand(plucks, chosen, budget)
        if spots is None:
            return Impossible(plucks=plucks)
        while piled := self._piled(spots, budget):
            spots = self._without_lightest(spots, piled)
        return self._solved(spots, budget)

    def _without_lightest(self, chosen: Sequence[int], piled: Sequence[Sequence[int]]) -> tuple[int, ...]:
        """A choice less the lightest pluck of each of these sets that may go, and what belongs to it."""
        problem = self.problem
        gone: set[int] = set()
        for spots in piled:
            may_go = [spot for spot in spots if not problem.must_sound[problem.pluck[spot]]]
            if not gone & set(problem.pluck[list(spots)].tolist()):
                gone.add(int(problem.pluck[min(may_go, key=lambda spot: (int(problem.worth[spot]), spot))]))
        left = [spot for spot in chosen if int(problem.pluck[spot]) not in gone]
        return tuple(spot for spot in left if int(problem.parent[problem.pluck[spot]]) not in gone)

    def _by_hand(self, plucks: IntArray, preferred: Sequence[int], budget: Budget) -> tuple[int, ...] | None:
        """A choice that keeps every rule, near to the one preferred; None where there is none at all.

        Rulings are followed or refused for what is true, so where putting spots down one after the
        other finds no room for those that must sound, it is looked for with what may be spent on rulings.

        Raises:
            _NotFoundOut: That did not do.
        """
        spots = fitted(self.problem, plucks, preferred, budget)
        forced = plucks[self.problem.must_sound[plucks]]
        if spots is not None or not len(forced):
            return spots
        allowed = budget.for_rulings
        if allowed.spent:
            raise _NotFoundOut(forced)
        found = best_coupled(self.problem, forced, allowed, most_entries=MOST_ENTRIES_FOR_RULINGS)
        if found.spots is not None:
            return fitted(self.problem, plucks, found.spots, allowed) or found.spots
        if found.bound is not None:
            raise _NotFoundOut(forced)
        return None
