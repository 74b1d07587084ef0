"""Single-stroke letters, as an engraving laser or a scribing tool draws them.

The letters are A. V. Hershey's simplex Roman, public domain, through the library Hershey-Fonts.
"""

from collections.abc import Iterable
from functools import cache, lru_cache
from itertools import accumulate, pairwise

import numpy as np
from HersheyFonts import HersheyFonts

from layout.mechanics.arrays import FloatArray, frozen_floats

TEXTS_KEPT = 512  # texts; those of a few drawings, so that each is read from the font once for all its heights
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
    points, counts = _written(text)
    if not len(points):
        return ()
    options = _font().render_options
    points_mm = points * (letter_height_mm / (float(options.base_line) - float(options.cap_line)))
    middle_mm = (float(points_mm[:, 0].min()) + float(points_mm[:, 0].max())) / 2
    return parted(points_mm - np.array([middle_mm, 0.0]), counts)


def parted(points: FloatArray, counts: Iterable[int]) -> tuple[FloatArray, ...]:
    """Strokes out of the points of all of them, shape (n, 2), by how many points each has."""
    frozen = frozen_floats(points)
    return tuple(frozen[begin:end] for begin, end in pairwise(accumulate(counts, initial=0)))


@lru_cache(maxsize=TEXTS_KEPT)
def _written(text: str) -> tuple[FloatArray, tuple[int, ...]]:
    """The points of all strokes of a text, shape (n, 2), in the font's own units, and how many each stroke has."""
    base = float(_font().render_options.base_line)
    strokes = list(_font().strokes_for_text(text))
    # The font's y runs down from its own middle.
    points = np.array([(x, base - y) for stroke in strokes for x, y in stroke], dtype=np.float64).reshape(-1, 2)
    return frozen_floats(points), tuple(map(len, strokes))
