"""Lettering on the disc: where there is room, and as much of it as there is room for."""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from itertools import product

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layout.cut.free_room import FreeRoom, free_room
from layout.cut.plan import Lettering
from layout.cut.room import CLEAR_MM, Rooms
from layout.cut.wording import Inscription
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.lettering import parted, strokes_mm

# Heights of capitals, mm, tried from the first. ISO 3098 starts technical lettering at 1.8 mm; a laser's line
# of 0.15 mm still leaves 1.2 mm legible (common practice); above 3 mm the lettering would crowd a small disc.
LETTER_HEIGHTS_MM = (3.0, 2.5, 2.0, 1.8, 1.5, 1.2)
EASILY_READ_MM = 1.8  # lines rather stand apart than that all stand together below this
LINE_PITCH_HEIGHTS = 1.6  # heights of capitals from line to line: tails reach 1/3 below a line, 0.27 stay free
STEP_MM = 0.5  # mm; how finely places are tried along a radius
STEP_DEG = 15  # degrees; and around the disc
_HALF_TURN_DEG = 180
# Below and above the centre first, then ever more to the sides.
_AROUND_DEG = sorted(range(0, 360, STEP_DEG), key=lambda angle: (abs(abs(angle - 180) - 90), -angle))

BLOCKS_KEPT = 512  # blocks; those of a few drawings, so that each is drawn once however many places are tried


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Block:
    """A block: the strokes of each of its lines, and the corners of the boxes they fill, shape (n, 2)."""

    strokes_mm: tuple[tuple[FloatArray, ...], ...]
    low_mm: FloatArray
    high_mm: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Lettered:
    """Lines of letters, as drawn.

    Attributes:
        letters: One Lettering a line; none where nothing fits.
        left_out: The lines that fit nowhere; none where all stand.
    """

    letters: tuple[Lettering, ...]
    left_out: tuple[Inscription, ...]


def lettering(rooms: Rooms, lines: tuple[Inscription, ...]) -> Lettered:
    """Lines of letters, as drawn: they read right on the side that is drawn.

    All lines stand together if they fit so and are easily read; if not, as many as do, and the rest
    somewhere else: level if there is room, else turned so that they run along the rim; smaller where
    no line fits otherwise. Where a line finds no room that can be seen, it may stand where a clamp
    hides it in the movement, a warning even among the openings. What fits nowhere is left out.

    Args:
        rooms: Where there is room, as drawn.
        lines: What to write; a line gives way to those before it.
    """
    written: list[Lettering] = []
    missing: list[Inscription] = []
    left = list(lines)
    while left:
        placed = _placed(rooms, written, left)
        written += placed
        missing += [] if placed else left[:1]
        left = left[max(len(placed), 1) :]
    return Lettered(letters=tuple(written), left_out=tuple(missing))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Search:
    """Where to look for a block's place.

    Attributes:
        room: The free metal, turned so that the block stands level in it.
        centres_mm: Shape (n, 2). Places to try, the best first.
        turn_rad: By how much the block must be turned to stand on the disc.
    """

    room: FreeRoom
    centres_mm: FloatArray
    turn_rad: float


def _placed(rooms: Rooms, written: list[Lettering], left: list[Inscription]) -> list[Lettering]:
    """The first of the lines left, with as many as can stand with it; none where there is no room for it."""
    taken = [shapely.MultiPoint(np.concatenate(line.strokes_mm)).convex_hull for line in written]
    for room, blocks in _rooms_and_blocks(rooms, left):
        found = _first_that_fits(_clear_of(taken, room), blocks, rooms.metal.rim_mm)
        if found:
            return found
    return []


def _rooms_and_blocks(rooms: Rooms, left: list[Inscription]) -> Iterator[tuple[BaseGeometry, list[tuple[str, ...]]]]:
    """Where to look for room, and for what, the best first."""
    together = [_block_of(left[:count]) for count in range(len(left), 0, -1)]
    shorter: list[tuple[str, ...]] = [(form,) for form in left[0].forms[1:]]
    yield rooms.seen, together
    yield rooms.seen, shorter
    yield rooms.hidden, together + shorter
    if left[0].is_warning:
        warnings = [line for line in left if line.is_warning]
        yield rooms.between, [_block_of(warnings), _block_of(left[:1])]


