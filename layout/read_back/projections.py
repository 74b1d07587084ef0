"""From contours and hits to working edges on tracks, and what does not fit."""

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray
from layout.mechanics.offset import moved_outlines
from layout.mechanics.projection import Pattern
from layout.mechanics.turning import FULL_TURN_RAD, Turning
from layout.read_back.contour import Contour
from layout.read_back.entities import CutDrawing
from layout.read_back.frames import Frames, edges_of_hits, frames_of
from layout.read_back.limits import (
    SAME_CUT_MM,
    SHAPE_WITHIN_MM,
    SQUARE_WITHIN_DEG,
    TRACK_WITHIN_MM,
)

_WRONG_WAY_RAD = math.pi / 2
_REDRAW = "draw it as this cutter's pattern, or delete it from the drawing"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Edges:
    """Working edges found, in the order (track, angle): each shape (n,)."""

    track_index: IntArray
    edge_angle_rad: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Found:
    """What the layers for projections hold.

    Attributes:
        edges: The projections.
        findings: What is none, or lies wrong.
        shows_side: Whether the outlines tell the label side from the star side; hits do not.
    """

    edges: Edges
    findings: list[Finding]
    shows_side: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Wanted:
    """What a projection of this movement and cutter looks like."""

    cutter: Cutter
    turning: Turning
    pattern: Pattern

    @property
    def layer(self) -> str | None:
        """Our name of the layer that projections are cut on; None where the cutter cannot cut them."""
        if self.cutter.kind == "punch-press":
            return "HITS"
        if self.pattern.cut is None:
            return None
        return "SLITS" if self.pattern.making == "fold" else "SLOTS"

    @property
    def half_kerf_mm(self) -> float:
        """By how much outlines are drawn smaller than finished edges; 0 where the shop compensates."""
        return self.cutter.kerf_mm / 2 if self.cutter.kerf_compensated else 0.0

    @property
    def contour(self) -> Contour | None:
        """The cut of one projection in its flat frame, as it is drawn; None where nothing but hits is drawn."""
        cut = self.pattern.cut
        if cut is None:
            return None
        points_mm, bulges = cut.points_mm, cut.bulges
        if self.half_kerf_mm and cut.closed:
            moved = moved_outlines(points_mm[None], bulges, -self.half_kerf_mm)
            points_mm, bulges = (points_mm, bulges) if moved is None else (moved[0][0], moved[1])
        return Contour(layer="", points_mm=points_mm, bulge_ratio=bulges, closed=cut.closed).tidied()


def projections_of(drawing: CutDrawing, wanted: Wanted) -> Found:
    """The working edges of a drawing, and what on the projections' layers is none or lies wrong.

    What is out of shape, off its track or drawn a second time is left out.
    """
    contours = [contour for contour in drawing.contours if contour.layer in ("SLITS", "SLOTS")]
    like, findings = _sorted_by_shape(contours, wanted)
    origins, shows_side = [], False
    pattern = wanted.contour
    if like and pattern is not None:
        frames = frames_of(like, pattern, wanted.turning.direction)
        fits = _fits(frames)
        fits_mirrored = _fits(frames_of([contour.mirrored() for contour in like], pattern, wanted.turning.direction))
        shows_side = bool((fits != fits_mirrored).any())
        findings += _faults(frames, fits, fits_mirrored, wanted)
        origins.append(np.column_stack([frames.radius_mm, frames.angle_rad])[fits])
    if len(drawing.hits_mm) and wanted.layer == "HITS":
        places = drawing.hits_mm[:, 0] + 1j * drawing.hits_mm[:, 1]
        found = edges_of_hits(places, wanted.pattern.strike_u_mm, wanted.turning.direction)
        origins.append(np.column_stack([np.abs(found), np.angle(found)]))
    elif len(drawing.hits_mm):
        findings += [_stray_hit(drawing, (x, y), wanted.cutter) for x, y in drawing.hits_mm.tolist()]
    edges, more = _on_tracks(np.concatenate([np.zeros((0, 2)), *origins]), wanted.turning)
    return Found(edges=edges, findings=findings + more, shows_side=shows_side)


