"""The opponent of the timings: a whole problem as one integer program, as a good engineer would write it.

A column of nought or one for every spot and a moment for every pluck that may be pushed. Spots of one track
that exclude each other whatever the nudges stand in clique rows, as long as they can be made, or, for a
plainer program, in a row for every pair. Where nudges decide, a row "x of the later is at least so long
after x of the earlier, unless one of the two is left out" joins them. Loads have their rows. HiGHS as it
comes, but quiet and to a gap of nothing, so that the answer is the same.
"""

from collections import defaultdict
from collections.abc import Sequence
from itertools import pairwise
from typing import Literal, NamedTuple

import highspy
import numpy as np

from layout.arrange.loads import heavy_moments
from layout.arrange.problem import Problem

NS_PER_MS = 1_000_000
Conflicts = Literal["cliques", "pairs"]

Terms = tuple[float, list[tuple[int, float]]]  # at most, and the columns with their factors

LESS_THAN_ONE_GAP = 0.5  # worths are whole


class Answer(NamedTuple):
    """What the program found."""

    worth: int
    proved: bool
    columns: int
    rows: int


class _Program:
    """The program as it is put together. Moments are milliseconds after the pluck is asked for."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self.rows: list[tuple[float, list[tuple[int, float]]]] = []  # most, and the columns with their factors
        self.moment: dict[int, int] = {}
        self.bounds_ms: list[tuple[float, float]] = []
        self.windows = list(
            zip(problem.earliest_ns.tolist(), problem.latest_ns.tolist(), problem.pluck.tolist(), strict=True)
        )
        self.unspread_ns = problem.unspread_ns.tolist()

    def not_both(self, *spots: int) -> None:
        self.rows.append((1.0, [(spot, 1.0) for spot in spots]))

    def apart(self, one: int, two: int, least_ns: int) -> None:
        """Where both sound, `two` is at least so long after `one`; nothing where no nudge can break that."""
        (one_from, one_to, one_pluck), (two_from, two_to, two_pluck) = self.windows[one], self.windows[two]
        if one_pluck == two_pluck or two_from - one_to >= least_ns:
            return
        if two_to - one_from < least_ns:
            self.not_both(one, two)
            return
        # x2 - x1 >= least - M (2 - y1 - y2), with M the most it can be short of.
        missing_ms = (least_ns - (two_from - one_to)) / NS_PER_MS
        needed_ms = (least_ns - (self.unspread_ns[two] - self.unspread_ns[one])) / NS_PER_MS
        terms = [(self._moment(one_pluck), 1.0), (self._moment(two_pluck), -1.0), (one, missing_ms), (two, missing_ms)]
        self.rows.append((2 * missing_ms - needed_ms, terms))

    def _moment(self, pluck: int) -> int:
        """The column of a pluck's moment, within the windows of its spots."""
        if pluck not in self.moment:
            self.moment[pluck] = self.problem.spot_count + len(self.bounds_ms)
            spots = range(int(self.problem.first_spot[pluck]), int(self.problem.first_spot[pluck + 1]))
            asked_ns = self.unspread_ns[spots[0]]
            lows = [(self.windows[spot][0] - asked_ns) / NS_PER_MS for spot in spots]
            highs = [(self.windows[spot][1] - asked_ns) / NS_PER_MS for spot in spots]
            low, high = min(lows), max(highs)
            self.bounds_ms.append((low, high))
            column = self.moment[pluck]
            for spot, spot_low, spot_high in zip(spots, lows, highs, strict=True):
                if spot_low > low:
                    self.rows.append((-low, [(column, -1.0), (spot, spot_low - low)]))
                if spot_high < high:
                    self.rows.append((high, [(column, 1.0), (spot, high - spot_high)]))
        return self.moment[pluck]


def solve_as_one(problem: Problem, conflicts: Conflicts) -> Answer:
    """The best choice by one program, with this kind of rows.

    For problems without extra plucks, without spread chords and without costs of ringing.
    """
    return _solved([_program(problem, conflicts)])


def solve_all_as_one(problems: Sequence[Problem], conflicts: Conflicts) -> Answer:
    """The best of several problems, of which one is to be chosen, by one program that chooses it as well.

    One column more for every problem, of which one is at one; a spot counts only where its problem's is.
    """
    return _solved([_program(problem, conflicts) for problem in problems])


def _program(problem: Problem, conflicts: Conflicts) -> _Program:
    program = _Program(problem)
    for pluck in range(problem.pluck_count):
        spots = range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1]))
        if len(spots) > 1:
            program.not_both(*spots)
    _add_tracks(program, conflicts)
    _add_webs(program)
    _add_loads(program)
    return program


def _add_tracks(program: _Program, conflicts: Conflicts) -> None:
    problem = program.problem
    on_track: dict[int, list[int]] = defaultdict(list)
    for spot in np.lexsort((problem.pluck, problem.asked_ns)).tolist():
        on_track[int(problem.track[spot])].append(spot)
    asked_ns, least_ns = problem.asked_ns.tolist(), problem.least_ns.tolist()
    farthest_ns = int(problem.least_ns.max(initial=0) + 2 * (problem.latest_ns - problem.earliest_ns).max(initial=0))
    for spots in on_track.values():
        ends = _cliques(program, spots) if conflicts == "cliques" else list(range(len(spots)))
        for place, one in enumerate(spots):
            for two in spots[ends[place] + 1 :]:
                if asked_ns[two] - asked_ns[one] > farthest_ns:
                    break
                program.apart(one, two, least_ns[one])
        _add_next_turn(program, spots, farthest_ns)


