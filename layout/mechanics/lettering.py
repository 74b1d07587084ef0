"""Single-stroke letters, as an engraving laser or a scribing tool draws them.

The letters are A. V. Hershey's simplex Roman, public domain, through the library Hershey-Fonts.
"""

from functools import cache

import numpy as np
from HersheyFonts import HersheyFonts

from layout.mechanics.arrays import FloatArray, frozen_floats

_FACE = "futural"  # the library's name for simplex Roman


@cache
def _font() -> HersheyFonts:
    return HersheyFonts(load_default_font=_FACE)


def strokes_mm(text: str, letter_height_mm: float) -> tuple[FloatArray, ...]:
    """The strokes of a line of text, its base line at y = 0, centred on x = 0, reading towards +x.

    Args:
        text: Printable ASCII; what the font lacks is left out.
        letter_height_mm: Height of capitals.

    Returns:
        Open strokes, each (k, 2) with k of 2 or more; none for blanks.
    """
    options = _font().render_options
    base, cap = float(options.base_line), float(options.cap_line)
    scale = letter_height_mm / (base - cap)
    # The font's y runs down from its own middle.
    strokes = [
        np.array([(x * scale, (base - y) * scale) for x, y in stroke]) for stroke in _font().strokes_for_text(text)
    ]
    if not strokes:
        return ()
    ends = np.concatenate(strokes)[:, 0]
    middle = np.array([(float(ends.min()) + float(ends.max())) / 2, 0.0])
    return tuple(frozen_floats(stroke - middle) for stroke in strokes)
