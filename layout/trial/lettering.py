"""The marks of a trial piece as single strokes, each standing upright at its place."""

import math
from functools import cache

import numpy as np

from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.lettering import strokes_mm

LETTER_HEIGHT_MM = 1.8  # mm; ISO 3098 starts technical lettering at 1.8 mm


@cache
def text_strokes_mm(text: str) -> tuple[FloatArray, ...]:
    """The strokes of a text, capitals LETTER_HEIGHT_MM high, its base line at y = 0, centred on x = 0.

    Args:
        text: Printable ASCII; blanks alone give no strokes.
    """
    return strokes_mm(text, LETTER_HEIGHT_MM)


def half_width_mm(text: str) -> float:
    """Half of what a text measures along its line; 0 for blanks."""
    return max((float(np.abs(stroke[:, 0]).max()) for stroke in text_strokes_mm(text)), default=0.0)


def standing_at(text: str, radius_mm: float, angle_rad: float) -> tuple[FloatArray, ...]:
    """The strokes of a text whose base line stands square to the radius, its top away from the centre.

    Args:
        text: Printable ASCII.
        radius_mm: Of the middle of the base line.
        angle_rad: Of the same, as drawn; letters are never mirrored.
    """
    cos, sin = math.cos(angle_rad), math.sin(angle_rad)
    # Upwards is outwards, so a line reads clockwise.
    turn = np.array([(sin, -cos), (cos, sin)])
    return tuple(frozen_floats((stroke + np.array([0.0, radius_mm])) @ turn) for stroke in text_strokes_mm(text))
