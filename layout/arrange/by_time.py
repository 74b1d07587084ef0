"""The best choice of one part, pluck by pluck in time: a dynamic program.

After each pluck a state holds the moment from which every track is free again; of two states, one
that keeps no more and is free nowhere earlier is dropped. A pluck sounds as early as its window and
its track allow, which leaves the most room for what follows, so the moments need no state of their
own. Extra plucks add to the state whether the pluck they belong to sounds, a cost of ringing teeth
when each track last sounded. Webs, loads and the end of the turn are not looked at.

Exact where `MOST_STATES` suffice. How many states there are is what the part's crowding makes them:
one where nothing is in the way, tens on doubled teeth in a run.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from layout.arrange.problem import NO_PLUCK, Problem
from layout.mechanics.arrays import IntArray

MOST_STATES = 2_000  # states after one pluck; beyond, the integer program is the quicker way
FREE = 0  # free before anything to come; no moment is earlier
NEVER = 1 << 62  # later than any moment, in ns
LONG_AGO = -NEVER


@dataclass(frozen=True, slots=True, kw_only=True)
class Best:
    """The best choice of a part.

    Attributes:
        spots: The spots chosen, in the order of their plucks.
        worth: What they are worth, costs of ringing teeth taken off.
    """

    spots: tuple[int, ...]
    worth: int


class Stuck(NamedTuple):
    """No choice plays all plucks that must sound; seen at this pluck."""

    pluck: int


class TooCrowded(NamedTuple):
    """The part has more than MOST_STATES states at this pluck."""

    pluck: int


class Way(NamedTuple):
    """One spot as the dynamic program sees it."""

    spot: int
    place: int  # of its track in the state
    worth: int
    asked_ns: int
    earliest_ns: int
    latest_ns: int
    least_ns: int
    ringing_cost: int
    ringing_ns: int


class Step(NamedTuple):
    """One pluck as the dynamic program sees it."""

    pluck: int
    must_sound: bool
    ways: tuple[Way, ...]
    needs: int  # the bit of the pluck it belongs to; 0 for none
    gives: int  # its own bit; 0 where no extra pluck belongs to it
    later: int  # the bits that later plucks need
    floor_ns: tuple[int, ...]  # by track: nothing later sounds before this
    quiet_ns: tuple[int, ...]  # by track: what was asked before this rings into nothing later
    rest: int  # the most that all later plucks could be worth

    def as_asked(self) -> "Step":
        """The same pluck without a nudge. Floors hold as they are: they are only a little early then."""
        ways = tuple(way._replace(earliest_ns=way.asked_ns, latest_ns=way.asked_ns) for way in self.ways)
        return self._replace(ways=ways)


_Key = tuple[tuple[int, ...], int, tuple[int, ...]]  # free from, which plucks sound, last sounded
_Chain = tuple["_Chain", int] | None  # the spots chosen, last first
_Kept = tuple[int, _Chain]


def best_by_time(problem: Problem, plucks: IntArray) -> Best | Stuck | TooCrowded:
    """The best choice of a part's plucks.

    Args:
        problem: Spread spots are left aside.
        plucks: One part, rising; none give a choice of none.
    """
    steps = steps_of(problem, plucks)
    best = _best(steps)
    if isinstance(best, Best) and _nudges(problem, best.spots):
        asked = _best([step.as_asked() for step in steps])
        # As good without a nudge is better.
        return asked if isinstance(asked, Best) and asked.worth == best.worth else best
    return best


def _nudges(problem: Problem, spots: Sequence[int]) -> bool:
    """Whether some of the spots cannot sound at the moments they are asked for, on their own track alone."""
    ended_ns: dict[int, int] = {}
    for spot in spots:
        track, asked_ns = int(problem.track[spot]), int(problem.asked_ns[spot])
        if asked_ns < ended_ns.get(track, LONG_AGO):
            return True
        ended_ns[track] = asked_ns + int(problem.least_ns[spot])
    return False


def _best(steps: list[Step]) -> Best | Stuck | TooCrowded:
    in_turn = _in_turn(steps)
    if in_turn is not None and in_turn.worth == sum(_most(step) for step in steps):
        return in_turn
    least = in_turn.worth if in_turn is not None else LONG_AGO
    tracks = len(steps[0].floor_ns) if steps else 0
    rings = any(way.ringing_cost for step in steps for way in step.ways)
    states: dict[_Key, _Kept] = {((FREE,) * tracks, 0, (LONG_AGO,) * tracks if rings else ()): (0, None)}
    for step in steps:
        states = _after(states, step)
        hopeful = {key: kept for key, kept in states.items() if kept[0] + step.rest >= least}
        states = _unbeaten(hopeful) if len(hopeful) > 1 else hopeful
        if not states:
            return Stuck(step.pluck)
        if len(states) > MOST_STATES:
            return TooCrowded(step.pluck)
    worth, chain = max(states.values(), key=lambda kept: kept[0])
    return Best(spots=_listed(chain), worth=worth)


def steps_of(problem: Problem, plucks: IntArray) -> list[Step]:
    """A part's plucks as the dynamic program sees them."""
    found = [_ways(problem, pluck) for pluck in plucks.tolist()]
    tracks = sorted({track for ways in found for track, _ in ways})
    place_of = {track: place for place, track in enumerate(tracks)}
    parents = problem.parent[plucks].tolist()
    bit_of = {parent: 1 << place for place, parent in enumerate(sorted(set(parents) - {NO_PLUCK}))}
    steps: list[Step] = []
    floor_ns, quiet_ns, later, rest = [NEVER] * len(tracks), [NEVER] * len(tracks), 0, 0
    for pluck, spots, parent in zip(reversed(plucks.tolist()), reversed(found), reversed(parents), strict=True):
        ways = tuple(way._replace(place=place_of[track]) for track, way in spots)
        step = Step(
            pluck=pluck,
            must_sound=bool(problem.must_sound[pluck]),
            ways=ways,
            needs=bit_of.get(parent, 0),
            gives=bit_of.get(pluck, 0),
            later=later,
            floor_ns=tuple(floor_ns),
            quiet_ns=tuple(quiet_ns),
            rest=rest,
        )
        steps.append(step)
        later |= step.needs
        rest += _most(step)
        for way in ways:
            floor_ns[way.place] = min(floor_ns[way.place], way.earliest_ns)
            quiet_ns[way.place] = way.asked_ns - way.ringing_ns
    return steps[::-1]


