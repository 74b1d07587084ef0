"""The hits of a press on one disc: where they strike, what must be struck first, and in what order.

Hits of the blank's own holes stand in layout.mechanics.hole_hits.
"""

import math
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from layout.documents.cutter import Cutter, Tool
from layout.documents.making import Feeds, Foot, Press
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.hit_order import shortest_order
from layout.mechanics.projection import Pattern, fitting_tool
from layout.mechanics.spacing import core_geometries
from layout.mechanics.table import Table, table_of
from layout.mechanics.turning import Turning

GRAIN_MM2 = 1e-6  # mm²; less than this of two areas in common is rounding


def take_up_rad(cutter: Cutter) -> float:
    """How far below an angle the press's table goes first; 0 where it may come onto it from either side."""
    press = cutter.press or Press()
    return math.radians(press.take_up_deg) if press.turns_one_way else 0.0


def press_table(cutter: Cutter, radius_mm: FloatArray, forward_rad: FloatArray) -> Table:
    """Strikes as the press's table and slide have to reach them, by the speeds stated.

    Args:
        cutter: The press.
        radius_mm: Shape (n,). Where the slide stands for each.
        forward_rad: Shape (n,). Its forward angle.
    """
    feeds = cutter.feeds or Feeds()
    turn_deg_per_s = feeds.turn_deg_per_s
    return table_of(
        frozen_floats(radius_mm),
        frozen_floats(forward_rad),
        take_up_rad=take_up_rad(cutter),
        turn_rad_per_s=None if turn_deg_per_s is None else math.radians(turn_deg_per_s),
        slide_mm_per_s=feeds.slide_mm_per_s,
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Hits:
    """A disc's hits, one for each projection, seen from the label side.

    Attributes:
        movement: The movement the disc is for.
        cutter: The press.
        turning: For the direction of travel.
        pattern: The flat pattern every hit has.
        edge_radius_mm: Shape (n,). Track radius of each projection.
        edge_angle_rad: Shape (n,). Working-edge angle of each projection.
    """

    movement: Movement
    cutter: Cutter
    turning: Turning
    pattern: Pattern
    edge_radius_mm: FloatArray
    edge_angle_rad: FloatArray

    @property
    def press(self) -> Press:
        """What is stated of the press; where nothing is, its defaults."""
        return self.cutter.press or Press()

    @property
    def tool(self) -> Tool | None:
        """The tool of every hit; None where none fits."""
        return fitting_tool(self.movement, self.cutter)

    @property
    def take_up_rad(self) -> float:
        """How far below an angle the table goes first; 0 where it may come onto it from either side."""
        return take_up_rad(self.cutter)

    @property
    def at_mm(self) -> FloatArray:
        """Shape (n, 2). The strike points."""
        return self.placed_mm(np.array([[self.pattern.strike_u_mm, 0.0]]))[:, 0]

    @property
    def radius_mm(self) -> FloatArray:
        """Shape (n,). Where the slide stands for each hit: the strike point's distance from the centre."""
        return np.hypot(self.at_mm[:, 0], self.at_mm[:, 1])

    @property
    def forward_rad(self) -> FloatArray:
        """Shape (n,). Angles of the strike points, rising against the travel: what lies ahead is struck first.

        A tab stands at the front of its hit. Struck from the front backwards, the tool's foot comes down
        behind the tabs that stand already; the other way round it would stand on them sooner.
        """
        return self.turning.direction * np.arctan2(self.at_mm[:, 1], self.at_mm[:, 0])

    def placed_mm(self, points_mm: FloatArray) -> FloatArray:
        """Shape (n, k, 2). Points (k, 2) of the flat frame, for every hit."""
        placed = self.edge_radius_mm, self.edge_angle_rad, self.turning.direction
        return on_disc_mm(points_mm, *placed, self.pattern.strike_u_mm)

    def feet_on_formed(self) -> IntArray:
        """Shape (m, 2). Pairs (standing, struck): the tool's foot, at the second, would stand on the first's tab.

        None where the tool states no foot, or forms nothing.
        """
        tool = self.tool
        if tool is None or tool.foot is None or tool.makes != "lance" or not len(self.edge_angle_rad):
            return np.zeros((0, 2), dtype=np.int64)
        feet = self._feet(tool.foot)
        struck, standing = shapely.STRtree(self._tabs()).query(feet, predicate="intersects")
        pairs = np.column_stack([standing, struck]).astype(np.int64)[struck != standing]
        pairs = pairs[self.under_the_foot(pairs[:, 0], pairs[:, 1]) > 0]
        return np.asarray(pairs[np.lexsort((pairs[:, 1], pairs[:, 0]))], dtype=np.int64)

    def under_the_foot(self, standing: IntArray, struck: IntArray) -> FloatArray:
        """Shape (m,). The share of each standing tab, seen from above, that lies under the foot at a strike.

        Zeros where that is mere rounding, or the tool states no foot.
        """
        if self.tool is None or self.tool.foot is None:
            return np.zeros(len(standing))
        tabs, feet = self._tabs()[standing], self._feet(self.tool.foot)[struck]
        common_mm2 = shapely.area(shapely.intersection(tabs, feet))
        return np.asarray(np.where(common_mm2 > GRAIN_MM2, common_mm2 / shapely.area(tabs), 0.0))

    def _tabs(self) -> NDArray[np.object_]:
        return self._rectangles(-self.pattern.body_behind_mm, 0.0, self.movement.projection.width_mm / 2)

    def _feet(self, foot: Foot) -> NDArray[np.object_]:
        strike_mm = self.pattern.strike_u_mm
        return self._rectangles(strike_mm - foot.length_mm / 2, strike_mm + foot.length_mm / 2, foot.width_mm / 2)

    def _rectangles(self, from_u_mm: float, to_u_mm: float, half_mm: float) -> NDArray[np.object_]:
        corners = [(from_u_mm, -half_mm), (to_u_mm, -half_mm), (to_u_mm, half_mm), (from_u_mm, half_mm)]
        return core_geometries(self.placed_mm(np.array(corners)))

    def order(self) -> IntArray:
        """Shape (n,). The hits in the order struck.

        All projections of a disc are of one tool, so there is nothing to sort by tool. They are struck with
        little moving of table and slide, by the speeds stated. Where the tool's foot would stand on a
        neighbour formed before, and would not the other way round, they are struck the other way round.
        """
        pairs = {(one, two) for one, two in self.feet_on_formed().tolist()}
        first = sorted((two, one) for one, two in pairs if (two, one) not in pairs)
        return shortest_order(self.table(), np.array(first, dtype=np.int64).reshape(-1, 2))

    def table(self) -> Table:
        """The hits as the table and the slide have to reach them."""
        return press_table(self.cutter, self.radius_mm, self.forward_rad)
