"""A linear program, solved by HiGHS: quiet, on one thread."""

from collections.abc import Sequence

import highspy
import numpy as np

from layout.arrange.integer_program import QUIET, Row, filled_model
from layout.mechanics.arrays import FloatArray


def least_cost(cost: FloatArray, lower: FloatArray, upper: FloatArray, rows: Sequence[Row]) -> FloatArray | None:
    """The values of the columns, within their bounds and rows, at the least cost; None where there are none.

    Args:
        cost: Shape (n,). Of one unit of each column.
        lower: Shape (n,). Its least value.
        upper: Shape (n,). Its greatest.
        rows: What must hold between columns.
    """
    highs = highspy.Highs()  # type: ignore[no-untyped-call]  # the library's own gap
    for name, value in QUIET.items():
        highs.setOptionValue(name, value)
    model = filled_model(cost, rows)
    model.col_lower_, model.col_upper_ = lower, upper
    highs.passModel(model)
    highs.run()
    if highs.getModelStatus() != highspy.HighsModelStatus.kOptimal:
        return None
    return np.array(highs.getSolution().col_value)
