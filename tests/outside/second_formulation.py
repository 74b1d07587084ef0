"""A second opinion on the best choice: the whole of a problem as one model for CP-SAT of ortools.

Written from the text of layout.arrange.problem alone, rule by rule, numbered as there: nothing is taken
apart, nothing is left for later, and the moments are variables of the model. Every number is whole, and
so is every sum the solver forms of them.

A script for a process of its own, since ortools brings a HiGHS of its own, which cannot stand beside that
of highspy. It reads problems as JSON, one a line, and answers each with [worth of the best choice found,
bound], or [null, null] where no choice keeps the rules. It imports nothing of what it judges.
"""

import json
import sys
from collections import defaultdict
from collections.abc import Iterator
from itertools import combinations
from typing import Any

from ortools.sat.python import cp_model

MOST_S = 20.0  # of the solver; a bound above the worth is then the answer, which no test takes for a proof
MOST_ROOM = 4  # plucks; longer stretches are said by the moments alone
NO_PLUCK = -1  # the parent of a pluck that belongs to no other

Said = tuple[int | None, int | None]


class Model:
    """One problem in CP-SAT's terms: a literal for every spot, a moment for every pluck."""

    def __init__(self, problem: dict[str, Any]) -> None:
        self.problem = problem
        self.turn_ns: int = problem["turn_ns"]
        self.pluck: list[int] = problem["pluck"]
        self.track: list[int] = problem["track"]
        self.asked_ns: list[int] = problem["asked_ns"]
        self.earliest_ns: list[int] = problem["earliest_ns"]
        self.latest_ns: list[int] = problem["latest_ns"]
        self.least_ns: list[int] = problem["least_ns"]
        self.spots = range(len(self.pluck))
        self.cp = cp_model.CpModel()
        self.sounds = [self.cp.new_bool_var(f"spot {spot}") for spot in self.spots]
        self.of_pluck: dict[int, list[int]] = defaultdict(list)
        self.on_track: dict[int, list[int]] = defaultdict(list)
        for spot in self.spots:
            self.of_pluck[self.pluck[spot]].append(spot)
            self.on_track[self.track[spot]].append(spot)
        self.moment = {pluck: self._moment(spots) for pluck, spots in self.of_pluck.items()}

    def _moment(self, spots: list[int]) -> cp_model.IntVar:
        """x of a pluck, within the window of the spot chosen (rule 2)."""
        first, last = min(self.earliest_ns[spot] for spot in spots), max(self.latest_ns[spot] for spot in spots)
        moment = self.cp.new_int_var(first, last, f"moment of pluck {self.pluck[spots[0]]}")
        for spot in spots:
            if (self.earliest_ns[spot], self.latest_ns[spot]) != (first, last):
                self.cp.add(moment >= self.earliest_ns[spot]).only_enforce_if(self.sounds[spot])
                self.cp.add(moment <= self.latest_ns[spot]).only_enforce_if(self.sounds[spot])
        return moment

    def not_both(self, one: int, two: int) -> None:
        """At most one of two spots is chosen."""
        self.cp.add_bool_or(self.sounds[one].negated(), self.sounds[two].negated())

    def apart(self, one: int, two: int, least_ns: int) -> None:
        """Where both sound, x of `two` is at least so long after x of `one`."""
        if self.pluck[one] == self.pluck[two] or self.earliest_ns[two] - self.latest_ns[one] >= least_ns:
            return
        if self.latest_ns[two] - self.earliest_ns[one] < least_ns:
            self.not_both(one, two)
            return
        later, earlier = self.moment[self.pluck[two]], self.moment[self.pluck[one]]
        self.cp.add(later - earlier >= least_ns).only_enforce_if(self.sounds[one], self.sounds[two])


def second_opinion(problem: dict[str, Any]) -> Said:
    """The best worth of a problem and its bound, by one worker: the same every time."""
    model = Model(problem)
    add_plucks(model)
    add_tracks(model)
    add_webs(model)
    if problem["drive"] is not None:
        add_loads(model, problem["drive"])
    add_chords(model)
    lost = sum(cost * rings for cost, rings in ringing(model))
    model.cp.maximize(
        sum(worth * literal for worth, literal in zip(problem["worth"], model.sounds, strict=True)) - lost
    )
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = 1
    solver.parameters.random_seed = 0
    # All of the model in its linear program as well, so that the bound counts what the nudges leave no room for.
    solver.parameters.linearization_level = 2
    solver.parameters.max_time_in_seconds = MOST_S
    status = solver.solve(model.cp)
    if status == cp_model.INFEASIBLE:
        return None, None
    found = status in (cp_model.OPTIMAL, cp_model.FEASIBLE)
    return round(solver.objective_value) if found else None, round(solver.best_objective_bound)


