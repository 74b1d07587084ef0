"""The net section: how much metal the openings leave along a ray from the centre, and along a ring about it.

A disc is weakest where most of it is cut away along one line. Every opening is cut into strips
between two pieces of its outline, each rising or falling throughout, so that over a stretch without
a corner an opening covers no less than what lies between the ends there and no more than the least
and the greatest of them. Stretches that may hold the most cut are halved until no more can be hidden in
them than LINE_GRAIN_MM or RING_GRAIN_RAD. Openings that overlap are counted once.
"""

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
import shapely

from layout.documents.feature import Feature
from layout.mechanics.arrays import FloatArray, IntArray, counted_out
from layout.mechanics.blank import feature_core_mm
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.polar import Curves, Outline, Strips, outline_of
from layout.mechanics.projection import HALF_CIRCLE_BULGE, Pattern
from layout.mechanics.turning import FULL_TURN_RAD, Turning

LINE_GRAIN_MM = 1e-3  # mm; a micrometre, a fiftieth of what a fine cutter holds
RING_GRAIN_RAD = 1e-5  # rad; the same at a radius of 100 mm
_SLIVER = 1e-9  # mm or rad; a stretch between two corners below it is rounding
_AT_ONCE = 256  # stretches looked at in one go: bounds the memory


@dataclass(frozen=True, slots=True, kw_only=True)
class MetalLeft:
    """The least metal left in the band of the tracks.

    Attributes:
        from_mm: Where the band begins: the innermost edge that an opening on the innermost track has.
        to_mm: Where it ends: the outermost edge of one on the outermost track. Neither depends on the tracks used.
        line_mm: The least metal left on a ray, over the band.
        line_angle_rad: Where on the disc, in [0, 2π).
        ring_mm: What is left, along it, of the ring that keeps the least share of itself.
        ring_radius_mm: Its radius.
    """

    from_mm: float
    to_mm: float
    line_mm: float
    line_angle_rad: float
    ring_mm: float
    ring_radius_mm: float

    @property
    def line_share(self) -> float:
        """The least metal left on a ray as a share of the band."""
        return self.line_mm / (self.to_mm - self.from_mm)

    @property
    def ring_share(self) -> float:
        """The least share of a ring that is left."""
        return self.ring_mm / (FULL_TURN_RAD * self.ring_radius_mm)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Cover:
    """Strips of all openings, over stretches of angle or of radius.

    Attributes:
        from_to: Shape (n, 2). Where each lies; in the order in which they begin.
        low: Shape (n,). Where it begins there.
        high: Shape (n,). Where it ends there.
        unit: Of from_to. Over angles ("rad") what is covered is a length on a ray; over radii ("mm") it is
            an angle, which begins again after a turn.
        band_mm: From where to where what is covered counts on a ray.
    """

    from_to: FloatArray
    low: Curves
    high: Curves
    unit: Literal["rad", "mm"]
    band_mm: tuple[float, float]

    def covered(self, stretch: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Shapes (k,). What is covered at either end of stretches without a corner inside, and the most in between."""
        which, strip = self._over(stretch.mean(axis=1))
        still = np.zeros(len(strip))
        low, high = self.low.of(strip, turned_rad=still), self.high.of(strip, turned_rad=still)
        first, last = stretch[which, 0], stretch[which, 1]
        ends = [(self._crossing(low, at), self._crossing(high, at)) for at in (first, last)]
        widest = np.minimum(ends[0][0], ends[1][0]), np.maximum(ends[0][1], ends[1][1])
        at_first, at_last, most = (self._union(which, *each, len(stretch)) for each in (*ends, widest))
        # Between two parallel straight pieces the width on a ray rises or falls throughout too, so at most it is
        # what it is at an end; the sum of the widths is never below what they cover together.
        parallel = np.abs(low.direction_rad - high.direction_rad) < _SLIVER
        parallel &= np.isnan(low.round_mm) & np.isnan(high.round_mm) & (self.unit == "rad")
        end_mm = np.maximum(ends[0][1] - ends[0][0], ends[1][1] - ends[1][0])
        widths = np.where(parallel, end_mm, widest[1] - widest[0])
        return at_first, at_last, np.minimum(most, np.bincount(which, widths, len(stretch)))

    def _crossing(self, curves: Curves, at: FloatArray) -> FloatArray:
        crossing = curves.crossing(at, self.unit)
        return np.clip(crossing, *self.band_mm) if self.unit == "rad" else crossing

    def _over(self, place: FloatArray) -> tuple[IntArray, IntArray]:
        """Pairs of a place and a strip that lies over it; strips are in the order in which they begin."""
        first = np.searchsorted(self.from_to[:, 0], place - self.longest)
        count = np.searchsorted(self.from_to[:, 0], place) - first
        which, strip = counted_out(first, count)
        over = self.from_to[strip, 1] > place[which]
        return which[over], strip[over]

    @property
    def longest(self) -> float:
        """Of all strips."""
        return float(np.ptp(self.from_to, axis=1).max())

    def most_alone(self) -> FloatArray:
        """Shape (n,). The most each strip covers anywhere."""
        lows = [self._crossing(self.low, self.from_to[:, end]) for end in (0, 1)]
        highs = [self._crossing(self.high, self.from_to[:, end]) for end in (0, 1)]
        return np.asarray(np.maximum(*highs) - np.minimum(*lows))

    def _union(self, group: IntArray, low: FloatArray, high: FloatArray, count: int) -> FloatArray:
        """Shape (count,). Length of the union of the stretches of each group."""
        if not len(group):
            return np.zeros(count)
        if self.unit == "mm":
            start = np.mod(low, FULL_TURN_RAD)
            past = start + (high - low) - FULL_TURN_RAD
            over = past > 0
            group = np.concatenate([group, group[over]])
            low = np.concatenate([start, np.zeros(np.count_nonzero(over))])
            high = np.concatenate([np.minimum(past, 0.0) + FULL_TURN_RAD, past[over]])
        order = np.lexsort((low, group))
        group, low, high = group[order], low[order], high[order]
        # The groups are moved apart, so that one running maximum serves them all.
        moved = group * (float(high.max() - low.min()) + 1.0)
        reach = np.maximum.accumulate(high + moved)
        before = np.concatenate([[-np.inf], reach[:-1]])
        added = np.maximum(reach - np.maximum(low + moved, before), 0.0)
        return np.asarray(np.bincount(group, added, count), dtype=np.float64)


def metal_left(
    pattern: Pattern,
    turning: Turning,
    track_index: IntArray,
    edge_angle_rad: FloatArray,
    features: tuple[Feature, ...] = (),
) -> MetalLeft | None:
    """The least metal the openings leave in the band of the tracks, within LINE_GRAIN_MM and RING_GRAIN_RAD.

    None where there are no openings, or where one reaches over the centre of the disc.

    Args:
        pattern: The openings' pattern; its `opening` is what is counted, round ends included.
        turning: The movement's turning.
        track_index: Shape (n,). Place of each opening's track, from 0.
        edge_angle_rad: Shape (n,). Working-edge angle of each opening.
        features: The blank's holes, slots and notches: what of them lies in the band is missing too.
    """
    openings = [
        (_on_track(pattern, turning, index), edge_angle_rad[track_index == index])
        for index in np.unique(track_index).tolist()
    ]
    found = [(outline, angles_rad) for outline, angles_rad in openings if outline is not None]
    innermost, outermost = (_on_track(pattern, turning, index) for index in (0, len(turning.radius_mm) - 1))
    if not found or len(found) < len(openings) or innermost is None or outermost is None:
        return None
    from_mm, to_mm = innermost.reach_mm[0], outermost.reach_mm[1]
    for feature in features:
        outline = _of_feature(feature)
        if outline is not None and outline.reach_mm[0] < to_mm and outline.reach_mm[1] > from_mm:
            found.append((outline, np.radians(feature.angles_deg)))
    line_mm, line_angle_rad = _most_covered(_rays(found, (from_mm, to_mm)), (0.0, FULL_TURN_RAD), LINE_GRAIN_MM)
    ring_rad, ring_radius_mm = _most_covered(_rings(found, (from_mm, to_mm)), (from_mm, to_mm), RING_GRAIN_RAD)
    return MetalLeft(
        from_mm=from_mm,
        to_mm=to_mm,
        line_mm=max(to_mm - from_mm - line_mm, 0.0),
        line_angle_rad=math.fmod(line_angle_rad, FULL_TURN_RAD),
        ring_mm=max(FULL_TURN_RAD - ring_rad, 0.0) * ring_radius_mm,
        ring_radius_mm=ring_radius_mm,
    )


def _on_track(pattern: Pattern, turning: Turning, index: int) -> Outline | None:
    radius_mm = turning.radius_mm[[index]]
    [points_mm] = on_disc_mm(pattern.opening.points_mm, radius_mm, np.zeros(1), turning.direction, pattern.strike_u_mm)
    # An anticlockwise disc turns the frame over, and with it the way every bulge bends.
    return outline_of(points_mm, pattern.opening.bulges * turning.direction)


def _of_feature(feature: Feature) -> Outline | None:
    """The outline of a feature where it lies at 0 degrees: a rectangle, or a line grown by a radius."""
    core, round_mm = feature_core_mm(feature, 0.0)
    points_mm = shapely.get_coordinates(core)
    if not round_mm:
        return outline_of(points_mm[:-1], np.zeros(len(points_mm) - 1))
    first, last = points_mm[0], points_mm[-1]
    length_mm = float(np.hypot(*(last - first)))
    along = (last - first) / length_mm if length_mm else np.array([1.0, 0.0])
    across = round_mm * np.array([-along[1], along[0]])
    corners = np.array([first - across, last - across, last + across, first + across])
    return outline_of(corners, np.array([0.0, HALF_CIRCLE_BULGE, 0.0, HALF_CIRCLE_BULGE]))


def _rays(outlines: list[tuple[Outline, FloatArray]], band_mm: tuple[float, float]) -> _Cover:
    """What lies on rays: strips over angle, those that reach past the full turn given a second time before it."""
    parts = []
    for outline, angles_rad in outlines:
        strips = outline.by_angle
        strip = np.tile(np.arange(len(strips.low)), len(angles_rad))
        turned_rad = np.repeat(angles_rad, len(strips.low))
        turned_rad = turned_rad - FULL_TURN_RAD * np.floor((strips.from_to[strip, 0] + turned_rad) / FULL_TURN_RAD)
        past = strips.from_to[strip, 1] + turned_rad > FULL_TURN_RAD
        strip = np.concatenate([strip, strip[past]])
        turned_rad = np.concatenate([turned_rad, turned_rad[past] - FULL_TURN_RAD])
        parts.append((outline.curves, strips, strip, turned_rad, turned_rad))
    return _joined(parts, band_mm)


def _rings(outlines: list[tuple[Outline, FloatArray]], band_mm: tuple[float, float]) -> _Cover:
    """What lies on rings: strips over radius."""
    parts = []
    for outline, angles_rad in outlines:
        strips = outline.by_radius
        strip = np.tile(np.arange(len(strips.low)), len(angles_rad))
        turned_rad = np.repeat(angles_rad, len(strips.low))
        parts.append((outline.curves, strips, strip, turned_rad, np.zeros(len(strip))))
    return _joined(parts, band_mm)


def _joined(
    parts: list[tuple[Curves, Strips, IntArray, FloatArray, FloatArray]], band_mm: tuple[float, float]
) -> _Cover:
    """The strips of all tracks: each with its curves, its strips, which of them, turned by how much, and moved."""
    from_to = np.concatenate([strips.from_to[strip] + moved[:, None] for _, strips, strip, _, moved in parts])
    low = [curves.of(strips.low[strip], turned_rad=turned) for curves, strips, strip, turned, _ in parts]
    high = [curves.of(strips.high[strip], turned_rad=turned) for curves, strips, strip, turned, _ in parts]
    order = np.argsort(from_to[:, 0], kind="stable")
    still = np.zeros(len(order))
    return _Cover(
        from_to=from_to[order],
        low=Curves.joined(low).of(order, turned_rad=still),
        high=Curves.joined(high).of(order, turned_rad=still),
        unit=parts[0][1].unit,
        band_mm=band_mm,
    )


def _most_covered(cover: _Cover, whole: tuple[float, float], grain: float) -> tuple[float, float]:
    """The most that is covered anywhere, within the grain, and where."""
    stretch, most = _stretches(cover, whole)
    best, place = 0.0, whole[0]
    while True:
        live = (most > best + grain) & (stretch[:, 1] - stretch[:, 0] > _SLIVER)
        if not live.any():
            return best, place
        stretch, most = stretch[live], most[live]
        # Rounded, so that of places alike but for the last digit the first is told on every machine.
        order = np.argsort(-np.rint(most / grain), kind="stable")
        now, later = order[:_AT_ONCE], order[_AT_ONCE:]
        at_first, at_last, bound = cover.covered(stretch[now])
        for covered, at in ((at_first, stretch[now, 0]), (at_last, stretch[now, 1])):
            top = int(np.argmax(covered > covered.max() - _SLIVER))
            if covered[top] > best + _SLIVER:
                best, place = float(covered[top]), float(at[top])
        middle = stretch[now].mean(axis=1)
        halves = np.concatenate([np.stack([stretch[now, 0], middle], 1), np.stack([middle, stretch[now, 1]], 1)])
        stretch = np.concatenate([stretch[later], halves])
        most = np.concatenate([most[later], bound, bound])


def _stretches(cover: _Cover, whole: tuple[float, float]) -> tuple[FloatArray, FloatArray]:
    """The stretches between corners, and what is covered in each at most: every strip there at its most."""
    from_to = np.clip(cover.from_to, *whole)
    stops, place = np.unique(from_to, return_inverse=True)
    place = place.reshape(from_to.shape)
    alone = cover.most_alone()
    change = np.bincount(place[:, 0], alone, len(stops)) - np.bincount(place[:, 1], alone, len(stops))
    stretch = np.stack([stops[:-1], stops[1:]], axis=1)
    # Sums and differences of some thousand lengths leave rounding far below the grain.
    return stretch, np.cumsum(change)[:-1]
