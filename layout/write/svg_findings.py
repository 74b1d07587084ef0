"""Findings in the picture: a numbered ring at each one's place, and what it says below the disc."""

import math
from dataclasses import dataclass

from svgwrite.base import Title
from svgwrite.container import Group
from svgwrite.shapes import Circle

from layout.check.finding import Finding, Level, Place
from layout.cut.plan import CutPlan
from layout.place.disc import Disc
from layout.write.laid_out import LaidOut
from layout.write.svg_page import Face, Page, short, shortened, words, wrapped
from layout.write.svg_style import LEVEL_STYLES, TEXT_SIZE, WHITE, WORD_GREY

MOST_SHOWN = 20  # findings; more rings would hide the disc, and layout.json has them all
_RING, _BADGE, _LINE = 1.7, 1.5, 0.32  # hundredths of the page's width
_DIGITS_THAT_FIT = 2.2  # in a badge, at the size of the list
_WAYS = 16  # directions in which a badge may stand beside its ring
_LINE_HEIGHT = 1.35  # of the letter size
_MOST_LINES = 3  # of a message
_TOPMOST_DEG = 90.0

_URGENCY = {level: place for place, level in enumerate(Level)}  # errors first


@dataclass(frozen=True, slots=True, kw_only=True)
class Numbered:
    """A finding with its number: its place in layout.json's findings, from 1."""

    number: int
    finding: Finding


def shown_findings(findings: tuple[Finding, ...]) -> list[Numbered]:
    """The findings that are shown: errors first, then in their own order; at most MOST_SHOWN."""
    numbered = [Numbered(number=place, finding=finding) for place, finding in enumerate(findings, start=1)]
    return sorted(numbered, key=lambda entry: _URGENCY[entry.finding.level])[:MOST_SHOWN]


def markers(shown: list[Numbered], disc: Disc, plan: CutPlan, page: Page) -> Group:
    """A ring and a number at every finding that has a place; a whole track is ringed as a circle."""
    group = Group(id="findings", fill="none", debug=False)
    badges: list[tuple[float, float]] = []
    for entry in shown:
        place = _polar(entry.finding.at, disc)
        if place is None:
            continue
        radius_mm, angle_deg = place
        at_mm = _at_mm(radius_mm, _TOPMOST_DEG if angle_deg is None else angle_deg, plan)
        ring_mm = page.units_mm(_RING) if angle_deg is not None else radius_mm
        centre_mm = at_mm if angle_deg is not None else (0.0, 0.0)
        away_mm = page.units_mm(_RING + _BADGE * 0.7) if angle_deg is not None else 0.0
        badge_mm = _free_place(at_mm, away_mm, badges, page)
        badges.append(badge_mm)
        group.add(_marker(entry, centre_mm, ring_mm, badge_mm, page))
    return group


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


def _free_place(
    at_mm: tuple[float, float], away_mm: float, taken: list[tuple[float, float]], page: Page
) -> tuple[float, float]:
    """Beside a ring, outwards if that place is free, else the free one nearest to it; farther out if none is."""
    outwards_rad = math.atan2(at_mm[1], at_mm[0])
    apart_mm = page.units_mm(2 * _BADGE)
    turns = sorted((math.tau * way / _WAYS for way in range(_WAYS)), key=lambda turn: min(turn, math.tau - turn))
    for reach in range(1, MOST_SHOWN + 1):
        reach_mm = away_mm + (reach - 1) * apart_mm
        for turn_rad in turns:
            angle_rad = outwards_rad + turn_rad
            place = at_mm[0] + reach_mm * math.cos(angle_rad), at_mm[1] + reach_mm * math.sin(angle_rad)
            if all(math.dist(place, other) >= apart_mm for other in taken):
                return place
    return at_mm


def _marker(
    entry: Numbered, centre_mm: tuple[float, float], ring_mm: float, badge_mm: tuple[float, float], page: Page
) -> Group:
    style = LEVEL_STYLES[entry.finding.level]
    group = Group(id=f"finding_{entry.number}", debug=False)
    group.elements.append(Title(f"{entry.number}: {entry.finding.level.value}, {entry.finding.code.value}"))
    centre, radius = (short(centre_mm[0]), short(centre_mm[1])), short(ring_mm)
    group.add(Circle(center=centre, r=radius, stroke=WHITE, stroke_width=page.units(1.7 * _LINE), debug=False))
    group.add(
        Circle(
            center=centre,
            r=radius,
            stroke=style.ring,
            stroke_width=page.units(_LINE),
            stroke_dasharray=page.dashes(style.dashes_ratio),
            debug=False,
        )
    )
    group.add(_badge(entry, badge_mm, page))
    return group


def _badge(entry: Numbered, at_mm: tuple[float, float], page: Page) -> Group:
    style = LEVEL_STYLES[entry.finding.level]
    badge = Group(debug=False)
    badge.add(
        Circle(
            center=(short(at_mm[0]), short(at_mm[1])),
            r=page.units(_BADGE - _LINE / 2),
            fill=style.badge,
            stroke=style.ring,
            stroke_width=page.units(_LINE),
            debug=False,
        )
    )
    size_mm = page.units_mm(TEXT_SIZE * min(1.0, _DIGITS_THAT_FIT / len(str(entry.number))))
    below_mm = at_mm[1] + 0.36 * size_mm
    face = Face(size_mm=size_mm, bold=True, colour=style.digits, anchor="middle")
    badge.add(words(str(entry.number), (at_mm[0], below_mm), face))
    return badge


def findings_list(shown: list[Numbered], laid_out: LaidOut, page: Page, top_mm: float) -> tuple[Group, float]:
    """What the findings say, from top_mm down, and where the list ends; nothing where there are none."""
    group = Group(id="findings_list", debug=False)
    face = Face(size_mm=page.units_mm(TEXT_SIZE))
    line_mm = face.size_mm * _LINE_HEIGHT
    indent_mm, y_mm = page.left_mm + page.units_mm(4), top_mm
    room_mm = page.room_mm - page.units_mm(4)
    for entry in shown:
        finding, style = entry.finding, LEVEL_STYLES[entry.finding.level]
        group.add(_badge(entry, (page.left_mm + page.units_mm(_BADGE), y_mm + 0.75 * line_mm), page))
        lines = wrapped(f"{style.word}: {finding.message}", face, room_mm)
        if len(lines) > _MOST_LINES:
            rest = " ".join(lines[_MOST_LINES - 1 :])
            lines = [*lines[: _MOST_LINES - 1], shortened(rest, face, room_mm)]
        for line in lines:
            y_mm += line_mm
            group.add(words(line, (indent_mm, y_mm), face))
        y_mm += line_mm
        remedy = Face(size_mm=face.size_mm, colour=WORD_GREY)
        group.add(words(shortened(finding.remedy, remedy, room_mm), (indent_mm, y_mm), remedy))
        y_mm += 0.6 * line_mm
    unseen = len(laid_out.findings) - len(shown)
    if unseen:
        y_mm += line_mm
        group.add(words(f"and {unseen} more: see layout.json", (indent_mm, y_mm), face))
        y_mm += 0.6 * line_mm
    return group, y_mm
