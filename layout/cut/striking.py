"""The order in which a press strikes, and what it travels."""

from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.hits import take_up_rad
from layout.mechanics.hole_hits import HoleHits, hole_hits
from layout.mechanics.table import forward_angles_rad, table_moves
from layout.place.disc import Disc


@dataclass(frozen=True, slots=True, kw_only=True)
class StrikePath:
    """What a press strikes, and travels from its first hit to its last.

    Attributes:
        hit_count: Strikes: on the blank's own holes, and one for each projection, where a tool makes them.
        turned_rad: What its table turns, both ways counted, and what it goes back and on again to come
            onto an angle from one side.
        slid_mm: What its slide moves, both ways counted.
        tool_change_count: Tools taken up after the first.
    """

    hit_count: int
    turned_rad: float
    slid_mm: float
    tool_change_count: int


def hit_order(disc: Disc) -> IntArray:
    """Shape (n,). Projection indices in the order of their hits; none for a disc without projections.

    All projections of a disc are made with one tool, so nothing is sorted by tool. What decides is the
    little moving of table and slide together, by the press's stated speeds. A press whose table has
    backlash (`turns_one_way`) comes onto every hit from one side (common practice), and each move back
    is counted with what that takes. Where the foot of the tool would stand on a formed neighbour, the
    two are struck the other way round if that helps.
    """
    return disc.hits.order()


def struck_holes(disc: Disc) -> tuple[HoleHits, ...]:
    """The hits on the blank's own holes, tool by tool, in the order struck; none on a laser.

    They come before all projections, so formed hits are last and no hole is struck beside formed metal:
    no foot of a hole's tool can stand on a tab (common practice: formed hits last).
    """
    return hole_hits(disc.movement, disc.cutter, disc.turning.direction)


def strike_path(disc: Disc, order: IntArray, struck: tuple[HoleHits, ...]) -> StrikePath:
    """What is struck, and what table and slide travel from hit to hit; fewer than two hits move nothing.

    The first tool is taken to be in the press already. Projections no tool makes are not struck.

    Args:
        disc: The disc, for a press.
        order: Shape (n,). Projection indices in the order of the hits.
        struck: The hits on its blank's own holes, as `struck_holes` gives them.
    """
    groups: list[FloatArray] = [hits.at_mm for hits in struck]
    if disc.pattern.tool and len(order):
        groups.append(disc.hits.at_mm[order])
    at_mm = np.concatenate([np.zeros((0, 2)), *groups])
    forward_rad = forward_angles_rad(at_mm, disc.turning.direction)
    moves = table_moves(forward_rad, take_up_rad=take_up_rad(disc.cutter))
    return StrikePath(
        hit_count=len(at_mm),
        turned_rad=moves.turned_rad,
        slid_mm=float(np.abs(np.diff(np.hypot(at_mm[:, 0], at_mm[:, 1]))).sum()),
        tool_change_count=max(len(groups) - 1, 0),
    )
