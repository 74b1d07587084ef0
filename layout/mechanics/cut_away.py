"""What openings cut away along rays from the centre, and along rings about it."""

from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray, counted_out
from layout.mechanics.most_covered import SLIVER, Over, stretches_between
from layout.mechanics.polar import Outlines
from layout.mechanics.turning import FULL_TURN_RAD


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CutAway:
    """Outlines of openings, each of which lies on the disc at several angles.

    Attributes:
        outlines: Each as it lies at an angle of 0.
        outline: Shape (n,). Which of them each opening has, rising.
        angle_rad: Shape (n,). Where it lies.
        band_mm: From where to where metal counts.
    """

    outlines: Outlines
    outline: IntArray
    angle_rad: FloatArray
    band_mm: tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Spans:
    """From where to where strips lie.

    Attributes:
        from_to: Shape (n, 2).
        by_begin: Shape (n,). Their places in the order in which they begin.
        begins: Shape (n,). Where they begin, in that order.
        longest: Of all of them.
    """

    from_to: FloatArray
    by_begin: IntArray
    begins: FloatArray
    longest: float

    def over(self, place: FloatArray) -> tuple[IntArray, IntArray]:
        """Pairs of a place and a strip that lies over it, by place, then in the order in which the strips begin."""
        first = np.searchsorted(self.begins, place - self.longest)
        which, at = counted_out(first, np.searchsorted(self.begins, place) - first)
        strip = self.by_begin[at]
        over = self.from_to[strip, 1] > place[which]
        which, strip = which[over], strip[over]
        order = np.lexsort((strip, self.from_to[strip, 0], which))
        return which[order], strip[order]


