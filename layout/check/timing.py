"""Check that fast passages of the top line lie on tracks that can be cut closely enough in time."""

import math

import numpy as np

from layout.arrange.arrangement import Arrangement
from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import told_worth
from layout.mechanics.arrays import FloatArray, IntArray, end_to_end
from layout.mechanics.tolerances import ORDER_HEARD_MS, place_error
from layout.place.disc import Disc

# ms; below it the just noticeable difference of a moment is constant, 6 ms, above it a share of the time between
# (Friberg and Sundberg, JASA 98, 1995, p. 2524, by its abstract): notes nearer than it are fast.
FAST_BELOW_MS = 240.0

_ONE_MOMENT_S = 1e-6  # s; onsets nearer than it are one


def fast_passages_are_held(arrangement: Arrangement, disc: Disc) -> list[Finding]:
    """A warning, at most one, where fast notes of the top line lie on tracks cut too coarsely for them.

    Fast are notes whose moment is nearer than FAST_BELOW_MS to that of the note of the top line
    before or after. Too coarse is a track whose position and angle errors together may pass
    ORDER_HEARD_MS. The play of the centre hole is left out: it comes and goes once a turn, so it moves the
    notes of a passage together.

    Args:
        arrangement: Its top line, at the moments asked for. Notes left out are not counted.
        disc: Placed from it: projection i is pluck i.
    """
    plucks, gap_ms = _fast(arrangement)
    tracks = np.unique(arrangement.track_index[plucks]).tolist()
    error_ms = {track: place_error(disc.movement, disc.cutter, track).cut_ms for track in tracks}
    errors_ms = np.array([error_ms[int(track)] for track in arrangement.track_index[plucks]])
    coarse = np.flatnonzero(errors_ms > ORDER_HEARD_MS)
    if not len(coarse):
        return []
    # The coarsest track, there the two notes nearest to each other, of them the first.
    worst = int(coarse[np.lexsort((plucks[coarse], gap_ms[coarse], -errors_ms[coarse]))[0]])
    pluck, track = int(plucks[worst]), int(arrangement.track_index[plucks[worst]])
    radius_mm = float(disc.turning.radius_mm[track])
    others = f"; {len(coarse)} notes of such passages lie on tracks cut as coarsely" if len(coarse) > 1 else ""
    return [
        Finding(
            code=Code.TIMING_TOO_COARSE,
            level=Level.WARNING,
            message=(
                f"Track {track + 1}, at {radius_mm:.2f} mm, can be cut within {errors_ms[worst]:.1f} ms either way; "
                f"at {arrangement.planned_s[pluck]:.3f} s it plays a note of the top line {gap_ms[worst]:.0f} ms from "
                f"the next, where more than {ORDER_HEARD_MS:.0f} ms is heard{others}."
                + told_worth(ORDER_HEARD_MS - errors_ms[worst], _unsure_ms(disc, track), "ms", fails=True)
            ),
            measured=float(errors_ms[worst]),
            limit=ORDER_HEARD_MS,
            unit="ms",
            at=Place(
                tracks=(track + 1,),
                projections=(pluck,),
                radius_mm=radius_mm,
                angle_deg=math.degrees(disc.edge_angle_rad[pluck]),
                sounds_s=float(arrangement.planned_s[pluck]),
            ),
            remedy="Use a cutter that holds its position closer, slow the tune down, or transpose it further out.",
        )
    ]


def _unsure_ms(disc: Disc, track: int) -> float:
    """How far a track's error in time may be off: e·T/(2πr) by shares of turn and radius, an angle's by the turn's."""
    movement, error = disc.movement, place_error(disc.movement, disc.cutter, track)
    turn_share = movement.plus_minus("/revolution_s") / movement.revolution_s
    radius_share = movement.plus_minus(f"/tracks/{track}/radius_mm") / movement.tracks[track].radius_mm
    return error.position_ms * (turn_share + radius_share) + error.angle_ms * turn_share


def _fast(arrangement: Arrangement) -> tuple[IntArray, FloatArray]:
    """The plucks that play fast notes of the top line, and how far each is from the nearest other, in ms."""
    pluck, note = end_to_end(arrangement.notes)
    plucks = np.unique(pluck[arrangement.highest[note]])
    asked_s = arrangement.asked_s[plucks]
    onsets_s = np.unique(asked_s)
    if len(onsets_s):
        onsets_s = onsets_s[np.concatenate([[True], np.diff(onsets_s) > _ONE_MOMENT_S])]
    gaps_s = np.concatenate([[np.inf], np.diff(onsets_s), [np.inf]])
    place = np.searchsorted(onsets_s, asked_s + _ONE_MOMENT_S) - 1
    gap_ms = np.minimum(gaps_s[place], gaps_s[place + 1]) * 1000
    fast = gap_ms < FAST_BELOW_MS
    return plucks[fast], gap_ms[fast]