def _sorted_by_shape(contours: list[Contour], wanted: Wanted) -> tuple[list[Contour], list[Finding]]:
    pattern = wanted.contour
    like, findings = [], []
    for contour in contours:
        if pattern is None or contour.layer != wanted.layer:
            findings.append(_unknown(contour, wanted, _corners(pattern) if pattern else "one hit"))
        elif contour.closed != pattern.closed or len(contour.points_mm) != len(pattern.points_mm):
            findings.append(_unknown(contour, wanted, _corners(pattern)))
        else:
            like.append(contour)
    return like, findings


def _corners(contour: Contour) -> str:
    return f"{'a closed outline' if contour.closed else 'an open line'} of {len(contour.points_mm)} vertices"


def _unknown(contour: Contour, wanted: Wanted, why: str) -> Finding:
    layer = wanted.cutter.layer(contour.layer).name
    place = "no layer" if wanted.layer is None else f"layer {wanted.cutter.layer(wanted.layer).name}"
    return Finding(
        code=Code.UNKNOWN_CUT,
        level=Level.ERROR,
        message=f"layer {layer} has {_corners(contour)} that is no projection of this movement: on this cutter "
        f"projections are on {place}, each {why}",
        measured=None,
        limit=None,
        unit="",
        at=_place_of(contour.points_mm),
        remedy=_REDRAW,
    )


def _place_of(points_mm: FloatArray) -> Place:
    if not len(points_mm):
        return Place()
    x, y = points_mm.mean(axis=0).tolist()
    return _place(math.hypot(x, y), math.atan2(y, x))


def _place(radius_mm: float, angle_rad: float, tracks: Iterable[int] = ()) -> Place:
    angle_deg = math.degrees(angle_rad % FULL_TURN_RAD)
    return Place(tracks=tuple(tracks), radius_mm=radius_mm, angle_deg=angle_deg)


def _stray_hit(drawing: CutDrawing, at_mm: tuple[float, float], cutter: Cutter) -> Finding:
    x_mm, y_mm = at_mm
    return Finding(
        code=Code.UNKNOWN_CUT,
        level=Level.ERROR,
        message=f"layer {cutter.layer('HITS').name} has a hit at {drawing.told(x_mm, y_mm)}, and a laser makes none",
        measured=None,
        limit=None,
        unit="",
        at=_place(math.hypot(x_mm, y_mm), math.atan2(y_mm, x_mm)),
        remedy="choose the press this was drawn for, or delete the hit from the drawing",
    )


def _fits(frames: Frames) -> BoolArray:
    """Which contours have the pattern's shape and stand square to their radius, facing the way the disc turns."""
    square = np.abs(frames.skew_rad) <= math.radians(SQUARE_WITHIN_DEG)
    return np.asarray((frames.residual_mm <= SHAPE_WITHIN_MM) & square)


def _faults(frames: Frames, fits: BoolArray, fits_mirrored: BoolArray, wanted: Wanted) -> list[Finding]:
    """A finding for every contour that does not fit; one for all that would if most of the drawing were mirrored."""
    findings, single = [], ~fits
    seen_through = ~fits & fits_mirrored
    if 2 * seen_through.sum() > len(fits):
        single &= ~seen_through
        first = int(np.flatnonzero(seen_through)[0])
        evidence = f"{seen_through.sum()} of {len(fits)} projections fit only when mirrored"
        at = _place(float(frames.radius_mm[first]), float(frames.angle_rad[first]))
        findings.append(other_side(f"{evidence}; the drawing seems to show", wanted.cutter, at))
    return findings + [_fault(frames, int(place)) for place in np.flatnonzero(single)]


def other_side(evidence: str, cutter: Cutter, at: Place) -> Finding:
    """The finding that a drawing is mirrored; the evidence ends with how sure that is, up to "show"."""
    return Finding(
        code=Code.OTHER_SIDE,
        level=Level.ERROR,
        message=f"{evidence} the other side, not the {cutter.drawn_from.replace('-', ' ')}",
        measured=None,
        limit=None,
        unit="",
        at=at,
        remedy="choose the cutter and the movement this was drawn for, or mirror the drawing",
    )


