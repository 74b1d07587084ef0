"""Why plucks are left out: the rule by which the nearest thing forbids them."""

from bisect import bisect_left
from collections import defaultdict
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from layout.arrange.arrangement import LeftOutReason
from layout.arrange.comb import Comb
from layout.arrange.nearness import near_pairs
from layout.arrange.problem import Problem
from layout.arrange.put_down import LoadsStanding
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import FULL_TURN_RAD

_JUST_BELOW = 1 - 1e-9  # of the least angle: the rule that asks for the most is the one that forbids


@dataclass(frozen=True, slots=True, kw_only=True)
class Conflict:
    """What forbids a pluck on a track: the pluck it comes too near to, how near, and by which rule.

    Attributes:
        track_index: The track the pluck would stand on, from 0.
        other: The other pluck; the pluck itself where nothing else stands on the track, or where
            one turn is shorter than the track's repeat.
        other_track_index: The track the other stands on.
        apart_ns: Between the moments asked for.
        reason: The rule.
    """

    track_index: int
    other: int
    other_track_index: int
    apart_ns: int
    reason: LeftOutReason


class Standing:
    """Chosen spots, by track, to be asked what forbids one more."""

    def __init__(self, problem: Problem, spots: Sequence[int], spacing: Spacing, others: Sequence[int]) -> None:
        """Stand the chosen spots up.

        Args:
            problem: The rules.
            spots: Those chosen.
            spacing: Which rule asks for how much.
            others: All that will be asked about.
        """
        self._problem = problem
        self._spacing = spacing
        self._spots = np.array(sorted(spots), dtype=np.int64)
        self._on_track: dict[int, list[tuple[int, int]]] = defaultdict(list)
        in_time = self._spots[np.argsort(problem.asked_ns[self._spots], kind="stable")]
        asked_ns, tracks = problem.asked_ns[in_time].tolist(), problem.track[in_time].tolist()
        for track, at_ns, spot in zip(tracks, asked_ns, in_time.tolist(), strict=True):
            self._on_track[track].append((at_ns, spot))
        self._others = others
        self._chosen = set(spots)
        self._piled: dict[int, list[tuple[int, ...]]] = defaultdict(list)
        for pile in problem.piled:
            for spot in pile:
                self._piled[spot].append(pile)

    def conflict(self, spot: int) -> Conflict:
        """What is nearest in the way of a spot whose pluck is not on the disc."""
        near = self._on_its_track(spot)
        found = list(self._beside_it(spot))
        if near is not None and near.apart_ns < self._problem.least_ns[spot]:
            found.append(near)
        if found:
            return min(found, key=lambda conflict: conflict.apart_ns)
        return self._too_heavy(spot) or near or self._alone(spot)

    @cached_property
    def _loads(self) -> LoadsStanding | None:
        """What the chosen spots load the disc with: asked for only where nothing is nearer."""
        problem = self._problem
        if problem.drive is None:
            return None
        every = np.array([*self._spots, *self._others], dtype=np.int64)
        loads = LoadsStanding(problem, problem.drive, every)
        loads.work_out(every)
        for spot in self._spots.tolist():
            loads.put(spot)
        return loads

    def _beside_it(self, spot: int) -> Iterator[Conflict]:
        problem = self._problem
        for one, two in near_pairs(problem, np.array([*self._near(spot, self._web_ns()), spot])):
            if spot in (one, two):
                other = two if one == spot else one
                apart_ns = abs(int(problem.asked_ns[other] - problem.asked_ns[spot]))
                yield Conflict(
                    track_index=int(problem.track[spot]),
                    other=int(problem.pluck[other]),
                    other_track_index=int(problem.track[other]),
                    apart_ns=min(apart_ns, problem.turn_ns - apart_ns),
                    reason="web",
                )

    def _too_heavy(self, spot: int) -> Conflict | None:
        track, loads = int(self._problem.track[spot]), self._loads
        if loads is None or (loads.fits(spot) and not self._piles_up(spot)):
            return None
        return Conflict(
            track_index=track,
            other=int(self._problem.pluck[spot]),
            other_track_index=track,
            apart_ns=0,
            reason="drive-torque",
        )

    def _piles_up(self, spot: int) -> bool:
        """Whether with the spot every pluck of a pile would have its spot in it."""
        of = self._problem.pluck
        return any(
            {int(of[one]) for one in pile if one == spot or one in self._chosen} == {int(of[one]) for one in pile}
            for pile in self._piled.get(spot, ())
        )

    def _alone(self, spot: int) -> Conflict:
        return Conflict(
            track_index=int(self._problem.track[spot]),
            other=int(self._problem.pluck[spot]),
            other_track_index=int(self._problem.track[spot]),
            apart_ns=self._problem.turn_ns,
            reason=self._reason(int(self._problem.track[spot]), self._problem.turn_ns),
        )

    def _on_its_track(self, spot: int) -> Conflict | None:
        problem, track = self._problem, int(self._problem.track[spot])
        row, at_ns = self._on_track.get(track), int(problem.asked_ns[spot])
        if not row:
            return None
        place = bisect_left(row, (at_ns, spot))
        before_ns = (at_ns - row[place - 1][0]) % problem.turn_ns
        after_ns = (row[place % len(row)][0] - at_ns) % problem.turn_ns
        apart_ns, other = min((before_ns, row[place - 1][1]), (after_ns, row[place % len(row)][1]))
        return Conflict(
            track_index=track,
            other=int(problem.pluck[other]),
            other_track_index=track,
            apart_ns=apart_ns,
            reason=self._reason(track, apart_ns),
        )

    def _reason(self, track: int, apart_ns: int) -> LeftOutReason:
        """The rule that forbids plucks so near; the one that asks for the most where nudging alone fails."""
        least_rad = float(self._spacing.least_rad[track])
        apart_rad = apart_ns * FULL_TURN_RAD / self._problem.turn_ns
        return self._spacing.reason(track, min(apart_rad, least_rad * _JUST_BELOW))

    def _near(self, spot: int, reach_ns: int) -> list[int]:
        apart_ns = np.abs(self._problem.asked_ns[self._spots] - self._problem.asked_ns[spot])
        near = (apart_ns <= reach_ns) | (self._problem.turn_ns - apart_ns <= reach_ns)
        return [int(one) for one in self._spots[near]]

    def _web_ns(self) -> int:
        return max((max(abs(pair.from_ns), abs(pair.to_ns)) for pair in self._problem.besides), default=0)


def reasons_of(
    problem: Problem, spots: Sequence[int], keys: Sequence[int], comb: Comb, spacing: Spacing
) -> dict[int, LeftOutReason]:
    """The reason of every pluck left out, by pluck.

    Over all its spots, the least time to something that forbids one decides.

    Args:
        problem: The rules.
        spots: The spots chosen.
        keys: The key each pluck is asked for at, after transposition.
        comb: For pitches that have no usable tooth.
        spacing: Which rule asks for how much.
    """
    played = {int(problem.pluck[spot]) for spot in spots}
    others = np.flatnonzero((problem.spread == 0) & ~np.isin(problem.pluck, list(played)))
    standing = Standing(problem, spots, spacing, others.tolist())
    reasons: dict[int, LeftOutReason] = {}
    for pluck, key in enumerate(keys):
        if pluck in played:
            continue
        mine = range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1]))
        if mine:
            found = [standing.conflict(spot) for spot in mine if problem.spread[spot] == 0]
            reasons[pluck] = min(found, key=lambda conflict: conflict.apart_ns).reason
        else:
            reasons[pluck] = "unusable-tooth" if key in comb.unusable_keys else "no-such-pitch"
    return reasons
