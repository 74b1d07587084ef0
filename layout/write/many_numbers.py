"""Many numbers as text at once: nearly all of a drawing's bytes are coordinates.

orjson writes the shortest text that reads back as the same double, as Python does: 32,000 coordinates in 1 ms, for
which Python takes 17. Only where Python writes powers of ten do the two differ; hardly any coordinate is so small, and
a block of numbers in which one is takes the slower way.
"""

from collections.abc import Sequence
from itertools import accumulate, pairwise

import numpy as np
import orjson

from layout.mechanics.arrays import FloatArray
from layout.write.numbers import number

_LEAST_PLAIN, _MOST_PLAIN = 1e-4, 1e16  # Python's float.__repr__: what is less or not less stands in powers of ten


def as_repr(rows: FloatArray) -> list[list[str]]:
    """Each number as Python's repr has it: 1.5, 3.0, 1e-06.

    Args:
        rows: Shape (n, k), k above 0; no rows give none.
    """
    if not _is_plain(rows):
        return [[repr(value) for value in row] for row in rows.tolist()]
    return [row.split(",") for row in _json(rows)[2:-2].split("],[")] if len(rows) else []


def lines_as_data(lines_mm: FloatArray) -> str:
    """SVG path data of straight lines from point to point, each number as `number` has it: "M1 2L3 4.5M5 6L7 8".

    Args:
        lines_mm: Shape (n, k, 2), k above 1, rounded as they are to be written; no lines give "".
    """
    if not len(lines_mm):
        return ""
    if not _is_plain(lines_mm):
        return "".join("M" + "L".join(f"{number(x)} {number(y)}" for x, y in line) for line in lines_mm.tolist())
    whole = _json(lines_mm).replace(".0,", ",").replace(".0]", "]")  # a whole number ends at its last digit
    return "M" + whole[3:-3].replace("]],[[", "M").replace("],[", "L").replace(",", " ")


def strokes_as_data(strokes_mm: Sequence[FloatArray]) -> str:
    """As `lines_as_data` of lines of several lengths.

    Args:
        strokes_mm: Each of shape (k, 2), k above 0, rounded as they are to be written; no strokes give "".
    """
    if not strokes_mm:
        return ""
    points = lines_as_data(np.concatenate(strokes_mm)[np.newaxis])[1:].split("L")
    ends = [0, *accumulate(len(stroke) for stroke in strokes_mm)]
    return "".join("M" + "L".join(points[begin:end]) for begin, end in pairwise(ends))


def _is_plain(values: FloatArray) -> bool:
    """Whether Python writes every number without powers of ten."""
    size = np.abs(values)
    return bool((((size >= _LEAST_PLAIN) & (size < _MOST_PLAIN)) | (size == 0)).all())


def _json(values: FloatArray) -> str:
    return orjson.dumps(np.ascontiguousarray(values), option=orjson.OPT_SERIALIZE_NUMPY).decode()
