"""The hits of a press on one disc: where they strike, what must be struck first, and in what order."""

import math
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from layout.documents.cutter import Cutter, Tool
from layout.documents.making import Feeds, Press
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.hit_order import shortest_order
from layout.mechanics.projection import Pattern, fitting_tool
from layout.mechanics.table import Table, table_of
from layout.mechanics.turning import Turning

GRAIN_MM2 = 1e-6  # mm²; less than this of two areas in common is rounding


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
        return on_disc_mm(points_mm, self.edge_radius_mm, self.edge_angle_rad, self.turning.direction)

    def feet_on_formed(self) -> IntArray:
        """Shape (m, 2). Pairs (standing, struck): the tool's foot, at the second, would stand on the first's tab.

        None where the tool states no foot, or forms nothing.
        """
        tool = self.tool
        if tool is None or tool.foot is None or tool.makes != "lance" or not len(self.edge_angle_rad):
            return np.zeros((0, 2), dtype=np.int64)
        half_mm = (tool.tab_width_mm or tool.footprint_width_mm) / 2
        tabs = self._rectangles(-self.pattern.body_behind_mm, 0.0, half_mm)
        half_foot_mm, strike_mm = tool.foot.length_mm / 2, self.pattern.strike_u_mm
        feet = self._rectangles(strike_mm - half_foot_mm, strike_mm + half_foot_mm, tool.foot.width_mm / 2)
        struck, standing = shapely.STRtree(tabs).query(feet, predicate="intersects")
        apart = struck != standing
        struck, standing = struck[apart], standing[apart]
        under = shapely.area(shapely.intersection(tabs[standing], feet[struck])) > GRAIN_MM2
        pairs = np.column_stack([standing[under], struck[under]]).astype(np.int64)
        return pairs[np.lexsort((pairs[:, 1], pairs[:, 0]))]

    def _rectangles(self, from_u_mm: float, to_u_mm: float, half_mm: float) -> NDArray[np.object_]:
        corners = [(from_u_mm, -half_mm), (to_u_mm, -half_mm), (to_u_mm, half_mm), (from_u_mm, half_mm)]
        return np.asarray(shapely.polygons(self.placed_mm(np.array(corners))), dtype=np.object_)

    def order(self) -> IntArray:
        """Shape (n,). The hits in the order struck.

        All hits of a disc are of one tool, so there is nothing to sort by tool. They are struck with the
        least moving of table and slide, by the speeds stated. Where the tool's foot would stand on a
        neighbour formed before, and would not the other way round, they are struck the other way round.
        """
        pairs = {(one, two) for one, two in self.feet_on_formed().tolist()}
        first = sorted((two, one) for one, two in pairs if (two, one) not in pairs)
        return shortest_order(self.table(), np.array(first, dtype=np.int64).reshape(-1, 2))

    def table(self) -> Table:
        """The hits as the table and the slide have to reach them."""
        feeds = self.cutter.feeds or Feeds()
        turn_deg_per_s = feeds.turn_deg_per_s
        return table_of(
            frozen_floats(self.radius_mm),
            frozen_floats(self.forward_rad),
            one_way=self.press.turns_one_way,
            turn_rad_per_s=None if turn_deg_per_s is None else math.radians(turn_deg_per_s),
            slide_mm_per_s=feeds.slide_mm_per_s,
        )
