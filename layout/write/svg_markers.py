"""Findings on the disc: a ring at each one's place, and a badge with its number."""

import math
from collections.abc import Iterator
from dataclasses import dataclass

from svgwrite.base import Title
from svgwrite.container import Group
from svgwrite.shapes import Circle, Line

from layout.check.finding import Finding, Place
from layout.cut.plan import CutPlan
from layout.place.disc import Disc
from layout.write.svg_disc import CLIP
from layout.write.svg_page import Face, Page, short, words
from layout.write.svg_style import BLACK, LEVEL_STYLES, TEXT_SIZE, WHITE

RING, BADGE, _LINE, _LEADER = 1.7, 1.5, 0.32, 0.14  # hundredths of the page's width
_DIGITS_THAT_FIT = 1.7  # in a badge, at the size of the list
_WAYS = 16  # directions in which a badge may stand beside its ring
_REACHES = 24  # badges' widths away from its ring at most
_TOPMOST_DEG = 90.0
Spot = tuple[float, float]  # on the page, mm


@dataclass(frozen=True, slots=True, kw_only=True)
class Numbered:
    """A finding with its number: its place in layout.json's findings, from 1."""

    number: int
    finding: Finding


@dataclass(frozen=True, slots=True, kw_only=True)
class _Ring:
    """A finding's ring, on the page.

    Attributes:
        entry: The finding.
        centre_mm: Of the ring.
        radius_mm: Of the ring.
        is_track: Whether it runs along a whole track, not round one place.
    """

    entry: Numbered
    centre_mm: Spot
    radius_mm: float
    is_track: bool


def markers(shown: list[Numbered], disc: Disc, plan: CutPlan, page: Page) -> tuple[Group, Group]:
    """The rings of all findings that have a place on the picture, and the badges that go over them.

    A whole track is ringed as a circle. Badges keep clear of each other, and where there is room of
    the other rings; one that stands away from its ring is joined to it by a line. A finding whose
    place lies off the disc, beyond what is drawn of it, is only listed.
    """
    rings = [ring for entry in shown if (ring := _ring(entry, disc, plan, page)) is not None]
    ring_group, badge_group = (Group(id=name, fill="none", debug=False) for name in ("findings", "badges"))
    taken: list[Spot] = []
    for ring in rings:
        at_mm = _free_spot(ring, rings, taken, page)
        taken.append(at_mm)
        ring_group.add(_drawn(ring, page))
        near_mm = page.units_mm(RING + 2 * BADGE)
        if not ring.is_track and math.dist(at_mm, ring.centre_mm) > near_mm:
            ends = {"start": _text(ring.centre_mm), "end": _text(at_mm)}
            badge_group.add(Line(stroke=BLACK, stroke_width=page.units(_LEADER), debug=False, **ends))
    for ring, at_mm in zip(rings, taken, strict=True):
        badge_group.add(badge(ring.entry, at_mm, page, name=f"badge_{ring.entry.number}"))
    return ring_group, badge_group


def _ring(entry: Numbered, disc: Disc, plan: CutPlan, page: Page) -> _Ring | None:
    place = _polar(entry.finding.at, disc)
    if place is None or place[0] > page.disc_radius_mm + page.units_mm(CLIP):
        return None
    radius_mm, angle_deg = place
    if angle_deg is None:
        return _Ring(entry=entry, centre_mm=(0.0, 0.0), radius_mm=radius_mm, is_track=True)
    centre_mm = _at_mm(radius_mm, angle_deg, plan)
    return _Ring(entry=entry, centre_mm=centre_mm, radius_mm=page.units_mm(RING), is_track=False)


def _polar(at: Place, disc: Disc) -> tuple[float, float | None] | None:
    """Radius and angle, seen from the label side, of a finding's place; no angle for a whole track."""
    tracks = disc.turning.radius_mm
    if at.radius_mm is None and at.angle_deg is None and at.projections and at.projections[0] < disc.projection_count:
        first = at.projections[0]
        return float(disc.radius_mm[first]), math.degrees(disc.edge_angle_rad[first])
    if at.radius_mm is not None:
        return at.radius_mm, at.angle_deg
    if at.tracks and at.tracks[0] <= len(tracks):
        return float(tracks[at.tracks[0] - 1]), at.angle_deg
    if at.angle_deg is not None:
        return disc.movement.disc.outer_diameter_mm / 2, at.angle_deg
    return None


