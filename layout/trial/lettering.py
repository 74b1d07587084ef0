"""The marks of a trial piece as single strokes, each standing upright at its place."""

import math
from functools import cache

import numpy as np
from HersheyFonts import HersheyFonts

from layout.mechanics.arrays import FloatArray, frozen_floats

LETTER_HEIGHT_MM = 1.8  # mm; ISO 3098 starts technical lettering at 1.8 mm
_FACE = "futural"  # the library's name for A. V. Hershey's simplex Roman, public domain


@cache
def text_strokes_mm(text: str) -> tuple[FloatArray, ...]:
    """The strokes of a text, capitals LETTER_HEIGHT_MM high, its base line at y = 0, centred on x = 0.

    Args:
        text: Printable ASCII; blanks alone give no strokes.
    """
    font = HersheyFonts(load_default_font=_FACE)
    heights = font.render_options
    scale = LETTER_HEIGHT_MM / (heights.base_line - heights.cap_line)
    drawn = [np.array(stroke, dtype=np.float64) for stroke in font.strokes_for_text(text)]
    if not drawn:
        return ()
    x = np.concatenate(drawn)[:, 0]
    # The library's y runs downwards.
    origin, flip = np.array([(x.min() + x.max()) / 2, heights.base_line]), np.array([scale, -scale])
    return tuple(frozen_floats((stroke - origin) * flip) for stroke in drawn)


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
