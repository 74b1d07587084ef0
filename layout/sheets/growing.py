"""Discs grown from too small to full size, moving out of each other's way, by linear programs.

The distance of two centres is at least its share along any one direction: |c − c'| ≥ u·(c − c'). So
with u the direction from one centre to the other as they stand, u·(c − c') ≥ d is a linear rule that
is never too lax, and the same holds against a wall with u from the wall's nearest point. The program
that makes the discs largest under these rules gives places that are as good or better; from there u is
taken anew. What no longer grows is as large as small moves can make it.
"""

import highspy
import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray
from layout.sheets.room import GRAIN_MM, Room, clearance_mm, nearest_on_walls

FULL = 1.0  # of the radii wanted
_ROUNDS = 60  # programs for one start; most end far sooner
_STALLED = 1e-5  # a round that makes discs larger by a smaller share of their radius is the last
_TINY = 1e-3  # share of a radius; what a start is pulled apart to, so that every direction is known


def grown(room: Room, centres_mm: FloatArray, radius_mm: FloatArray, gap_mm: float) -> tuple[FloatArray, float]:
    """The centres moved so that discs of these radii fit best, and the share of their radii they can have.

    Args:
        room: The sheet's; all centres lie inside it.
        centres_mm: Shape (n, 2). Where the discs start.
        radius_mm: Shape (n,). As wanted.
        gap_mm: Least distance of two rims.

    Returns:
        The centres, and a share that is at least 1 where all discs fit with their full radii.
    """
    at = centres_mm
    share = share_of(room, at, radius_mm, gap_mm)
    reach_mm = float(radius_mm.mean())
    for _ in range(_ROUNDS):
        moved = _moved(room, at, radius_mm, gap_mm, reach_mm)
        if moved is None:
            break
        new_share = share_of(room, moved, radius_mm, gap_mm)
        if new_share <= share:
            break
        at, gain, share = moved, new_share - share, new_share
        if share >= FULL or gain < _STALLED or share + _ROUNDS * gain < FULL:
            break
    return at, share


def share_of(room: Room, at: FloatArray, radius_mm: FloatArray, gap_mm: float) -> float:
    """The share of their radii that discs at these centres can all have; −inf where one lies outside."""
    first, second = np.triu_indices(len(at), 1)
    apart = np.hypot(*(at[first] - at[second]).T) - gap_mm
    pairs = (apart + GRAIN_MM / 2) / (radius_mm[first] + radius_mm[second])
    walls = (clearance_mm(room, at) + GRAIN_MM / 2) / radius_mm
    return float(min(pairs.min(initial=np.inf), walls.min(initial=np.inf)))


def _moved(room: Room, at: FloatArray, radius_mm: FloatArray, gap_mm: float, reach_mm: float) -> FloatArray | None:
    """One program: every centre moves by at most the reach along x and y; None where it has no answer."""
    count = len(at)
    far = 2 * np.sqrt(2) * reach_mm  # two centres come nearer by at most this
    first, second = np.triu_indices(count, 1)
    between = at[first] - at[second]
    apart = np.hypot(between[:, 0], between[:, 1])
    near = apart < FULL * (radius_mm[first] + radius_mm[second]) + gap_mm + far
    first, second, between, apart = first[near], second[near], between[near], apart[near]
    way = between / np.maximum(apart, GRAIN_MM)[:, None]
    on_wall = nearest_on_walls(room, at)
    off = at[:, None] - on_wall
    distance = np.hypot(off[..., 0], off[..., 1])
    disc, wall = np.nonzero(distance < FULL * radius_mm[:, None] + room.keep_mm + far / 2)
    out = off[disc, wall] / np.maximum(distance[disc, wall], GRAIN_MM)[:, None]
    # Columns: every x, every y, then the share. Rows: pairs, then walls.
    pair_rows, wall_rows = np.arange(len(first)), len(first) + np.arange(len(disc))
    rows = np.concatenate([*(pair_rows for _ in range(5)), *(wall_rows for _ in range(3))])
    columns = np.concatenate(
        [
            *(first, first + count, second, second + count, np.full(len(first), 2 * count)),
            *(disc, disc + count, np.full(len(disc), 2 * count)),
        ]
    )
    values = np.concatenate(
        [
            *(way[:, 0], way[:, 1], -way[:, 0], -way[:, 1], -(radius_mm[first] + radius_mm[second])),
            *(out[:, 0], out[:, 1], -radius_mm[disc]),
        ]
    )
    at_least = np.concatenate(
        [np.full(len(first), gap_mm), (out * on_wall[disc, wall]).sum(axis=1) + room.keep_mm[wall]]
    )
    centres = np.concatenate([at[:, 0], at[:, 1]])
    bounds = (np.append(centres - reach_mm, -FULL), np.append(centres + reach_mm, FULL + GRAIN_MM))
    solution = _largest_last(bounds, (rows, columns, values), at_least)
    return None if solution is None else np.column_stack([solution[:count], solution[count : 2 * count]])


def _largest_last(
    bounds: tuple[FloatArray, FloatArray], entries: tuple[IntArray, IntArray, FloatArray], at_least: FloatArray
) -> FloatArray | None:
    """The columns within their bounds, every row at least so much, the last column as large as can be."""
    rows, columns, values = entries
    order = np.lexsort((columns, rows))
    model = highspy.HighsLp()
    model.num_col_, model.num_row_ = len(bounds[0]), len(at_least)
    model.col_cost_ = np.append(np.zeros(len(bounds[0]) - 1), -1.0)
    model.col_lower_, model.col_upper_ = bounds
    model.row_lower_, model.row_upper_ = at_least, np.full(len(at_least), highspy.kHighsInf)
    model.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    model.a_matrix_.start_ = np.concatenate([[0], np.cumsum(np.bincount(rows, minlength=len(at_least)))])
    model.a_matrix_.index_, model.a_matrix_.value_ = columns[order], values[order]
    highs = highspy.Highs()  # type: ignore[no-untyped-call]  # the library's own gap
    for name, value in {"output_flag": False, "threads": 1}.items():
        highs.setOptionValue(name, value)
    highs.passModel(model)
    highs.run()
    if highs.getModelStatus() != highspy.HighsModelStatus.kOptimal:
        return None
    return np.array(highs.getSolution().col_value)
