"""Findings, told to a person."""

from collections.abc import Iterable, Mapping
from typing import Any

LEVELS = ("error", "warning", "advice")
SHOWN_OF_A_KIND = 5  # findings; more of one kind fill the screen and say nothing new


def finding_lines(findings: Iterable[Mapping[str, Any]]) -> list[str]:
    """Lines that tell findings, errors first, equal ones together, each with its place and what to do.

    Kinds of one level come in the order in which they were found.

    Args:
        findings: As layout.json writes them.
    """
    kinds: dict[tuple[int, str], list[Mapping[str, Any]]] = {}
    for finding in findings:
        kinds.setdefault((LEVELS.index(finding["level"]), finding["code"]), []).append(finding)
    lines = []
    for (level, code), alike in sorted(kinds.items(), key=lambda kind: kind[0][0]):
        for finding in alike[:SHOWN_OF_A_KIND]:
            lines.append(f"{LEVELS[level]} {code}: {finding['message']}")
            place = place_told(finding.get("at", {}))
            lines += [f"    where: {place}"] if place else []
            lines.append(f"    what helps: {finding['remedy']}")
        if len(alike) > SHOWN_OF_A_KIND:
            lines.append(f"    and {len(alike) - SHOWN_OF_A_KIND} more {code}")
    return lines


def place_told(at: Mapping[str, Any]) -> str:
    """Where on the disc, in words; "" for a finding without a place.

    Args:
        at: As layout.json writes it.
    """
    parts = []
    if tracks := at.get("tracks"):
        parts.append(f"track{'s' if len(tracks) > 1 else ''} {', '.join(map(str, tracks))}")
    if "radius_mm" in at:
        parts.append(f"radius {thousandths(at['radius_mm'])} mm")
    if "angle_deg" in at:
        parts.append(f"angle {thousandths(at['angle_deg'])} degrees seen from the label side")
    if "sounds_s" in at:
        parts.append(f"moment {thousandths(at['sounds_s'])} s")
    return "; ".join(parts)


def thousandths(value: float) -> str:
    """The value to three decimals, never "-0.000"."""
    return f"{round(value, 3) + 0.0:.3f}"
