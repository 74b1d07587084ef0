"""The outline of a slot with round ends."""

import numpy as np

from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.projection import HALF_CIRCLE_BULGE


def obround_mm(length_mm: float, width_mm: float) -> tuple[FloatArray, FloatArray]:
    """A slot round (0, 0), anticlockwise: width_mm along x, length_mm along y, which must differ.

    Returns:
        Points, shape (4, 2), and DXF bulges, shape (4,).
    """
    end_mm = min(length_mm, width_mm) / 2
    straight_mm = max(length_mm, width_mm) / 2 - end_mm
    along = np.array([(end_mm, straight_mm), (-end_mm, straight_mm), (-end_mm, -straight_mm), (end_mm, -straight_mm)])
    bulges = frozen_floats([HALF_CIRCLE_BULGE, 0.0, HALF_CIRCLE_BULGE, 0.0])
    if length_mm < width_mm:  # longer across: a quarter turn back
        along = np.stack([along[:, 1], -along[:, 0]], axis=-1)
    return frozen_floats(along), bulges
