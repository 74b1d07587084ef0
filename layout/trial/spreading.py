"""Where everything of a trial piece stands: projections on their tracks first, then ladders, row by row.

Places are a radius and an angle a that grows the way the disc is played: what has the least a
comes under the star wheels first. The disc's own angle is the movement's direction times a.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely

from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.projection import Pattern
from layout.mechanics.spacing import core_geometries
from layout.mechanics.turning import turning_of
from layout.trial.lettering import LETTER_HEIGHT_MM, half_width_mm
from layout.trial.rungs import Row, Rung, clear_rad

MOST_COLUMNS = 12  # in which projections are staggered; openings that reach past so many tracks have no web anywhere
GRAIN_MM = 1e-6  # mm; a nanometre, what rounding may leave
LIFT_MM = (
    0.5  # mm of travel over which a tooth is lifted, where not stated; the shipped movement that states it has 0.35
)
MOST_SECTOR_RAD = math.radians(300)  # ladders stop here: a wider piece is a disc
# A narrower sector bends where it leaves the hub, and is then not flat under the star wheels. Our own choice.
LEAST_SECTOR_RAD = math.radians(45)


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedRung:
    """A rung, the radius of its frame, and the angle a of its middle."""

    rung: Rung
    radius_mm: float
    angle_rad: float
    label_mm: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Spread:
    """The places of everything.

    Attributes:
        track_angle_rad: Shape (n,). Angle a of the working edge on each track tried.
        mark_angle_rad: Shape (n,). Of the middle of the letters that number each of these tracks.
        column_count: In how many columns they stand: every so-manieth track, from the innermost, is in the first.
        stop_rad: Where the line stands that the piece is turned up to.
        rungs: The ladders' rungs.
        left_out: Rows that found no room.
        whole_rad: The angle of the whole sector; a runs from 0 to this.
        web_mm: Metal between everything cut.
    """

    track_angle_rad: FloatArray
    mark_angle_rad: FloatArray
    column_count: int
    stop_rad: float
    rungs: tuple[PlacedRung, ...]
    left_out: tuple[Row, ...]
    whole_rad: float
    web_mm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Ground:
    """What there is to stand on.

    Attributes:
        hub_mm: The hub's radius: ladders stand outside it.
        rim_mm: The disc's radius.
        web_mm: Metal to leave between everything cut.
        side_mm: Metal to leave to the sector's sides and rim.
        rings_mm: Rings, from and to, where no ladder may stand.
    """

    hub_mm: float
    rim_mm: float
    web_mm: float
    side_mm: float
    rings_mm: tuple[tuple[float, float], ...]


def spread(movement: Movement, pattern: Pattern, tracks: Sequence[int], rows: Sequence[Row], ground: Ground) -> Spread:
    """Everything at its place.

    Args:
        movement: For its tracks.
        pattern: Of its projections.
        tracks: The tracks to try, by their place from 0, from the innermost.
        rows: The outermost first.
        ground: What there is to stand on.
    """
    radius_mm = frozen_floats(movement.tracks[index].radius_mm for index in tracks)
    inner_mm = float(radius_mm.min(initial=ground.rim_mm) + pattern.core_points_mm[:, 1].min()) - pattern.core_round_mm
    half_mm = float(np.abs(pattern.core_points_mm[:, 0]).max()) + pattern.core_round_mm
    letters_mm = max((half_width_mm(f"T{index + 1}") for index in tracks), default=0.0)
    before_rad = np.array([_before_rad(radius - LETTER_HEIGHT_MM, half_mm, letters_mm, ground) for radius in radius_mm])
    side_rad = clear_rad(inner_mm - LETTER_HEIGHT_MM, letters_mm, ground.side_mm)
    first_rad = side_rad + float(before_rad.max(initial=0.0))
    staggered = _staggered(pattern, _plucking(movement, tracks), ground)
    stop_rad = first_rad + float(staggered.angle_rad.max(initial=0.0)) + clear_rad(inner_mm, half_mm, ground.web_mm)
    rungs, left_out, end_rad = _stacked(rows, ground, stop_rad + clear_rad(inner_mm, 0.0, ground.web_mm))
    whole_rad = max(end_rad, LEAST_SECTOR_RAD)
    shift_rad = (whole_rad - end_rad) / 2
    return Spread(
        track_angle_rad=first_rad + staggered.angle_rad + shift_rad,
        mark_angle_rad=first_rad + staggered.angle_rad - before_rad + shift_rad,
        column_count=staggered.column_count,
        stop_rad=stop_rad + shift_rad,
        rungs=tuple(
            PlacedRung(rung=p.rung, radius_mm=p.radius_mm, angle_rad=p.angle_rad + shift_rad, label_mm=p.label_mm)
            for p in rungs
        ),
        left_out=left_out,
        whole_rad=whole_rad,
        web_mm=staggered.web_mm,
    )


def _before_rad(radius_mm: float, half_mm: float, letters_mm: float, ground: Ground) -> float:
    """From the middle of a track's number to its projection, on a radius."""
    return clear_rad(radius_mm, half_mm, ground.web_mm / 2) + clear_rad(radius_mm, letters_mm, ground.web_mm / 2)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Staggered:
    """Angles of the tracks' projections from the first one's, in columns; web_mm: the metal between them."""

    angle_rad: FloatArray
    column_count: int
    web_mm: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Plucking:
    """Of each track: its radius, the turn over which its teeth are lifted, and how far past the row it releases."""

    radius_mm: FloatArray
    lifted_rad: FloatArray
    release_rad: FloatArray


