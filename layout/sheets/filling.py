"""The best placing on one sheet: rows, corners and growth against each other, within a budget of tries."""

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray
from layout.sheets.corners import TOWARDS, Ground, Rule, ground_of, laid_in_corners, widest_spots
from layout.sheets.growing import FULL, grown
from layout.sheets.placing import Placed, Wanted, left_of, worth_of
from layout.sheets.room import Room, clearance_mm
from layout.sheets.rows import rows_on

# Budgets are counts, so that the same job gives the same sheets on a slow machine; for times see bench_sheets.
_LAID_IN_ALL = 5000  # discs laid into corners over all tries on one sheet; about a second and a half
_WALLS_LIKE_A_DISC = 10  # walls; to begin a size or a start among so many takes as long as a disc does
_ROWS_FILLED_UP = 3  # row patterns whose rest is laid with discs; the others hold fewer
_MOST_GROWN = 60  # discs; with more, rows are near the best and a start takes long
_GROWN_ON_SHEET = 1600  # discs of all starts on one sheet; one to two seconds
_GROWN_IN_JOB = 16_000  # discs of all starts of a job: ten hard sheets, the others get what is left
_WIDEST = 6  # starts with the added disc where there is most room
_SCATTERED = 300  # starts from anywhere
_THROWS = 400  # points tried for every disc to scatter; enough where a fortieth of the sheet is free


class Starts:
    """How many discs a job may still start to grow: counted over all its sheets, and on each."""

    def __init__(self) -> None:
        self._in_job, self._on_sheet = _GROWN_IN_JOB, 0

    def next_sheet(self) -> None:
        """Begin a sheet."""
        self._on_sheet = min(_GROWN_ON_SHEET, self._in_job)

    def allow(self, discs: int) -> bool:
        """Whether so many discs may be started; they count as started then."""
        if discs > self._on_sheet:
            return False
        self._on_sheet -= discs
        self._in_job -= discs
        return True


def filled(room: Room, wanted: Wanted, starts: Starts) -> Placed:
    """The discs on one sheet: as much area as is found, then as many discs, then together in a small rectangle.

    Args:
        room: The sheet's.
        wanted: What may be placed, largest first; none of it need fit.
        starts: What growing may still take; what is taken here is counted off.
    """
    ground = ground_of(room, wanted)
    in_rows: list[Placed] = []
    for size in np.flatnonzero(wanted.count).tolist():  # the largest that has room at all
        if in_rows := rows_on(room, wanted, size):
            break
    in_rows.sort(key=lambda each: worth_of(wanted, each), reverse=True)
    tries = in_rows[:1]
    expected = max([int(wanted.count.sum()) if not in_rows else len(in_rows[0].size), 1])
    rules: tuple[Rule, ...] = (*TOWARDS, None)
    for rows in in_rows[:_ROWS_FILLED_UP]:
        tries.append(laid_in_corners(ground, TOWARDS[0], rows))
    laid = 0.0
    begun = len(wanted.radius_mm) * len(room.start_mm) / _WALLS_LIKE_A_DISC
    for rule in rules:
        tries.append(laid_in_corners(ground, rule))
        laid += len(tries[-1].size) + begun
        if laid + min(expected, len(tries[-1].size)) > _LAID_IN_ALL:
            break
    best = max(tries, key=lambda each: worth_of(wanted, each))
    return best if not left_of(wanted, best).any() else _with_more(ground, best, starts)


def _with_more(ground: Ground, placed: Placed, starts: Starts) -> Placed:
    """The placing with one disc more at a time, the largest that can be grown among the others, till none can."""
    room, wanted = ground.room, ground.wanted
    starts.next_sheet()
    size = 0
    while size < len(wanted.radius_mm) and len(placed.size) < _MOST_GROWN:
        if not left_of(wanted, placed)[size] or not _can_hold(room, wanted, np.append(placed.size, size)):
            size += 1
            continue
        more = _with_one(ground, placed, size, starts)
        if more is None:
            size += 1
        else:
            placed = laid_in_corners(ground, TOWARDS[0], more)
    return placed


def _with_one(ground: Ground, placed: Placed, size: int, starts: Starts) -> Placed | None:
    """The placing with one disc more of a size; None where no start grows to full size."""
    room, wanted = ground.room, ground.wanted
    sizes = np.append(placed.size, size)
    radius_mm = wanted.radius_mm[sizes]
    free = widest_spots(room, placed.centres_mm, radius_mm[:-1], _WIDEST)
    begins = [np.concatenate([placed.centres_mm, spot[None]]) for spot in free]
    for place in range(len(begins) + _SCATTERED):
        begin = begins[place] if place < len(begins) else _scattered(room, radius_mm, place)
        if begin is None or not starts.allow(len(sizes) + len(room.start_mm) // _WALLS_LIKE_A_DISC):
            return None
        centres_mm, share = grown(room, begin, radius_mm, wanted.gap_mm)
        if share >= FULL:
            return Placed(centres_mm=centres_mm, size=sizes, way="grown")
    return None


def _scattered(room: Room, radius_mm: FloatArray, place: int) -> FloatArray | None:
    """Centres anywhere each disc alone has room, the same on every call; None where that is nearly nowhere."""
    numbers = np.random.Generator(np.random.PCG64([len(radius_mm), place]))
    least, greatest = room.start_mm.min(axis=0), room.start_mm.max(axis=0)
    points = least + numbers.random((_THROWS, 2)) * (greatest - least)
    free = clearance_mm(room, points)
    centres, taken = [], np.zeros(len(points), dtype=bool)
    for radius in radius_mm.tolist():
        spots = np.flatnonzero((free >= radius) & ~taken)
        if not len(spots):
            return None
        taken[spots[0]] = True
        centres.append(points[spots[0]])
    return np.array(centres)


def _can_hold(room: Room, wanted: Wanted, sizes: IntArray) -> bool:
    """Whether discs of these sizes are not too many for the sheet by what is proved.

    Discs take no more area than the sheet has. Points at least d apart in a convex region of area A and
    perimeter P are at most 2A/(√3 d²) + P/(2d) + 1 (N. Oler, An inequality in the geometry of numbers, Acta
    Mathematica 105, 1961); the region here is the rectangle that holds the centres of equal discs.
    """
    radius_mm = wanted.radius_mm[sizes]
    if np.pi * (radius_mm**2).sum() > room.inside.area:
        return False
    if len(set(radius_mm.tolist())) > 1:
        return True
    size = np.ptp(room.start_mm, axis=0) - 2 * (radius_mm[0] + room.keep_mm[0])
    apart = 2 * radius_mm[0] + wanted.gap_mm
    width, height = np.maximum(size, 0.0) / apart
    return bool(len(sizes) <= 2 / np.sqrt(3) * width * height + width + height + 1 + 1e-6)
