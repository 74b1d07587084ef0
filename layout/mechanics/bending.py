"""A 90° fold: the flat sheet that goes into it, and how far to bend so that it stands at 90° when let go.

DIN 6935: k = 0.65 + 0.5·log10(r/s), 1 from r/s = 5 on; the neutral fibre lies k·s/2 from the
inside. The formula reaches 0 at r/s = 0.05 and is clamped there.
"""

import math


def neutral_fibre_factor(inside_radius_mm: float, thickness_mm: float) -> float:
    """The factor k of DIN 6935, clamped to [0, 1]."""
    return min(max(0.65 + 0.5 * math.log10(inside_radius_mm / thickness_mm), 0.0), 1.0)


def bend_allowance_mm(inside_radius_mm: float, thickness_mm: float, bend_rad: float = math.pi / 2) -> float:
    """Length of flat sheet that goes into a bend: φ·(r + k·s/2)."""
    k = neutral_fibre_factor(inside_radius_mm, thickness_mm)
    return bend_rad * (inside_radius_mm + k * thickness_mm / 2)


def over_bend_rad(opens_rad: float, bend_rad: float = math.pi / 2) -> float:
    """The angle a fold is bent to, so that it stands at the wanted one once it is let go.

    What it opens by was measured on a fold of about that angle, and changes little over the few degrees more
    (common practice: a trial piece, then the same sheet and the same tool).

    Args:
        opens_rad: By how much the fold opens again.
        bend_rad: The angle it is to stand at.
    """
    return bend_rad + opens_rad