def _ways(problem: Problem, pluck: int) -> list[tuple[int, Way]]:
    """The spots of a pluck with their tracks, spread ones left aside."""
    found = []
    for spot in range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])):
        if problem.spread[spot] == 0:
            track = int(problem.track[spot])
            way = Way(
                spot=spot,
                place=0,
                worth=int(problem.worth[spot]),
                asked_ns=int(problem.asked_ns[spot]),
                earliest_ns=int(problem.earliest_ns[spot]),
                latest_ns=int(problem.latest_ns[spot]),
                least_ns=int(problem.least_ns[spot]),
                ringing_cost=int(problem.ringing_cost[spot]),
                ringing_ns=int(problem.ringing_ns[track]),
            )
            found.append((track, way))
    return found


def _most(step: Step) -> int:
    return max((way.worth for way in step.ways), default=0)


def _in_turn(steps: list[Step]) -> Best | None:
    """A choice made at once: every pluck on the best of its tracks with room, of equal ones the most rested.

    None where it leaves out a pluck that must sound.
    """
    tracks = len(steps[0].floor_ns) if steps else 0
    free_ns, sounded_ns, sounding, spots, worth = [FREE] * tracks, [LONG_AGO] * tracks, 0, [], 0
    for step in steps:
        best: tuple[int, int] | None = None
        chosen: Way | None = None
        for way in step.ways:
            if step.needs & ~sounding or max(way.earliest_ns, free_ns[way.place]) > way.latest_ns:
                continue
            rings = way.asked_ns - sounded_ns[way.place] < way.ringing_ns
            rank = (way.worth - way.ringing_cost * rings, -free_ns[way.place])
            if best is None or rank > best:
                best, chosen = rank, way
        if chosen is None or best is None:
            if step.must_sound:
                return None
            continue
        free_ns[chosen.place] = max(chosen.earliest_ns, free_ns[chosen.place]) + chosen.least_ns
        sounded_ns[chosen.place] = chosen.asked_ns
        sounding |= step.gives
        spots.append(chosen.spot)
        worth += best[0]
    return Best(spots=tuple(spots), worth=worth)


def _after(states: dict[_Key, _Kept], step: Step) -> dict[_Key, _Kept]:
    """The states after one more pluck, from all before it."""
    found: dict[_Key, _Kept] = {}
    for (free_ns, sounding, sounded_ns), (worth, chain) in states.items():
        options: list[tuple[_Key, _Kept]] = []
        if not step.must_sound:
            options.append((_seen_from(step, free_ns, sounding, sounded_ns), (worth, chain)))
        for way in step.ways:
            at_ns = max(way.earliest_ns, free_ns[way.place])
            if at_ns > way.latest_ns or step.needs & ~sounding:
                continue
            free = _with(free_ns, way.place, at_ns + way.least_ns)
            cost = 0
            sounded = sounded_ns
            if sounded_ns:
                cost = way.ringing_cost if way.asked_ns - sounded_ns[way.place] < way.ringing_ns else 0
                sounded = _with(sounded_ns, way.place, way.asked_ns)
            options.append(
                (_seen_from(step, free, sounding | step.gives, sounded), (worth + way.worth - cost, (chain, way.spot)))
            )
        for key, kept in options:
            if key not in found or found[key][0] < kept[0]:
                found[key] = kept
    return found


def _with(values: tuple[int, ...], place: int, value: int) -> tuple[int, ...]:
    return (*values[:place], value, *values[place + 1 :])


def _seen_from(step: Step, free_ns: tuple[int, ...], sounding: int, sounded_ns: tuple[int, ...]) -> _Key:
    """The state as far as it still matters: what is free or quiet in time is all the same."""
    free = tuple([FREE if at <= floor else at for at, floor in zip(free_ns, step.floor_ns, strict=True)])
    sounded = tuple([LONG_AGO if at <= quiet else at for at, quiet in zip(sounded_ns, step.quiet_ns, strict=False)])
    return free, sounding & step.later, sounded


def _unbeaten(states: dict[_Key, _Kept]) -> dict[_Key, _Kept]:
    """The states of which no other keeps as much and is as free, as quiet and as well provided."""
    ranked = sorted(states.items(), key=lambda item: (-item[1][0], item[0]))
    rows = np.array([(*key[0], *key[2]) for key, _ in ranked], dtype=np.int64)
    kept_rows = np.empty_like(rows)
    kept: dict[_Key, _Kept] = {}
    bits: list[int] = []
    for place, (key, value) in enumerate(ranked):
        beaten = (kept_rows[: len(bits)] <= rows[place]).all(axis=1)
        if key[1]:
            beaten = beaten & np.array([key[1] & ~one == 0 for one in bits], dtype=np.bool_)
        if not beaten.any():
            kept_rows[len(bits)] = rows[place]
            bits.append(key[1])
            kept[key] = value
    return kept


def _listed(chain: _Chain) -> tuple[int, ...]:
    spots = []
    while chain is not None:
        chain, spot = chain
        spots.append(spot)
    return tuple(reversed(spots))
