"""Marks on the disc: an index mark, and lettering where there is room."""

from collections.abc import Iterable, Iterator

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layout.cut.lettering import strokes_mm
from layout.cut.plan import Lettering, Outlines
from layout.cut.room import CLEAR_MM, Rooms
from layout.mechanics.arrays import FloatArray, frozen_floats

# Heights of capitals, mm, tried from the first. ISO 3098 starts technical lettering at 1.8 mm; a laser's line
# of 0.15 mm still leaves 1.2 mm legible (common practice); above 3 mm the lettering would crowd a small disc.
LETTER_HEIGHTS_MM = (3.0, 2.5, 2.0, 1.8, 1.5, 1.2)
LINE_PITCH_HEIGHTS = 1.6  # heights of capitals from line to line: tails reach 1/3 below a line, 0.27 stay free
# Lengths of the index mark, mm, tried from the first; under 1 mm it is no longer seen at arm's length.
MARK_LENGTHS_MM = (6.0, 4.0, 3.0, 2.0, 1.5, 1.0)
STEP_MM = 0.5  # mm; how finely places are tried along a radius
STEP_DEG = 15  # degrees; and around the disc

Choice = tuple[str, ...]


def index_mark(rooms: Rooms, *, rim_mm: float, direction: int) -> Outlines | None:
    """A stroke along the radius at disc angle 0 with one barb, which points the way the disc turns.

    A disc drawn from the wrong side shows the barb on the wrong side. The mark stands between the
    outermost track and the rim, else inside the innermost track, else wherever there is room.

    Args:
        rooms: Where there is room, seen from the label side.
        rim_mm: The disc's radius.
        direction: +1 for a disc that turns clockwise seen from the label side, else −1.

    Returns:
        The mark seen from the label side; None where there is no room at all.
    """
    tracks_from_mm, tracks_to_mm = rooms.tracks_mm
    outside_mm = np.array([(tracks_to_mm + rim_mm) / 2])
    inside_mm = np.arange(tracks_from_mm, 0.0, -STEP_MM)
    anywhere_mm = np.arange(rim_mm, 0.0, -STEP_MM)
    return (
        _mark_in(rooms.seen(), outside_mm, direction)
        or _mark_in(rooms.seen(), inside_mm, direction)
        or _mark_in(rooms.hidden(), inside_mm, direction)
        or _mark_in(rooms.between(), anywhere_mm, direction)
    )


def _mark_in(room: BaseGeometry, places_mm: FloatArray, direction: int) -> Outlines | None:
    for length_mm in MARK_LENGTHS_MM:
        half_mm = length_mm / 2
        shape = np.array([(-half_mm, 0.0), (half_mm, 0.0), (0.0, -direction * half_mm)])
        marks = shape[None] + np.column_stack([places_mm, np.zeros(len(places_mm))])[:, None, :]
        fits = np.flatnonzero(shapely.covers(room, shapely.linestrings(marks)))
        if len(fits):
            bulges = frozen_floats([0.0] * len(shape))
            return Outlines(layer="MARKS", points_mm=frozen_floats(marks[fits[:1]]), bulges=bulges, closed=False)
    return None


def lettering(rooms: Rooms, choices: tuple[Choice, ...], *, warnings: Choice, rim_mm: float) -> tuple[Lettering, ...]:
    """Lines of letters, as drawn: they read right on the side that is drawn.

    Args:
        rooms: Where there is room, as drawn.
        choices: Lines to write, from the fullest choice to the least; the first that fits is taken,
            and what it leaves out is written somewhere else if it fits there.
        warnings: The lines that may even stand among openings, rather than be missing.
        rim_mm: The disc's radius.

    Returns:
        One Lettering a line; none where nothing fits.
    """
    centres_mm = _centres_mm(rim_mm)
    written = _first_that_fits(_attempts(rooms, choices, warnings), centres_mm)
    if not written:
        return ()
    said = {line.text for line in written}
    rest = tuple(text for text in choices[0] if text not in said)
    taken = shapely.MultiLineString([stroke for line in written for stroke in line.strokes_mm]).envelope
    seen = rooms.seen().difference(taken.buffer(CLEAR_MM))
    return written + _first_that_fits(((seen, rest[:most]) for most in range(len(rest), 0, -1)), centres_mm)


def _first_that_fits(attempts: Iterable[tuple[BaseGeometry, Choice]], centres_mm: FloatArray) -> tuple[Lettering, ...]:
    for room, lines in attempts:
        shapely.prepare(room)
        near_mm = centres_mm[shapely.contains_xy(room, centres_mm)]
        for height_mm in LETTER_HEIGHTS_MM:
            block = _block(lines, height_mm)
            at_mm = _first_fit_mm(room, near_mm, block)
            if at_mm is not None:
                return tuple(
                    Lettering(layer="MARKS", text=text, strokes_mm=tuple(frozen_floats(s + at_mm) for s in strokes))
                    for text, strokes in zip(lines, block, strict=True)
                )
    return ()


def _attempts(rooms: Rooms, choices: tuple[Choice, ...], warnings: Choice) -> Iterator[tuple[BaseGeometry, Choice]]:
    """What to try where: only the least choices are worth a place that a clamp may hide."""
    written = [lines for lines in choices if lines]
    seen = rooms.seen()
    yield from ((seen, lines) for lines in written)
    hidden = rooms.hidden()
    yield from ((hidden, lines) for lines in written[-2:])
    if warnings:
        yield rooms.between(), warnings


def _centres_mm(rim_mm: float) -> FloatArray:
    """Places to try, as drawn: below and above the centre first, then ever more to the sides."""
    around_deg = sorted(range(0, 360, STEP_DEG), key=lambda angle: (abs(abs(angle - 180) - 90), -angle))
    angle_rad = np.radians(around_deg)[:, None]
    radius_mm = np.arange(STEP_MM, rim_mm, STEP_MM)[None, :]
    return np.stack([radius_mm * np.cos(angle_rad), radius_mm * np.sin(angle_rad)], axis=-1).reshape(-1, 2)


def _block(lines: Choice, height_mm: float) -> list[tuple[FloatArray, ...]]:
    """The strokes of each line, the block centred on (0, 0)."""
    pitch_mm = height_mm * LINE_PITCH_HEIGHTS
    top_mm = ((len(lines) - 1) * pitch_mm - height_mm) / 2
    down_mm = [np.array([0.0, top_mm - place * pitch_mm]) for place in range(len(lines))]
    return [
        tuple(frozen_floats(stroke + shift) for stroke in strokes_mm(text, height_mm))
        for text, shift in zip(lines, down_mm, strict=True)
    ]


def _first_fit_mm(room: BaseGeometry, centres_mm: FloatArray, block: list[tuple[FloatArray, ...]]) -> FloatArray | None:
    left_mm = centres_mm
    for strokes in block:
        points = np.concatenate(strokes)
        low, high = points.min(axis=0) + left_mm, points.max(axis=0) + left_mm
        left_mm = left_mm[shapely.covers(room, shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1]))]
    return left_mm[0] if len(left_mm) else None
