"""When the chosen spots sound: equal teeth take turns, and nudges that pile up on the drive are told.

The search counts loads at the moments asked for. Nudges may bring plucks nearer to each other than
the drive carries; they are kept as far apart as they are asked where that can be, and told where it
cannot. Nothing is dropped here.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from layout.arrange.loads import overloads
from layout.arrange.moments_kept import kept_as_asked
from layout.arrange.nudging import nudged, nudged_later
from layout.arrange.problem import Problem
from layout.arrange.spreading import narrowed
from layout.arrange.taking_turns import taking_turns

_TRIALS = 2  # nudgings of one choice, each knowing what was too heavy in those before


@dataclass(frozen=True, slots=True, kw_only=True)
class Played:
    """A choice with its moments.

    Attributes:
        spots: The spots, by pluck; each pluck of the choice has one of the same worth.
        at_ns: When each sounds.
        too_heavy: The spots that load the disc beyond the limit together, for every moment at which they do.
    """

    spots: tuple[int, ...]
    at_ns: Mapping[int, int]
    too_heavy: tuple[tuple[int, ...], ...]


@dataclass(frozen=True, kw_only=True, eq=False)  # no slots: what is worked out is kept
class Playing:
    """A choice that may be played: of most choices of a search only the weight is asked for.

    Attributes:
        problem: The rules.
        spots: A choice that keeps every rule, by pluck.
        in_haste: As for `played`.
    """

    problem: Problem
    spots: tuple[int, ...]
    in_haste: bool

    @cached_property
    def played(self) -> Played:
        """The choice with its moments."""
        return played(self.problem, self.spots, in_haste=self.in_haste)

    @cached_property
    def too_heavy(self) -> tuple[tuple[int, ...], ...]:
        """As of `played`. Where nothing need be nudged the choice itself keeps the limit, and is not played for it."""
        if self._stands_as_asked:
            return ()
        return self.played.too_heavy

    @property
    def _stands_as_asked(self) -> bool:
        return not self.problem.spread[list(self.spots)].any() and kept_as_asked(self.problem, self.spots)


def played(problem: Problem, spots: Sequence[int], *, in_haste: bool = False) -> Played:
    """The plucks of a choice with their moments, spread chords no wider than they must be.

    Args:
        problem: The rules.
        spots: A choice that keeps every rule, by pluck; none give nothing played.
        in_haste: Time is over: the choice is played as it is, each pluck as soon as may be from its moment on.
    """
    if in_haste:
        at_ns = nudged_later(problem, spots)
        return Played(spots=tuple(spots), at_ns=at_ns, too_heavy=tuple(_too_heavy(problem, spots, at_ns)))
    narrow = narrowed(problem, spots)
    found = _nudged_apart(problem, narrow)
    if found.too_heavy and narrow != tuple(spots):
        return _nudged_apart(problem, spots)
    return found


def _nudged_apart(problem: Problem, spots: Sequence[int]) -> Played:
    turned = taking_turns(problem, spots, nudged(problem, spots))
    heavy: list[tuple[int, ...]] = []
    for _ in range(_TRIALS):
        at_ns = nudged(problem, turned, heavy)
        found = _too_heavy(problem, turned, at_ns)
        if not found:
            break
        heavy += found
    return Played(spots=turned, at_ns=at_ns, too_heavy=tuple(found))


def _too_heavy(problem: Problem, spots: Sequence[int], at_ns: Mapping[int, int]) -> list[tuple[int, ...]]:
    planned_ns = problem.asked_ns.copy()
    planned_ns[list(spots)] = [at_ns[spot] for spot in spots]
    return overloads(replace(problem, asked_ns=planned_ns), np.array(spots, dtype=np.int64))
