"""hits.csv: the projections one by one in cutting order, for a press's operator or its program."""

import csv
import io

import numpy as np

from layout.cut.plan import CutPlan
from layout.documents.reading import FULL_TURN_DEG
from layout.place.disc import Disc
from layout.write.laid_out import NOT_GOOD
from layout.write.numbers import DECIMALS_DEG, DECIMALS_MM, rounded

COLUMNS = ("sequence", "tool", "radius_mm", "angle_deg", "x_mm", "y_mm", "track", "pitch")
MARK_COLUMN = "not_good"  # only there on a disc that is cut despite an error


def write_hits(plan: CutPlan, disc: Disc) -> bytes:
    r"""The projections in cutting order as CSV (RFC 4180: a header line, lines end in \r\n), ASCII.

    Coordinates are the drawings': mirrored where the cutter draws from the star side. They say where
    a press strikes, or on a laser the middle of the working edge. Lengths carry six decimals, a
    nanometre, and angles eight, less than that at the rim: finer than any machine is set. Where an
    error was overruled, a last column says in every row that the disc is not good to cut. A disc
    without projections gives the header alone.

    Args:
        plan: The cut plan of the disc.
        disc: For the track of each projection and its comb.
    """
    radius_mm = rounded(np.hypot(plan.at_mm[:, 0], plan.at_mm[:, 1]))
    angle_deg = np.degrees(np.arctan2(plan.at_mm[:, 1], plan.at_mm[:, 0])) % FULL_TURN_DEG
    angle_deg = rounded(angle_deg, DECIMALS_DEG) % FULL_TURN_DEG  # again: 359.999999999 rounds to 360
    at_mm = rounded(plan.at_mm)
    pitches = {tooth.track: tooth.pitch for tooth in reversed(disc.movement.teeth)}
    text = io.StringIO(newline="")
    rows = csv.writer(text, lineterminator="\r\n")
    marks = [] if plan.not_good is None else [NOT_GOOD]
    rows.writerow([*COLUMNS, *[MARK_COLUMN for _ in marks]])
    for place, projection in enumerate(plan.order.tolist()):
        track = int(disc.track_index[projection]) + 1
        numbers = (radius_mm[place], angle_deg[place], *at_mm[place])
        decimals = (DECIMALS_MM, DECIMALS_DEG, DECIMALS_MM, DECIMALS_MM)
        written = [f"{value:.{count}f}" for value, count in zip(numbers, decimals, strict=True)]
        rows.writerow([place + 1, plan.tool, *written, track, pitches.get(track, ""), *marks])
    return text.getvalue().encode("ascii")