def _spans(from_to: FloatArray) -> _Spans:
    by_begin = np.argsort(from_to[:, 0])
    return _Spans(
        from_to=from_to,
        by_begin=by_begin,
        begins=from_to[by_begin, 0],
        longest=float((from_to[:, 1] - from_to[:, 0]).max()),
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rays:
    """What is cut away along rays, in mm; stretches are of angles.

    Attributes:
        cut_away: The openings.
        strip: Shape (e,). Every strip of every opening; one that reaches past the full turn is there twice.
        turned_rad: Shape (e,). By how much it is turned.
        spans: Where these strips lie then.
    """

    cut_away: CutAway
    strip: IntArray
    turned_rad: FloatArray
    spans: _Spans

    @property
    def whole(self) -> tuple[float, float]:
        """A turn."""
        return 0.0, FULL_TURN_RAD

    def stretches(self) -> tuple[FloatArray, FloatArray]:
        """As of every Cover. A strip covers as much wherever it is turned to."""
        strips, curves = self.cut_away.outlines.by_angle, self.cut_away.outlines.curves
        low, high = curves.of(strips.low), curves.of(strips.high)
        lows, highs = (
            [np.clip(edge.radius_mm(at), *self.cut_away.band_mm) for at in strips.from_to.T] for edge in (low, high)
        )
        most_mm = np.maximum(*highs) - np.minimum(*lows)
        return stretches_between(self.spans.from_to, most_mm[self.strip], self.whole)

    def over(self, stretch: FloatArray) -> Over:
        """As of every Cover."""
        which, entry = self.spans.over(stretch.mean(axis=1))
        strips, curves = self.cut_away.outlines.by_angle, self.cut_away.outlines.curves
        low, high = (curves.of(edges[self.strip[entry]]) for edges in (strips.low, strips.high))
        lows, highs = (
            np.clip(
                [edge.radius_mm(at, turned_rad=self.turned_rad[entry]) for at in stretch[which].T],
                *self.cut_away.band_mm,
            )
            for edge in (low, high)
        )
        # Between two parallel straight pieces the width on a ray rises or falls throughout, as each of them does.
        parallel = np.abs(low.direction_rad - high.direction_rad) < SLIVER
        return Over(
            count=len(stretch),
            which=which,
            low=lows,
            high=highs,
            one_way=parallel & np.isnan(low.round_mm) & np.isnan(high.round_mm),
            is_ring=False,
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rings:
    """What is cut away along rings, in radians; stretches are of radii.

    All openings of one outline are cut alike by a ring, so a strip stands for that of each of them.

    Attributes:
        cut_away: The openings.
        first: Shape (t,). The first opening of each outline.
        count: Shape (t,). How many it has, maybe none; they follow each other.
        strip: Shape (e,). The strips of the outlines that openings have.
        spans: Where these strips lie.
    """

    cut_away: CutAway
    first: IntArray
    count: IntArray
    strip: IntArray
    spans: _Spans

    @property
    def whole(self) -> tuple[float, float]:
        """The band."""
        return self.cut_away.band_mm

    def stretches(self) -> tuple[FloatArray, FloatArray]:
        """As of every Cover."""
        strips, curves = self.cut_away.outlines.by_radius, self.cut_away.outlines.curves
        low, high = (curves.of(edges[self.strip]) for edges in (strips.low, strips.high))
        lows, highs = ([edge.direction_rad + edge.apart_rad(at) for at in self.spans.from_to.T] for edge in (low, high))
        most_rad = np.maximum(*highs) - np.minimum(*lows)
        times = self.count[strips.outline[self.strip]]
        return stretches_between(self.spans.from_to, most_rad * times, self.whole)

    def over(self, stretch: FloatArray) -> Over:
        """As of every Cover."""
        pair_which, entry = self.spans.over(stretch.mean(axis=1))
        strips, curves = self.cut_away.outlines.by_radius, self.cut_away.outlines.curves
        strip = self.strip[entry]
        outline = strips.outline[strip]
        pair, opening = counted_out(self.first[outline], self.count[outline])
        turned_rad = self.cut_away.angle_rad[opening]
        ends = []
        for edges in (strips.low, strips.high):
            edge = curves.of(edges[strip])
            direction_rad = edge.direction_rad[pair] + turned_rad
            ends.append(np.stack([direction_rad + edge.apart_rad(at)[pair] for at in stretch[pair_which].T]))
        return Over(
            count=len(stretch),
            which=pair_which[pair],
            low=ends[0],
            high=ends[1],
            one_way=np.zeros(len(pair), dtype=np.bool_),
            is_ring=True,
        )


def rays_of(cut_away: CutAway) -> Rays:
    """What is cut away along rays."""
    strips = cut_away.outlines.by_angle
    outlines = np.arange(len(cut_away.outlines.reach_mm))
    first = np.searchsorted(strips.outline, outlines)
    count = np.searchsorted(strips.outline, outlines, side="right") - first
    opening, strip = counted_out(first[cut_away.outline], count[cut_away.outline])
    angle_rad = cut_away.angle_rad[opening]
    turned_rad = angle_rad - FULL_TURN_RAD * np.floor((strips.from_to[strip, 0] + angle_rad) / FULL_TURN_RAD)
    past = strips.from_to[strip, 1] + turned_rad > FULL_TURN_RAD
    strip = np.concatenate([strip, strip[past]])
    turned_rad = np.concatenate([turned_rad, turned_rad[past] - FULL_TURN_RAD])
    spans = _spans(strips.from_to[strip] + turned_rad[:, None])
    return Rays(cut_away=cut_away, strip=strip, turned_rad=turned_rad, spans=spans)


def rings_of(cut_away: CutAway) -> Rings:
    """What is cut away along rings."""
    outlines = np.arange(len(cut_away.outlines.reach_mm))
    first = np.searchsorted(cut_away.outline, outlines)
    count = np.searchsorted(cut_away.outline, outlines, side="right") - first
    strips = cut_away.outlines.by_radius
    strip = np.flatnonzero(count[strips.outline])
    return Rings(cut_away=cut_away, first=first, count=count, strip=strip, spans=_spans(strips.from_to[strip]))