def _at_mm(radius_mm: float, angle_deg: float, plan: CutPlan) -> tuple[float, float]:
    """On the page, where y runs down: so a drawing from the label side is turned over, one from the star side not."""
    angle_rad = math.radians(angle_deg)
    down = -1 if plan.drawn_from == "label-side" else 1
    return radius_mm * math.cos(angle_rad), down * radius_mm * math.sin(angle_rad)


def _free_spot(ring: _Ring, rings: list[_Ring], taken: list[Spot], page: Page) -> Spot:
    """Where a badge stands: clear of the other badges and of all rings round one place, if there is room."""
    apart_mm, off_ring_mm = page.units_mm(2 * BADGE), page.units_mm(RING + 0.9 * BADGE)
    spots = list(_spots(ring, page))
    clear = [spot for spot in spots if all(math.dist(spot, other) >= apart_mm for other in taken)]
    places = [other.centre_mm for other in rings if not other.is_track]
    off_rings = (spot for spot in clear if all(math.dist(spot, place) >= off_ring_mm for place in places))
    return next(off_rings, next(iter(clear), spots[0]))


def _spots(ring: _Ring, page: Page) -> Iterator[Spot]:
    """Where a badge may stand, the best place first: along a track from the top; beside a ring, outwards first."""
    apart_mm, most_mm = page.units_mm(2 * BADGE), page.disc_radius_mm + page.units_mm(CLIP - BADGE)
    if ring.is_track:
        steps = max(int(math.tau * ring.radius_mm / apart_mm), 1)
        for step in range(steps):
            angle_rad = math.radians(-_TOPMOST_DEG) + math.tau * step / steps
            yield ring.radius_mm * math.cos(angle_rad), ring.radius_mm * math.sin(angle_rad)
        return
    (x_mm, y_mm), outwards_rad = ring.centre_mm, math.atan2(ring.centre_mm[1], ring.centre_mm[0])
    turns_rad = sorted((math.tau * way / _WAYS for way in range(_WAYS)), key=lambda turn: min(turn, math.tau - turn))
    yielded = False
    for reach in range(_REACHES):
        reach_mm = page.units_mm(RING + BADGE) + reach * apart_mm
        for turn_rad in turns_rad:
            angle_rad = outwards_rad + turn_rad
            spot = x_mm + reach_mm * math.cos(angle_rad), y_mm + reach_mm * math.sin(angle_rad)
            if math.hypot(*spot) <= most_mm:
                yielded = True
                yield spot
    if not yielded:
        yield ring.centre_mm


def _drawn(ring: _Ring, page: Page) -> Group:
    entry = ring.entry
    style = LEVEL_STYLES[entry.finding.level]
    group = Group(id=f"finding_{entry.number}", debug=False)
    group.elements.append(Title(f"{entry.number}: {entry.finding.level.value}, {entry.finding.code.value}"))
    circle = {"center": _text(ring.centre_mm), "r": short(ring.radius_mm), "debug": False}
    group.add(Circle(stroke=WHITE, stroke_width=page.units(1.7 * _LINE), **circle))
    dashes = page.dashes(style.dashes_ratio)
    group.add(Circle(stroke=style.ring, stroke_width=page.units(_LINE), stroke_dasharray=dashes, **circle))
    return group


def badge(entry: Numbered, at_mm: Spot, page: Page, *, name: str | None = None) -> Group:
    """The number of a finding in a disc of its level's look, under this id where one is given."""
    style = LEVEL_STYLES[entry.finding.level]
    group = Group(id=name, debug=False)
    group.add(
        Circle(
            center=_text(at_mm),
            r=page.units(BADGE - _LINE / 2),
            fill=style.badge,
            stroke=style.ring,
            stroke_width=page.units(_LINE),
            debug=False,
        )
    )
    size_mm = page.units_mm(TEXT_SIZE * min(1.0, _DIGITS_THAT_FIT / len(str(entry.number))))
    below_mm = at_mm[1] + 0.36 * size_mm
    face = Face(size_mm=size_mm, bold=True, colour=style.digits, anchor="middle")
    group.add(words(str(entry.number), (at_mm[0], below_mm), face))
    return group


def _text(at_mm: Spot) -> tuple[str, str]:
    return short(at_mm[0]), short(at_mm[1])
