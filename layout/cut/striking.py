"""The order in which a press strikes, and what it travels."""

from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import IntArray
from layout.mechanics.table import table_moves
from layout.place.disc import Disc


@dataclass(frozen=True, slots=True, kw_only=True)
class StrikePath:
    """What a press travels from its first hit to its last.

    Attributes:
        turned_rad: What its table turns, both ways counted, and what it goes back and on again to come
            onto an angle from one side.
        slid_mm: What its slide moves, both ways counted.
        tool_change_count: Tools taken up after the first: none, since all hits of a disc are of one tool.
    """

    turned_rad: float
    slid_mm: float
    tool_change_count: int


def hit_order(disc: Disc) -> IntArray:
    """Shape (n,). Projection indices in the order of the hits; none for a disc without projections.

    All projections of a disc are made with one tool, so nothing is sorted by tool. What decides is the
    little moving of table and slide together, by the press's stated speeds. A press whose table has
    backlash (`turns_one_way`) comes onto every hit from one side (common practice), and each move back
    is counted with what that takes. Where the foot of the tool would stand on a formed neighbour, the
    two are struck the other way round if that helps. Holes are struck before formed hits, so formed
    hits are last; the plan of cutting sees to that.
    """
    return disc.hits.order()


def strike_path(disc: Disc, order: IntArray) -> StrikePath:
    """What table and slide travel from hit to hit in this order; zeros for fewer than two hits.

    Args:
        disc: The disc, for a press.
        order: Shape (n,). Projection indices in the order of the hits.
    """
    hits = disc.hits
    moves = table_moves(hits.forward_rad[order], take_up_rad=hits.take_up_rad)
    return StrikePath(
        turned_rad=moves.turned_rad,
        slid_mm=float(np.abs(np.diff(hits.radius_mm[order])).sum()),
        tool_change_count=0,
    )
