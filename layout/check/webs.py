"""Checks on the metal left between openings, after forming.

A *web* is the metal between two openings. Openings are the holes that remain once the tabs are
formed; all have one pattern, so the distance between their cores less twice the rounding is exact.
"""

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, MOST_FINDINGS, told_worth, unsure_advice
from layout.check.worth import most_web_unsure_mm, web_unsure_mm
from layout.mechanics.arrays import FloatArray, IntArray
from layout.place.disc import Disc


def webs_between_openings_hold(disc: Disc) -> list[Finding]:
    """An error for every pair of openings nearer than the cutter's least web, thinnest first.

    Then advice, at most one for webs along a track and one for webs across: of those that hold, the one that is the
    least sure to, by what the movement's numbers are worth.
    """
    limit_mm = disc.cutter.min_web_mm
    one, two, webs_mm = disc.openings.webs_within(limit_mm + most_web_unsure_mm(disc))
    order = np.lexsort((two, one, webs_mm))
    one, two, webs_mm = one[order], two[order], webs_mm[order]
    thin_count = int(np.searchsorted(webs_mm, limit_mm - GRAIN_MM))
    findings = [
        _web(disc, int(one[pair]), int(two[pair]), float(webs_mm[pair]))
        for pair in range(min(thin_count, MOST_FINDINGS))
    ]
    if thin_count > MOST_FINDINGS:
        findings.append(_more(disc, thin_count))
    return findings + _unsure(disc, one[thin_count:], two[thin_count:], webs_mm[thin_count:])


def _unsure(disc: Disc, one: IntArray, two: IntArray, webs_mm: FloatArray) -> list[Finding]:
    """Advice for the least sure web of each kind, of webs that hold: where its numbers are worth less than that."""
    unsure_mm = np.array([web_unsure_mm(disc, *pair) for pair in zip(one.tolist(), two.tolist(), strict=True)])
    over_mm = webs_mm - disc.cutter.min_web_mm - unsure_mm
    along = disc.track_index[one] == disc.track_index[two]
    findings = []
    for of_kind in (np.flatnonzero(along), np.flatnonzero(~along)):
        if len(of_kind) and over_mm[of_kind].min() < 0:
            pair = of_kind[np.argmin(over_mm[of_kind])]
            findings.append(unsure_advice(_web(disc, int(one[pair]), int(two[pair]), float(webs_mm[pair]))))
    return findings


def _web(disc: Disc, one: int, two: int, web_mm: float) -> Finding:
    tracks = tuple(int(disc.track_index[index]) + 1 for index in (one, two))
    limit_mm = disc.cutter.min_web_mm
    left = f"leave {web_mm:.3f} mm of metal between them" if web_mm > 0 else "run into each other"
    worth = told_worth(web_mm - limit_mm, web_unsure_mm(disc, one, two), "mm", fails=web_mm < limit_mm - GRAIN_MM)
    return Finding(
        code=Code.WEB_TOO_THIN,
        level=Level.ERROR,
        message=(
            f"Openings on tracks {tracks[0]} and {tracks[1]} {left}; {disc.cutter.id} needs {limit_mm:.3f} mm.{worth}"
        ),
        measured=web_mm,
        limit=limit_mm,
        unit="mm",
        at=Place(
            tracks=tracks,
            projections=(one, two),
            radius_mm=float(disc.radius_mm[[one, two]].mean()),
            angle_deg=float(np.degrees(disc.edge_angle_rad[one])),
        ),
        remedy="Leave one of the two notes out or put it on another track; or use narrower slits.",
    )


def _more(disc: Disc, count: int) -> Finding:
    return Finding(
        code=Code.WEB_TOO_THIN,
        level=Level.ERROR,
        message=f"{count} pairs of openings are too near to each other; the {MOST_FINDINGS} thinnest webs are listed.",
        measured=float(count),
        limit=float(MOST_FINDINGS),
        unit="",
        at=Place(),
        remedy="The disc is crowded as a whole: check that drawing, movement and cutter belong together.",
    )