def _plucking(movement: Movement, tracks: Sequence[int]) -> _Plucking:
    turning = turning_of(movement)
    places = list(tracks)
    lifted_mm = frozen_floats(_lifted_mm(movement, index) for index in tracks)
    return _Plucking(
        radius_mm=turning.radius_mm[places],
        lifted_rad=lifted_mm / turning.radius_mm[places],
        # a = s·α, and α = s·φ + asin((d − s·a)/r): the edge stands ahead of its turn φ by s times the arcsine.
        release_rad=turning.direction * turning.release_rad[places],
    )


def _staggered(pattern: Pattern, plucking: _Plucking, ground: Ground) -> _Staggered:
    """Projections in the fewest columns that leave the web; where none do, in those that leave the most.

    Columns follow one another, and in each the tracks from the innermost, each after the one before by what
    its star wheel lifts its tooth over: so no two teeth are lifted at once.
    """
    radius_mm = plucking.radius_mm
    inner_mm = float(radius_mm.min(initial=ground.rim_mm) + pattern.core_points_mm[:, 1].min()) - pattern.core_round_mm
    half_mm = float(np.abs(pattern.core_points_mm[:, 0]).max()) + pattern.core_round_mm
    step_rad = 2 * clear_rad(inner_mm, half_mm, ground.web_mm / 2)
    best = _Staggered(angle_rad=np.zeros(len(radius_mm)), column_count=1, web_mm=-math.inf)
    for columns in range(1, MOST_COLUMNS + 1):
        turned_rad, start_rad = np.zeros(len(radius_mm)), 0.0
        for column in range(columns):
            after_rad = np.cumsum(plucking.lifted_rad[column::columns])
            turned_rad[column::columns] = start_rad + after_rad
            start_rad += max(float(after_rad.max(initial=0.0)), step_rad)
        angle_rad = turned_rad + plucking.release_rad
        angle_rad -= angle_rad.min(initial=math.inf)
        found_mm = _least_web_mm(pattern, radius_mm, angle_rad, ground.web_mm)
        if found_mm > best.web_mm:
            best = _Staggered(angle_rad=angle_rad, column_count=columns, web_mm=found_mm)
        if found_mm >= ground.web_mm:
            break
    return best


def _least_web_mm(pattern: Pattern, radius_mm: FloatArray, angle_rad: FloatArray, most_mm: float) -> float:
    """The least metal between any two of these openings, no more than is asked for."""
    cores = core_geometries(on_disc_mm(pattern.core_points_mm, radius_mm, angle_rad, 1, pattern.strike_u_mm))
    one, two = shapely.STRtree(cores).query(cores, predicate="dwithin", distance=most_mm + 2 * pattern.core_round_mm)
    near_mm = shapely.distance(cores[one[one < two]], cores[two[one < two]]) - 2 * pattern.core_round_mm
    least_mm = float(near_mm.min(initial=most_mm))
    return most_mm if least_mm >= most_mm - GRAIN_MM else least_mm


def _lifted_mm(movement: Movement, index: int) -> float:
    """How far a track's projection travels while it lifts teeth, where stated; else LIFT_MM."""
    stated = [tooth.lift_mm for tooth in movement.teeth if tooth.track == index + 1 and tooth.lift_mm is not None]
    return max(stated, default=LIFT_MM)


def _stacked(rows: Sequence[Row], ground: Ground, start_rad: float) -> tuple[list[PlacedRung], tuple[Row, ...], float]:
    """Rows one under the other, in stacks side by side: rungs, rows without room, and where the last stack ends."""
    placed: list[PlacedRung] = []
    left = list(rows)
    left_out: list[Row] = []
    end_rad = start_rad
    while left:
        stack, stack_end_rad = _one_stack(left, ground, end_rad)
        if not stack or stack_end_rad > MOST_SECTOR_RAD:
            left_out.append(left.pop(0))
            continue
        placed += [rung for row_rungs in stack for rung in row_rungs]
        left = left[len(stack) :]
        end_rad = stack_end_rad
    inner_mm = min((p.radius_mm + p.rung.from_mm for p in placed), default=ground.rim_mm)
    return placed, tuple(left_out), end_rad + clear_rad(inner_mm, 0.0, ground.side_mm)


def _one_stack(rows: Sequence[Row], ground: Ground, start_rad: float) -> tuple[list[list[PlacedRung]], float]:
    stack: list[list[PlacedRung]] = []
    top_mm, end_rad = ground.rim_mm - ground.side_mm, start_rad
    for row in rows:
        radius_mm = _radius_mm(row, top_mm, ground)
        if radius_mm is None:
            break
        half_rad = row.half_rad(radius_mm, ground.web_mm)
        stack.append(
            [
                PlacedRung(
                    rung=rung,
                    radius_mm=radius_mm,
                    angle_rad=start_rad + (2 * place + 1) * half_rad,
                    label_mm=row.label_mm,
                )
                for place, rung in enumerate(row.rungs)
            ]
        )
        end_rad = max(end_rad, start_rad + 2 * len(row.rungs) * half_rad)
        top_mm = radius_mm + row.from_mm - ground.web_mm
    return stack, end_rad


def _radius_mm(row: Row, top_mm: float, ground: Ground) -> float | None:
    """The largest radius on which a row stays under a top, clear of rings and hub; None where there is none."""
    while top_mm > row.reach_mm:
        radius_mm = math.sqrt(top_mm**2 - row.reach_mm**2) - row.to_mm
        low_mm = radius_mm + row.from_mm
        if low_mm < ground.hub_mm + ground.web_mm:
            return None
        met = [ring for ring in ground.rings_mm if ring[0] < top_mm and low_mm < ring[1]]
        if not met:
            return radius_mm
        top_mm = min(ring[0] for ring in met)
    return None
