"""A press's rotary table and radial slide: what they travel from one strike to the next.

A table driven through gears has backlash: it stands a little differently on the same angle as it came
onto it from one side or the other. So it comes onto every angle from the same side, and where it must
go back it goes a little too far and turns onto the angle again (common practice).

Angles here are *forward* angles: they rise the way the table turns onto its strikes.
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats

HALF_TURN_RAD = math.pi
FULL_TURN_RAD = 2 * math.pi
_SAME_RAD = 1e-12  # rad; two angles nearer than this are one, but for rounding
LONGEST_TICKS = 1e9  # ticks; as fine as the nanometre of our files on a disc of a metre, and sums fit 64 bits
MIDDLE_MM = 1e-6  # mm; a nanometre: a strike nearer the table's middle than this stands in it
SHARES = 1000  # of a tick; the shorter of two moves counts one of them, so that it decides only between equals


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TableMoves:
    """Where the table stands, strike by strike.

    Attributes:
        to_rad: Shape (n,). Forward angle of every strike, counted on over whole turns.
        taken_up: Shape (n,). Whether the table goes take_up_rad below the angle first, then onto it.
        take_up_rad: More than the table's backlash; 0 for a table that may come from either side.
    """

    to_rad: FloatArray
    taken_up: BoolArray
    take_up_rad: float

    @property
    def turned_rad(self) -> float:
        """What the table turns from the first strike to the last, both ways counted."""
        plain = float(np.abs(np.diff(self.to_rad)).sum())
        return plain + 2 * self.take_up_rad * int(self.taken_up[1:].sum())


def table_moves(forward_rad: FloatArray, *, take_up_rad: float) -> TableMoves:
    """The moves of a table that strikes at these angles in this order.

    From one strike to the next it takes the shorter way round, forward where both are equal; so no
    step is longer than half a turn, what is taken up aside.

    Args:
        forward_rad: Shape (n,). Forward angles of the strikes, any whole turns; (0,) gives no moves.
        take_up_rad: How far below an angle the table goes to come onto it forwards: before the first
            strike, and after every move back. 0 for a table that may come onto it from either side.
    """
    if not len(forward_rad):
        return TableMoves(to_rad=frozen_floats([]), taken_up=np.zeros(0, dtype=np.bool_), take_up_rad=take_up_rad)
    steps = np.mod(np.diff(forward_rad), FULL_TURN_RAD)
    steps[steps > FULL_TURN_RAD - _SAME_RAD] = 0.0
    steps = np.where(steps > HALF_TURN_RAD + _SAME_RAD, steps - FULL_TURN_RAD, steps)
    to_rad = frozen_floats(float(forward_rad[0]) + np.concatenate([[0.0], np.cumsum(steps)]))
    taken_up = np.concatenate([[True], steps < 0]) if take_up_rad > 0 else np.zeros(len(to_rad), dtype=np.bool_)
    return TableMoves(to_rad=to_rad, taken_up=taken_up, take_up_rad=take_up_rad)


def forward_angles_rad(at_mm: FloatArray, sense: int) -> FloatArray:
    """Shape (n,). Forward angles of strikes in their order, in a turn from 0 the way of `sense`.

    A strike in the table's middle is round and has no angle: it is made at the angle of the next strike
    that has one, so that the table need not turn between them; else of the one before, else at 0.

    Args:
        at_mm: Shape (n, 2). Strike points in the order struck.
        sense: +1 where angles rise the way the table turns onto its strikes, else −1.
    """
    turned_rad = sense * np.mod(np.arctan2(at_mm[:, 1], at_mm[:, 0]), FULL_TURN_RAD)
    with_angle = np.flatnonzero(np.hypot(at_mm[:, 0], at_mm[:, 1]) >= MIDDLE_MM)
    if not len(with_angle):
        return frozen_floats(np.zeros(len(at_mm)))
    next_one = np.searchsorted(with_angle, np.arange(len(at_mm)))
    return frozen_floats(turned_rad[with_angle[np.minimum(next_one, len(with_angle) - 1)]])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Table:
    """The strikes of one disc in whole ticks, so that the best order is the same on every machine.

    A full turn, or the slide's way out to the outermost strike where that takes longer, is LONGEST_TICKS.

    Attributes:
        turn_ticks: Shape (n,). Forward angle of every strike, in [0, full_turn_ticks).
        slide_ticks: Shape (n,). Where the slide stands.
        full_turn_ticks: One turn of the table.
        take_up_ticks: Turning what takes up the backlash; 0 for a table that may come from either side.
    """

    turn_ticks: IntArray
    slide_ticks: IntArray
    full_turn_ticks: int
    take_up_ticks: int

    def cost(self, one: IntArray, two: IntArray) -> IntArray:
        """What going from strikes `one` to strikes `two` costs; shapes as broadcast.

        Table and slide move at once, so the longer of the two counts. The rest decides between equals.
        """
        forward = self.turn_ticks[two] - self.turn_ticks[one]
        forward = np.where(forward < 0, forward + self.full_turn_ticks, forward)  # mod, without its slow division
        back = self.full_turn_ticks - forward
        turn = np.where(2 * forward <= self.full_turn_ticks, forward, back + 2 * self.take_up_ticks)
        slide = np.abs(self.slide_ticks[two] - self.slide_ticks[one])
        return np.asarray(SHARES * np.maximum(turn, slide) + np.minimum(turn, slide), dtype=np.int64)


def table_of(
    radius_mm: FloatArray,
    forward_rad: FloatArray,
    *,
    take_up_rad: float,
    turn_rad_per_s: float | None,
    slide_mm_per_s: float | None,
) -> Table:
    """Strikes in ticks.

    Args:
        radius_mm: Shape (n,). Distance of each strike from the centre.
        forward_rad: Shape (n,). Its forward angle.
        take_up_rad: As for `table_moves`.
        turn_rad_per_s: Speed of the table; None where not stated.
        slide_mm_per_s: Speed of the slide. Where either is not stated, ways are compared instead: the
            slide's own, and what the outermost strike goes on its circle.
    """
    if turn_rad_per_s is None or slide_mm_per_s is None:
        turn_rad_per_s, slide_mm_per_s = 1.0 / max(float(np.max(radius_mm, initial=0.0)), 1.0), 1.0
    longest = max(FULL_TURN_RAD / turn_rad_per_s, float(np.max(radius_mm, initial=0.0)) / slide_mm_per_s)
    per_rad, per_mm = LONGEST_TICKS / longest / turn_rad_per_s, LONGEST_TICKS / longest / slide_mm_per_s
    full_turn = max(round(FULL_TURN_RAD * per_rad), 1)
    return Table(
        turn_ticks=np.rint(np.mod(forward_rad, FULL_TURN_RAD) * per_rad).astype(np.int64) % full_turn,
        slide_ticks=np.rint(radius_mm * per_mm).astype(np.int64),
        full_turn_ticks=full_turn,
        take_up_ticks=round(take_up_rad * per_rad),
    )