def _fault(frames: Frames, place: int) -> Finding:
    residual_mm, skew_rad = float(frames.residual_mm[place]), abs(float(frames.skew_rad[place]))
    at = _place(float(frames.radius_mm[place]), float(frames.angle_rad[place]))
    if residual_mm > SHAPE_WITHIN_MM:
        message = (
            f"a projection's outline is up to {residual_mm:.3f} mm out of shape; the limit is {SHAPE_WITHIN_MM:g} mm"
        )
        return _out_of_shape(message, (residual_mm, SHAPE_WITHIN_MM, "mm"), at)
    if skew_rad > _WRONG_WAY_RAD:
        message = "a projection faces against the way the disc turns"
    else:
        message = (
            f"a projection stands {math.degrees(skew_rad):.2f} degrees out of square to its radius; "
            f"the limit is {SQUARE_WITHIN_DEG:g} degrees"
        )
    return _out_of_shape(message, (math.degrees(skew_rad), SQUARE_WITHIN_DEG, "deg"), at)


def _out_of_shape(message: str, measured: tuple[float, float, str], at: Place) -> Finding:
    found, limit, unit = measured
    return Finding(
        code=Code.OUT_OF_SHAPE,
        level=Level.ERROR,
        message=f"{message}; it is left out",
        measured=found,
        limit=limit,
        unit=unit,
        at=at,
        remedy=_REDRAW,
    )


def _on_tracks(origins: FloatArray, turning: Turning) -> tuple[Edges, list[Finding]]:
    """Edges on their tracks, each once, and a finding for every one off track or drawn a second time."""
    radius_mm, angle_rad = origins[:, 0], np.mod(origins[:, 1], FULL_TURN_RAD)
    angle_rad[angle_rad >= FULL_TURN_RAD] = 0.0  # what rounding makes of an angle just below 0
    off_mm = np.abs(radius_mm[:, None] - turning.radius_mm[None, :])
    track_index = off_mm.argmin(axis=1)
    off_track = off_mm.min(axis=1) > TRACK_WITHIN_MM
    findings = [
        _off_track(float(radius_mm[i]), float(angle_rad[i]), int(track_index[i]), turning)
        for i in np.flatnonzero(off_track)
    ]
    track_index, angle_rad = track_index[~off_track], angle_rad[~off_track]
    order = np.lexsort((angle_rad, track_index))
    track_index, angle_rad = track_index[order], angle_rad[order]
    again = _drawn_again(track_index, angle_rad, turning)
    findings += [_cut_twice(int(track_index[i]), float(angle_rad[i]), turning) for i in np.flatnonzero(again)]
    return Edges(track_index=track_index[~again], edge_angle_rad=angle_rad[~again]), findings


def _drawn_again(track_index: IntArray, angle_rad: FloatArray, turning: Turning) -> BoolArray:
    """Which edges, sorted, lie where the one before them on the track does; the last may meet the first."""
    again = np.zeros(len(track_index), dtype=np.bool_)
    arc_mm = np.diff(angle_rad) * turning.radius_mm[track_index[1:]]
    again[1:] = (np.diff(track_index) == 0) & (arc_mm <= SAME_CUT_MM)
    for track in np.unique(track_index):
        first, last = np.flatnonzero(track_index == track)[[0, -1]]
        around_mm = (angle_rad[first] + FULL_TURN_RAD - angle_rad[last]) * turning.radius_mm[track]
        again[last] |= first != last and around_mm <= SAME_CUT_MM
    return again


def _off_track(radius_mm: float, angle_rad: float, track_index: int, turning: Turning) -> Finding:
    off_mm = abs(radius_mm - float(turning.radius_mm[track_index]))
    return Finding(
        code=Code.OFF_TRACK,
        level=Level.ERROR,
        message=f"a projection at {radius_mm:.3f} mm lies {off_mm:.3f} mm off track {track_index + 1}, the nearest; "
        f"the limit is {TRACK_WITHIN_MM:g} mm; it is left out",
        measured=off_mm,
        limit=TRACK_WITHIN_MM,
        unit="mm",
        at=_place(radius_mm, angle_rad, (track_index + 1,)),
        remedy="choose the movement this was drawn for, or move the projection onto its track",
    )


def _cut_twice(track_index: int, angle_rad: float, turning: Turning) -> Finding:
    return Finding(
        code=Code.CUT_TWICE,
        level=Level.ERROR,
        message=f"a projection of track {track_index + 1} is drawn twice at "
        f"{math.degrees(angle_rad):.3f} degrees; the second is left out",
        measured=None,
        limit=SAME_CUT_MM,
        unit="mm",
        at=_place(float(turning.radius_mm[track_index]), angle_rad, (track_index + 1,)),
        remedy="delete the second from the drawing",
    )