def _add_next_turn(program: _Program, spots: list[int], farthest_ns: int) -> None:
    """The last spots of a track against its first of the turn after."""
    asked_ns, turn_ns = program.problem.asked_ns.tolist(), program.problem.turn_ns
    first_ns = asked_ns[spots[0]] + turn_ns
    for one in (spot for spot in spots if first_ns - asked_ns[spot] <= farthest_ns):
        for two in (spot for spot in spots if asked_ns[spot] + turn_ns - asked_ns[one] <= farthest_ns):
            program.apart(one, two, int(program.problem.least_ns[one]) - turn_ns)


def _cliques(program: _Program, spots: list[int]) -> list[int]:
    """Clique rows over a track's spots in time; for each place the last place that a row joins it with."""
    least_ns = program.problem.least_ns
    ends, told = [], -1
    for place in range(len(spots)):
        end, first_ns, last_ns, shortest_ns = place, *program.windows[spots[place]][:2], int(least_ns[spots[place]])
        for after in range(place + 1, len(spots)):
            first_ns = min(first_ns, program.windows[spots[after]][0])
            last_ns = max(last_ns, program.windows[spots[after]][1])
            shortest_ns = min(shortest_ns, int(least_ns[spots[after]]))
            if last_ns - first_ns >= shortest_ns:
                break
            end = after
        if end > max(told, place):
            program.not_both(*spots[place : end + 1])
        told = max(told, end)
        ends.append(end)
    return ends


def _add_webs(program: _Program) -> None:
    problem = program.problem
    for pair in problem.besides:
        inners = np.flatnonzero(problem.track == pair.inner_index).tolist()
        outers = np.flatnonzero(problem.track == pair.outer_index).tolist()
        for inner in inners:
            for outer in outers:
                for turned_ns in (-problem.turn_ns, 0, problem.turn_ns):
                    asked_ns = int(problem.asked_ns[outer] - problem.asked_ns[inner]) + turned_ns
                    if asked_ns <= pair.from_ns:
                        program.apart(outer, inner, turned_ns - pair.from_ns)
                    elif asked_ns >= pair.to_ns:
                        program.apart(inner, outer, pair.to_ns - turned_ns)
                    elif problem.pluck[inner] != problem.pluck[outer]:
                        program.not_both(inner, outer)


def _add_loads(program: _Program) -> None:
    problem = program.problem
    if problem.drive is None:
        return
    for spots, loads in heavy_moments(problem, np.arange(problem.spot_count)):
        program.rows.append((float(problem.drive.limit), list(zip(spots, map(float, loads), strict=True))))
    if problem.spread.any():
        raise ValueError("spread chords are not in this program: choose a movement whose drive carries the piece")


def _solved(programs: Sequence[_Program]) -> Answer:
    """The best of the programs: side by side in one model, with a column each to choose by where they are several."""
    worth: list[float] = []
    low: list[float] = []
    high: list[float] = []
    whole: list[bool] = []
    rows: list[Terms] = []
    chosen: list[int] = []
    for program in programs:
        at, spots, moments = len(worth), program.problem.spot_count, len(program.bounds_ms)
        worth += [*program.problem.worth.tolist(), *[0.0] * moments]
        low += [*[0.0] * spots, *(least for least, _ in program.bounds_ms)]
        high += [*[1.0] * spots, *(most for _, most in program.bounds_ms)]
        whole += [*[True] * spots, *[False] * moments]
        rows += [(most, [(at + column, factor) for column, factor in terms]) for most, terms in program.rows]
        if len(programs) > 1:
            chosen.append(len(worth))
            worth, low, high, whole = [*worth, 0.0], [*low, 0.0], [*high, 1.0], [*whole, True]
            first = program.problem.first_spot.tolist()
            for begin, end in pairwise(first):
                if end > begin:
                    rows.append((0.0, [*[(at + spot, 1.0) for spot in range(begin, end)], (chosen[-1], -1.0)]))
    if chosen:
        rows.append((1.0, [(column, 1.0) for column in chosen]))
    proved, value = _run(_model((worth, low, high, whole), rows))
    return Answer(value, proved, len(worth), len(rows))


def _model(columns: tuple[list[float], list[float], list[float], list[bool]], rows: list[Terms]) -> highspy.HighsLp:
    worth, low, high, whole = columns
    model = highspy.HighsLp()
    model.num_col_, model.num_row_ = len(worth), len(rows)
    model.sense_ = highspy.ObjSense.kMaximize
    model.col_cost_, model.col_lower_, model.col_upper_ = np.array(worth, float), np.array(low), np.array(high)
    kinds = highspy.HighsVarType
    model.integrality_ = [kinds.kInteger if one else kinds.kContinuous for one in whole]
    model.row_lower_ = np.full(len(rows), -highspy.kHighsInf)
    model.row_upper_ = np.array([most for most, _ in rows])
    model.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    model.a_matrix_.start_ = np.concatenate([[0], np.cumsum([len(terms) for _, terms in rows])]).astype(np.int32)
    model.a_matrix_.index_ = np.array([column for _, terms in rows for column, _ in terms], dtype=np.int32)
    model.a_matrix_.value_ = np.array([factor for _, terms in rows for _, factor in terms])
    return model


def _run(model: highspy.HighsLp) -> tuple[bool, int]:
    """Whether the program was solved to its end, and what it is worth."""
    highs = highspy.Highs()  # type: ignore[no-untyped-call]  # the library's own gap
    for name, value in {"output_flag": False, "mip_rel_gap": 0.0, "mip_abs_gap": LESS_THAN_ONE_GAP}.items():
        highs.setOptionValue(name, value)
    highs.passModel(model)
    highs.run()
    proved = highs.getModelStatus() == highspy.HighsModelStatus.kOptimal
    return proved, round(highs.getInfo().objective_function_value)
