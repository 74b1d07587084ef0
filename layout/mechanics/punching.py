"""Force of a hit: what a tool shears, what that takes, and what pulls the punch out again.

F = L·t·τ: the sheared length, the sheet's thickness, its shear strength (any handbook of press work).
It holds for a sharp tool with a flat face; a dull edge takes 15 to 30 % more. Stripping takes a share
of it, mostly 5 to 20 %.
"""

import math

from layout.documents.cutter import Tool


def sheared_length_mm(tool: Tool) -> float:
    """The length of edge that one hit of the tool shears.

    A lance shears three sides of its footprint: both along the travel and the tab's free end; the
    fourth is where the tab bends. A slot or hole tool shears its whole outline, two straights and a circle.
    """
    length_mm, width_mm = tool.footprint_length_mm, tool.footprint_width_mm
    if tool.makes == "lance":
        return 2 * length_mm + width_mm
    return 2 * abs(length_mm - width_mm) + math.pi * min(length_mm, width_mm)


def cutting_force_n(length_mm: float, thickness_mm: float, shear_strength_n_per_mm2: float) -> float:
    """F = L·t·τ, in newtons; bending the tab of a lance is small beside it and not counted."""
    return length_mm * thickness_mm * shear_strength_n_per_mm2


def stripping_force_n(force_n: float, stripping_share: float) -> float:
    """What pulls the punch out: a share of the cutting force, in newtons."""
    return force_n * stripping_share


def press_force_n(force_n: float, stripping_share: float) -> float:
    """What the press must give: it cuts, and loads its stripper's springs in the same stroke."""
    return force_n + stripping_force_n(force_n, stripping_share)
