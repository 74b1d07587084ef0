"""Single-stroke letters, as an engraving laser or a scribing tool draws them.

The letters are A. V. Hershey's simplex Roman, public domain, through the library Hershey-Fonts.
"""

from collections.abc import Iterator
from functools import cache
from itertools import pairwise

import numpy as np
from HersheyFonts import HersheyFonts

from layout.mechanics.arrays import FloatArray, frozen_floats

_FACE = "futural"  # the library's name for simplex Roman
_LEAST_STROKE = 2  # points; one alone draws nothing


@cache
def _font() -> HersheyFonts:
    return HersheyFonts(load_default_font=_FACE)


def strokes_mm(text: str, letter_height_mm: float) -> tuple[FloatArray, ...]:
    """The strokes of a line of text, its base line at y = 0, centred on x = 0, reading towards +x.

    Args:
        text: Printable ASCII; what the font lacks is left out.
        letter_height_mm: Height of capitals.

    Returns:
        Open strokes, each (k, 2) with k of 2 or more and no two equal points running; none for blanks.
    """
    options = _font().render_options
    base, cap = float(options.base_line), float(options.cap_line)
    scale = letter_height_mm / (base - cap)
    # The font's y runs down from its own middle.
    strokes = [np.array([(x * scale, (base - y) * scale) for x, y in stroke]) for stroke in _drawn(text)]
    if not strokes:
        return ()
    ends = np.concatenate(strokes)[:, 0]
    middle = np.array([(float(ends.min()) + float(ends.max())) / 2, 0.0])
    return tuple(frozen_floats(stroke - middle) for stroke in strokes)


def _drawn(text: str) -> Iterator[list[tuple[int, int]]]:
    for stroke in _font().strokes_for_text(text):
        points = stroke[:1] + [after for before, after in pairwise(stroke) if after != before]
        if len(points) >= _LEAST_STROKE:
            yield points
