"""Discs laid into corners: each where it touches two walls or discs, chosen by one of several rules.

A disc that can be moved can be moved until it touches two things, so only such spots are tried. They
are where two of these lines meet: every wall moved inwards by what a centre keeps from it, and a circle
round every disc, and round every corner that points into the room.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import shapely

from layout.mechanics.arrays import FloatArray
from layout.sheets.placing import NOTHING, Placed, Wanted, left_of
from layout.sheets.room import GRAIN_MM, MOST_AT_ONCE, Room, clearance_mm, fitting, nearest_on_walls

_GRID = 40  # points across the sheet, each way; a fortieth of a sheet is finer than a start need be
_ALIKE = 6  # decimals of a millimetre to which two spots count as equally far along
# What a rule prefers: the way it presses discs first, then the way it presses those that are equal.
TOWARDS = tuple(
    np.array(pair, dtype=np.float64)
    for x in (-1, 1)
    for y in (-1, 1)
    for pair in (((0, y), (x, 0)), ((x, 0), (0, y)), ((x, y), (x, 0)))
)
_PARALLEL = 1e-12  # sine of an angle; lines that turn less against each other meet nowhere that counts
_Pairs = tuple[FloatArray, FloatArray]
Rule = FloatArray | None  # None: into the narrowest place


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Lines:
    """What the centre of a disc of one radius may touch: pieces of straight line, and circles."""

    start_mm: FloatArray
    end_mm: FloatArray
    centre_mm: FloatArray
    keep_mm: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Ground:
    """A sheet made ready for discs of the sizes wanted.

    Attributes:
        room: The sheet's.
        wanted: What is to be placed.
        walls: For each size, what its centres may touch of the walls.
        spots_mm: For each size, shape (s, 2): where it touches two walls and fits.
    """

    room: Room
    wanted: Wanted
    walls: tuple[_Lines, ...]
    spots_mm: tuple[FloatArray, ...]


def ground_of(room: Room, wanted: Wanted) -> Ground:
    """The sheet made ready, once for all rules."""
    walls = tuple(_lines_of(room, radius_mm) for radius_mm in wanted.radius_mm.tolist())
    spots = [
        fitting(room, np.concatenate([_lines_meet(each), _meetings(each.centre_mm, each.keep_mm, each)]), radius_mm)
        for each, radius_mm in zip(walls, wanted.radius_mm.tolist(), strict=True)
    ]
    return Ground(room=room, wanted=wanted, walls=walls, spots_mm=tuple(spots))


def laid_in_corners(ground: Ground, rule: Rule, placed: Placed = NOTHING) -> Placed:
    """What is still wanted, laid into corners one by one, the largest first, till none fits.

    Args:
        ground: The sheet, made ready.
        rule: The two ways in which discs are pressed, one of TOWARDS; None for the narrowest place.
        placed: Discs that lie there already.
    """
    wanted = ground.wanted
    centres, sizes = list(placed.centres_mm), placed.size.tolist()
    left = left_of(wanted, placed).tolist()
    for size, radius_mm in enumerate(wanted.radius_mm.tolist()):
        if not left[size]:
            continue
        taken = np.array(centres).reshape(-1, 2)
        keep = wanted.radius_mm[np.array(sizes, dtype=np.int64)] + radius_mm + wanted.gap_mm
        for at in _spots_taken(ground, size, _Around(taken, keep), rule):
            centres.append(at)
            sizes.append(size)
            left[size] -= 1
            if not left[size]:
                break
    way = "corners" if not len(placed.size) else f"{placed.way} and corners"
    return Placed(
        centres_mm=np.array(centres).reshape(-1, 2),
        size=np.array(sizes, dtype=np.int64),
        way=way if len(sizes) > len(placed.size) else placed.way,
    )


class _Around:
    """Discs that lie there already, and how far the centre being placed keeps from the centre of each."""

    def __init__(self, centres_mm: FloatArray, keep_mm: FloatArray) -> None:
        self.centres_mm, self.keep_mm = centres_mm, keep_mm

    def clear(self, points: FloatArray) -> FloatArray:
        """Those of the points that keep off all of them."""
        parts = [np.zeros((0, 2))]
        step = max(1, MOST_AT_ONCE // max(1, len(self.keep_mm)))
        for first in range(0, len(points), step):
            some = points[first : first + step]
            parts.append(some[(_apart(some[:, None], self.centres_mm) >= self.keep_mm - GRAIN_MM).all(axis=1)])
        return np.concatenate(parts)

    def add(self, at: FloatArray, keep_mm: float) -> None:
        """One disc more."""
        self.centres_mm = np.concatenate([self.centres_mm, at[None]])
        self.keep_mm = np.append(self.keep_mm, keep_mm)


def _spots_taken(ground: Ground, size: int, around: _Around, rule: Rule) -> Iterator[FloatArray]:
    """Where discs of one size go, one after the other, till no spot is left."""
    room, walls, radius_mm = ground.room, ground.walls[size], float(ground.wanted.radius_mm[size])
    pitch_mm = 2 * radius_mm + ground.wanted.gap_mm
    at_discs = fitting(room, around.clear(_meetings(around.centres_mm, around.keep_mm, walls)), radius_mm)
    spots = np.concatenate([around.clear(ground.spots_mm[size]), at_discs])
    while len(spots):
        at = spots[_preferred(room, spots, around, radius_mm, rule)]
        found = _meetings_of_one(at, pitch_mm, around, walls)
        around.add(at, pitch_mm)
        spots = spots[_apart(spots, at) >= pitch_mm - GRAIN_MM]
        spots = np.concatenate([spots, fitting(room, around.clear(found), radius_mm)])
        yield at


def _preferred(room: Room, spots: FloatArray, around: _Around, radius_mm: float, rule: Rule) -> int:
    if rule is not None:
        first, second = (np.round(spots @ way, _ALIKE) for way in rule)
        return int(np.lexsort((-second, -first))[0])
    return _narrowest(room, spots, around, radius_mm)


def _narrowest(room: Room, spots: FloatArray, around: _Around, radius_mm: float) -> int:
    """The spot with the least room to the third thing round it; it touches two."""
    to_walls = _apart(spots[:, None], nearest_on_walls(room, spots)) - room.keep_mm - radius_mm
    to_discs = _apart(spots[:, None], around.centres_mm) - around.keep_mm
    slack = np.sort(np.concatenate([to_walls, to_discs], axis=1), axis=1)
    third = slack[:, min(2, slack.shape[1] - 1)]
    return int(np.lexsort((spots[:, 0].round(_ALIKE), spots[:, 1].round(_ALIKE), third.round(_ALIKE)))[0])


def _lines_of(room: Room, radius_mm: float) -> _Lines:
    """What the centre of a disc of this radius may touch of the walls."""
    along = room.end_mm - room.start_mm
    to_left = np.column_stack([-along[:, 1], along[:, 0]]) / np.hypot(along[:, 0], along[:, 1])[:, None]
    shift = to_left * (room.keep_mm + radius_mm)[:, None]
    turn = along[room.before, 0] * along[:, 1] - along[room.before, 1] * along[:, 0]
    points_in = turn < 0
    return _Lines(
        start_mm=room.start_mm + shift,
        end_mm=room.end_mm + shift,
        centre_mm=room.start_mm[points_in],
        keep_mm=(room.keep_mm + radius_mm)[points_in],
    )


def _lines_meet(walls: _Lines) -> FloatArray:
    """Where the straight lines meet each other."""
    pieces = np.asarray(shapely.linestrings(np.stack([walls.start_mm, walls.end_mm], axis=1)))
    first, second = shapely.STRtree(pieces).query(pieces)
    first, second = first[first < second], second[first < second]
    a, b = walls.start_mm[first], walls.start_mm[second]
    u, v = walls.end_mm[first] - a, walls.end_mm[second] - b
    across = u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]
    apart = np.abs(across) > _PARALLEL * np.hypot(*u.T) * np.hypot(*v.T)
    a, b, u, v, across = a[apart], b[apart], u[apart], v[apart], across[apart]
    share = ((b - a)[:, 0] * v[:, 1] - (b - a)[:, 1] * v[:, 0]) / across
    return np.asarray(a + share[:, None] * u)


def _meetings(centres: FloatArray, keep: FloatArray, walls: _Lines) -> FloatArray:
    """Where circles meet each other and what there is of walls."""
    first, second = np.nonzero(np.triu(_apart(centres[:, None], centres) <= keep[:, None] + keep + GRAIN_MM, 1))
    each, wall = (places.ravel() for places in np.indices((len(centres), len(walls.start_mm))))
    one, other = (places.ravel() for places in np.indices((len(centres), len(walls.centre_mm))))
    return np.concatenate(
        [
            _circles_meet((centres[first], keep[first]), (centres[second], keep[second])),
            _lines_meet_circles((centres[each], keep[each]), (walls.start_mm[wall], walls.end_mm[wall])),
            _circles_meet((centres[one], keep[one]), (walls.centre_mm[other], walls.keep_mm[other])),
        ]
    )


def _meetings_of_one(at: FloatArray, keep_mm: float, around: _Around, walls: _Lines) -> FloatArray:
    """Where the circle round one disc meets those round others, and what there is of walls."""
    circle = (at[None], np.array([keep_mm]))
    return np.concatenate(
        [
            _circles_meet(circle, (around.centres_mm, around.keep_mm)),
            _lines_meet_circles(circle, (walls.start_mm, walls.end_mm)),
            _circles_meet(circle, (walls.centre_mm, walls.keep_mm)),
        ]
    )


def _lines_meet_circles(circles: _Pairs, lines: _Pairs) -> FloatArray:
    """Where each circle meets the piece of line in the same place; (centres, radii) and (starts, ends)."""
    (centre, radius), (start, end) = circles, lines
    length = np.hypot(*(end - start).T)
    way = (end - start) / length[:, None]
    foot = ((centre - start) * way).sum(axis=1)
    nearest = start + foot[:, None] * way
    half = radius**2 - ((nearest - centre) ** 2).sum(axis=1)
    reach = np.sqrt(np.maximum(half, 0.0))
    found = []
    for sign in (-1, 1):
        along = foot + sign * reach
        meets = (half > -GRAIN_MM * radius) & (along >= -GRAIN_MM) & (along <= length + GRAIN_MM)
        found.append((nearest + (sign * reach)[:, None] * way)[meets])
    return np.concatenate(found)


def _circles_meet(circles: _Pairs, others: _Pairs) -> FloatArray:
    """Where each circle meets the one in the same place: on the line across the one between the centres."""
    (centre, radius), (other_centre, other_radius) = circles, others
    between = other_centre - centre
    apart = np.hypot(between[:, 0], between[:, 1])
    near = (apart <= radius + other_radius + GRAIN_MM) & (apart >= np.abs(radius - other_radius)) & (apart > GRAIN_MM)
    centre, radius, other_radius = (
        np.broadcast_to(each, (len(near), *each.shape[1:]))[near] for each in (centre, radius, other_radius)
    )
    between, apart = between[near], apart[near]
    along = (apart**2 + radius**2 - other_radius**2) / (2 * apart)
    across = np.sqrt(np.maximum(radius**2 - along**2, 0.0))
    way = between / apart[:, None]
    middle = centre + along[:, None] * way
    to_left = np.column_stack([-way[:, 1], way[:, 0]]) * across[:, None]
    return np.concatenate([middle + to_left, middle - to_left])


def _apart(points: FloatArray, others: FloatArray) -> FloatArray:
    away = points - others
    return np.asarray(np.hypot(away[..., 0], away[..., 1]))


def widest_spots(room: Room, centres_mm: FloatArray, radius_mm: FloatArray, count: int) -> FloatArray:
    """Points of a grid over the room that are farthest from walls and discs, a few apart from each other.

    Args:
        room: The sheet's.
        centres_mm: Shape (n, 2). Discs that lie there.
        radius_mm: Shape (n,). Theirs.
        count: How many points at most.
    """
    least, greatest = room.start_mm.min(axis=0), room.start_mm.max(axis=0)
    x, y = (np.linspace(low, high, _GRID + 2)[1:-1] for low, high in zip(least, greatest, strict=True))
    points = np.stack(np.meshgrid(x, y), axis=-1).reshape(-1, 2)
    free = clearance_mm(room, points)
    for centre, radius in zip(centres_mm, radius_mm.tolist(), strict=True):
        free = np.minimum(free, _apart(points, centre) - radius)
    found: list[FloatArray] = []
    while len(found) < count and np.isfinite(free).any():
        best = int(np.argmax(free))
        found.append(points[best])
        reach = max(2 * float(free[best]), float(x[1] - x[0]))
        free = np.where(_apart(points, points[best]) < reach, -np.inf, free)
    return np.array(found).reshape(-1, 2)
