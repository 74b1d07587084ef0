"""How long the machine takes: T = L/v + n·t for each kind of work, one after the other.

Each kind runs at its stated speed from end to end. Speeding up and slowing down at corners is not in it, so short
contours take longer than told; a table that turns while its slide moves takes less.
"""

import math
from dataclasses import fields

from layout.cut.plan import CutPath
from layout.documents.making import Feeds
from layout.making.making import TimeParts


def time_parts(path: CutPath, feeds: Feeds) -> TimeParts:
    """The seconds of each kind of work; 0 where there is none of it, None where its speed is not stated.

    Published worked example (a laser cutting calculator's): 1.0 m at 3 m/min, 5 pierces of 0.5 s and 500 mm at
    50 m/min take 20.0 + 2.5 + 0.6 = 23.1 s.

    Args:
        path: What the machine travels and strikes.
        feeds: How fast it works.
    """
    return TimeParts(
        cut_s=_along(path.cut_length_mm, feeds.cut_mm_per_s),
        mark_s=_along(path.mark_length_mm, feeds.mark_mm_per_s),
        rapid_s=_along(path.rapid_length_mm, feeds.rapid_mm_per_s),
        pierce_s=_each(path.pierce_count, feeds.pierce_s),
        hit_s=_each(path.hit_count, feeds.hit_s),
        turn_s=_along(math.degrees(path.turned_rad), feeds.turn_deg_per_s),
        slide_s=_along(path.slid_mm, feeds.slide_mm_per_s),
        tool_change_s=_each(path.tool_change_count, feeds.tool_change_s),
    )


# Which field of Feeds each part of the time needs.
_FEED_OF_PART = {
    "cut_s": "cut_mm_per_s",
    "mark_s": "mark_mm_per_s",
    "rapid_s": "rapid_mm_per_s",
    "pierce_s": "pierce_s",
    "hit_s": "hit_s",
    "turn_s": "turn_deg_per_s",
    "slide_s": "slide_mm_per_s",
    "tool_change_s": "tool_change_s",
}


def sum_s(parts: TimeParts) -> float | None:
    """The sum of all parts; None where one of them is None."""
    seconds = [getattr(parts, part.name) for part in fields(parts)]
    return None if None in seconds else math.fsum(seconds)


def feeds_not_stated(parts: TimeParts) -> tuple[str, ...]:
    """The fields of the cutter document that the missing parts need; empty where none is missing."""
    return tuple(f"cutter.feeds.{feed}" for part, feed in _FEED_OF_PART.items() if getattr(parts, part) is None)


def _along(length: float, per_s: float | None) -> float | None:
    if length == 0:
        return 0.0
    return None if per_s is None else length / per_s


def _each(count: int, one_s: float | None) -> float | None:
    if count == 0:
        return 0.0
    return None if one_s is None else count * one_s