def _clear_of(taken: list[BaseGeometry], room: BaseGeometry) -> BaseGeometry:
    return room.difference(shapely.union_all(taken).buffer(CLEAR_MM)) if taken else room


def _block_of(lines: list[Inscription]) -> tuple[str, ...]:
    return tuple(line.forms[0] for line in sorted(lines, key=lambda line: line.row))


def _first_that_fits(room: BaseGeometry, blocks: list[tuple[str, ...]], rim_mm: float) -> list[Lettering]:
    for search in _searches(free_room(room), rim_mm) if blocks else ():
        centres_mm = search.room.centres_within_mm(search.centres_mm)
        for texts, height_mm in _tries(blocks) if len(centres_mm) else ():
            block = _block(texts, height_mm)
            at_mm = search.room.first_fit_mm(centres_mm, block.low_mm, block.high_mm)
            if at_mm is not None:
                return [
                    Lettering(layer="MARKS", text=text, strokes_mm=_on_disc(strokes_mm, at_mm, search))
                    for text, strokes_mm in zip(texts, block.strokes_mm, strict=True)
                ]
    return []


def _tries(blocks: list[tuple[str, ...]]) -> Iterator[tuple[tuple[str, ...], float]]:
    """Every block with every height: easily read ones first, in them the fullest block first, in it the largest."""
    for is_easy in (True, False):
        heights_mm = [height_mm for height_mm in LETTER_HEIGHTS_MM if (height_mm >= EASILY_READ_MM) is is_easy]
        yield from product(blocks, heights_mm)


def _searches(room: FreeRoom, rim_mm: float) -> Iterator[_Search]:
    """Level everywhere, below and above the centre first; then turned, the more level the sooner.

    The tops of turned letters point to the rim above the centre, and to the centre below it.
    """
    around_rad = np.radians(_AROUND_DEG)[:, None]
    radius_mm = np.arange(STEP_MM, rim_mm, STEP_MM)[None, :]
    centres_mm = np.stack([radius_mm * np.cos(around_rad), radius_mm * np.sin(around_rad)], axis=-1).reshape(-1, 2)
    yield _Search(room=room, centres_mm=centres_mm, turn_rad=0.0)
    outermost_mm = radius_mm[0, ::-1]
    for around_deg in _AROUND_DEG[2:]:
        down = around_deg >= _HALF_TURN_DEG
        turn_rad = math.radians(around_deg - (270 if down else 90))
        column_mm = np.stack([np.zeros_like(outermost_mm), -outermost_mm if down else outermost_mm], axis=-1)
        yield _Search(room=room.turned(-turn_rad), centres_mm=column_mm, turn_rad=turn_rad)


def _on_disc(strokes_mm: tuple[FloatArray, ...], at_mm: FloatArray, search: _Search) -> tuple[FloatArray, ...]:
    cos, sin = math.cos(search.turn_rad), math.sin(search.turn_rad)
    turned = np.array([(cos, sin), (-sin, cos)])
    return tuple(frozen_floats((stroke + at_mm) @ turned) for stroke in strokes_mm)


@lru_cache(maxsize=BLOCKS_KEPT)
def _block(texts: tuple[str, ...], height_mm: float) -> _Block:
    """The lines of a block, which is centred on (0, 0)."""
    pitch_mm = height_mm * LINE_PITCH_HEIGHTS
    top_mm = ((len(texts) - 1) * pitch_mm - height_mm) / 2
    lines, points = [], []
    for place, text in enumerate(texts):
        strokes = strokes_mm(text, height_mm)
        points.append(np.concatenate(strokes) + np.array([0.0, top_mm - place * pitch_mm]))
        lines.append(parted(points[-1], map(len, strokes)))
    return _Block(
        strokes_mm=tuple(lines),
        low_mm=frozen_floats(np.array([of_line.min(axis=0) for of_line in points])),
        high_mm=frozen_floats(np.array([of_line.max(axis=0) for of_line in points])),
    )
