"""An integer program in noughts and ones, solved by HiGHS: quiet, on one thread, to a gap of nothing.

Q. Huangfu and J. A. J. Hall, "Parallelizing the dual revised simplex method", Mathematical
Programming Computation 10, 2018 (from memory) is the solver's paper.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import highspy
import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray

# Worths are whole numbers: a bound less than one above a solution proves it. Half leaves room for rounding.
_LEAST_GAP = 0.5
_WHOLE = 0.5  # a column's value above this is a one
_GRAIN = 1e-3  # what a bound may be off by rounding, in thousandths of a note; worths are whole

# The same answer every time, and not a word on standard output.
QUIET: dict[str, bool | int | float | str] = {
    "output_flag": False,
    "log_to_console": False,
    "threads": 1,
    "parallel": "off",
    "random_seed": 0,
}

ENTRIES_OF_A_NODE = 1_000  # entries of the rows; a node of so many takes some milliseconds


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """least ≤ Σ coefficient · column ≤ most; coefficients of one where none are given; no column twice.

    Raises:
        ValueError: A column stands twice. HiGHS 1.15 can go on for ever on such a row.
    """

    columns: Sequence[int]
    coefficients: Sequence[float] | None = None
    least: float = -highspy.kHighsInf
    most: float = highspy.kHighsInf

    def __post_init__(self) -> None:
        """Refuse doubled columns."""
        if len(set(self.columns)) != len(self.columns):
            raise ValueError(f"a row names a column twice: {sorted(self.columns)}")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Answer:
    """What a program's solution gives.

    Attributes:
        ones: The columns at one, rising; None where no solution was found.
        bound: No solution is worth more; None where none exists.
        nodes: Nodes of the search tree that were looked at, each counted once for every ENTRIES_OF_A_NODE
            entries of the program: large programs have slow nodes.
        finished: Whether the search ran to its end.
    """

    ones: IntArray | None
    bound: int | None
    nodes: int
    finished: bool


class IntegerProgram:
    """Columns of nought or one with a worth each, rows between them; rows may be added between solutions."""

    def __init__(self, worth: IntArray, rows: Sequence[Row]) -> None:
        self._columns = len(worth)
        self._entries = sum(len(row.columns) for row in rows)
        self._highs = highspy.Highs()  # type: ignore[no-untyped-call]  # the library's own gap
        for name, value in {**QUIET, "mip_rel_gap": 0.0, "mip_abs_gap": _LEAST_GAP, "presolve": "off"}.items():
            self._highs.setOptionValue(name, value)
        model = filled_model(worth.astype(np.float64), rows)
        model.col_lower_, model.col_upper_ = np.zeros(len(worth)), np.ones(len(worth))
        model.integrality_ = [highspy.HighsVarType.kInteger] * len(worth)
        model.sense_ = highspy.ObjSense.kMaximize
        self._highs.passModel(model)

    def add(self, rows: Sequence[Row]) -> None:
        """Add rows."""
        self._entries += sum(len(row.columns) for row in rows)
        for row in rows:
            coefficients = np.ones(len(row.columns)) if row.coefficients is None else np.array(row.coefficients, float)
            self._highs.addRow(
                row.least, row.most, len(row.columns), np.array(row.columns, dtype=np.int32), coefficients
            )

    def solve(self, *, most_nodes: int, most_s: float | None) -> Answer:
        """The best solution.

        Args:
            most_nodes: Nodes to look at, at most.
            most_s: Seconds to take, at most; None for as long as it takes.
        """
        self._highs.setOptionValue("mip_max_nodes", max(most_nodes, 0))
        self._highs.setOptionValue("time_limit", highspy.kHighsInf if most_s is None else max(most_s, 0.0))
        self._highs.clearSolver()
        self._highs.run()
        status, info = self._highs.getModelStatus(), self._highs.getInfo()
        finished = status == highspy.HighsModelStatus.kOptimal
        nodes = max(int(info.mip_node_count), 1) * (1 + self._entries // ENTRIES_OF_A_NODE)
        if status == highspy.HighsModelStatus.kInfeasible:
            return Answer(ones=None, bound=None, nodes=nodes, finished=True)
        found = info.primal_solution_status == highspy.SolutionStatus.kSolutionStatusFeasible
        values = np.array(self._highs.getSolution().col_value) if found else np.zeros(0)
        bound = int(np.floor(info.mip_dual_bound + _GRAIN)) if np.isfinite(info.mip_dual_bound) else None
        ones = np.flatnonzero(values > _WHOLE) if found else None
        return Answer(ones=ones, bound=bound, nodes=nodes, finished=finished)


def filled_model(worth: FloatArray, rows: Sequence[Row]) -> highspy.HighsLp:
    """A model with these costs and rows; bounds and kinds of its columns are still to be said."""
    model = highspy.HighsLp()
    model.num_col_, model.num_row_ = len(worth), len(rows)
    model.col_cost_ = worth
    model.row_lower_ = np.array([row.least for row in rows], dtype=np.float64)
    model.row_upper_ = np.array([row.most for row in rows], dtype=np.float64)
    model.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    model.a_matrix_.start_ = np.concatenate([[0], np.cumsum([len(row.columns) for row in rows])]).astype(np.int32)
    model.a_matrix_.index_ = np.array([column for row in rows for column in row.columns], dtype=np.int32)
    model.a_matrix_.value_ = np.array(
        [one for row in rows for one in (row.coefficients or (1,) * len(row.columns))], dtype=np.float64
    )
    return model