def add_plucks(model: Model) -> None:
    """At most one spot of every pluck, and rule 1."""
    for pluck, (must_sound, parent) in enumerate(
        zip(model.problem["must_sound"], model.problem["parent"], strict=True)
    ):
        mine = [model.sounds[spot] for spot in model.of_pluck[pluck]]
        model.cp.add_at_most_one(mine)
        if must_sound:
            model.cp.add_bool_or(mine)
        if parent != NO_PLUCK:
            for one in mine:
                model.cp.add_bool_or([one.negated(), *(model.sounds[spot] for spot in model.of_pluck[parent])])


def add_tracks(model: Model) -> None:
    """Rule 2a. The next but one is farther away still, so every pair may be held to it; so with the turn after."""
    for spots in model.on_track.values():
        order = sorted(spots, key=lambda spot: (model.asked_ns[spot], model.pluck[spot]))
        for one, two in combinations(order, 2):
            model.apart(one, two, model.least_ns[one])
            model.apart(two, one, model.least_ns[two] - model.turn_ns)
        for one in order:
            if model.least_ns[one] > model.turn_ns:
                model.cp.add(model.sounds[one] == 0)
        add_room(model, spots)


def add_room(model: Model, spots: list[int]) -> None:
    """What follows from rule 2a, said for speed: k spots within a stretch take (k − 1) times their least repeat."""
    least_ns = min(model.least_ns[spot] for spot in spots)
    in_time = sorted(spots, key=lambda spot: model.latest_ns[spot])
    for begin_ns in sorted({model.earliest_ns[spot] for spot in spots}):
        inside: list[int] = []
        told = 0
        for spot in in_time:
            if model.earliest_ns[spot] < begin_ns:
                continue
            room = (model.latest_ns[spot] - begin_ns) // least_ns + 1
            if room > MOST_ROOM:
                break
            if room > told and len(inside) > told > 0:
                model.cp.add(sum(model.sounds[one] for one in inside) <= told)
            inside.append(spot)
            told = room
        if len(inside) > told > 0:
            model.cp.add(sum(model.sounds[one] for one in inside) <= told)


def add_webs(model: Model) -> None:
    """Rules 2b and 3, turn for turn."""
    for inner_track, outer_track, from_ns, to_ns in model.problem["besides"]:
        for inner in model.on_track[inner_track]:
            for outer in model.on_track[outer_track]:
                for turned_ns in (-model.turn_ns, 0, model.turn_ns):
                    asked_ns = model.asked_ns[outer] - model.asked_ns[inner] + turned_ns
                    if asked_ns <= from_ns:
                        model.apart(outer, inner, turned_ns - from_ns)
                    elif asked_ns >= to_ns:
                        model.apart(inner, outer, to_ns - turned_ns)
                    elif model.pluck[inner] != model.pluck[outer]:
                        model.not_both(inner, outer)


def add_loads(model: Model, drive: dict[str, Any]) -> None:
    """Rule 4: the load of a tooth grows in proportion over its window, rounded up."""
    for at_ns in sorted(set(model.asked_ns)):
        terms = []
        for spot in model.spots:
            before_ns = (model.asked_ns[spot] - at_ns) % model.turn_ns
            load = sum(
                (load * (window_ns - before_ns) + window_ns - 1) // window_ns
                for load, window_ns in drive["lifts"][model.track[spot]]
                if before_ns < window_ns
            )
            if load:
                terms.append(load * model.sounds[spot])
        model.cp.add(sum(terms) <= drive["limit"])


def add_chords(model: Model) -> None:
    """Rule 5."""
    spots_of: dict[int, dict[int, list[int]]] = defaultdict(lambda: defaultdict(list))
    for spot in model.spots:
        spots_of[model.problem["chord"][model.pluck[spot]]][model.problem["spread"][spot]].append(spot)
    for chord, by_spread in spots_of.items():
        spreads = {spread: model.cp.new_bool_var(f"chord {chord} spread {spread}") for spread in by_spread}
        model.cp.add_at_most_one(spreads.values())
        for spread, spots in by_spread.items():
            for spot in spots:
                model.cp.add_implication(model.sounds[spot], spreads[spread])


def ringing(model: Model) -> Iterator[tuple[int, cp_model.IntVar]]:
    """What each spot loses on a tooth that rings, and a literal that is true where it does."""
    unspread_ns = [model.asked_ns[model.problem["first_spot"][pluck]] for pluck in model.pluck]
    for track, spots in model.on_track.items():
        for two in spots:
            cost = model.problem["ringing_cost"][two]
            earlier = [
                one
                for one in spots
                if (unspread_ns[one], model.pluck[one]) < (unspread_ns[two], model.pluck[two])
                and unspread_ns[two] - unspread_ns[one] < model.problem["ringing_ns"][track]
            ]
            if cost and earlier:
                rings = model.cp.new_bool_var(f"spot {two} rings")
                for one in earlier:
                    model.cp.add_bool_or(model.sounds[one].negated(), model.sounds[two].negated(), rings)
                yield cost, rings


if __name__ == "__main__":
    for line in sys.stdin:
        sys.stdout.write(json.dumps(second_opinion(json.loads(line))) + "\n")
        sys.stdout.flush()
