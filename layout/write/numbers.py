"""How coordinates are written: to a nanometre, the same in every file.

No cutter holds a nanometre, so nothing is lost; and the last bits of a double, which the
mathematics libraries of two machines may round apart, stay out of the files.
"""

import numpy as np

from layout.mechanics.arrays import FloatArray

DECIMALS_MM = 6  # of a millimetre: a nanometre
DECIMALS_DEG = 8  # of a degree: a tenth of a nanometre on a disc of a metre
DECIMALS_RADIUS = 12  # of a millimetre, where an arc is given by its radius: see layout.write.svg_paths
DECIMALS_BULGE = 12  # a bulge is a ratio: the arc then holds its radius better than the points


def rounded(values: FloatArray, decimals: int = DECIMALS_MM) -> FloatArray:
    """The values to so many decimals, without negative zeros; same shape, empty in, empty out."""
    return np.asarray(np.round(values, decimals) + 0.0, dtype=np.float64)


def number(value: float, decimals: int = DECIMALS_MM) -> str:
    """The value to so many decimals as plain text, never in powers of ten: 1.5 -> "1.5", -0.0 -> "0"."""
    text = f"{value:.{decimals}f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text
