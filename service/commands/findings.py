"""Findings, told to a person and written for programs."""

from collections.abc import Iterable, Mapping
from dataclasses import asdict
from itertools import groupby
from typing import Any

from layout.check.finding import Finding

LEVELS = ("error", "warning", "advice")
SHOWN_OF_A_KIND = 5  # findings; more of one kind fill the screen and say nothing new


def finding_told(finding: Finding) -> dict[str, Any]:
    """A finding as layout.json writes it; `at` holds only what applies."""
    place = {name: value for name, value in asdict(finding.at).items() if value not in (None, ())}
    return {**asdict(finding), "code": finding.code.value, "level": finding.level.value, "at": place}


def finding_lines(findings: Iterable[Mapping[str, Any]]) -> list[str]:
    """Lines that tell findings, errors first, equal ones together, each kind with what to do.

    Args:
        findings: As layout.json writes them.
    """

    def kind(finding: Mapping[str, Any]) -> tuple[int, str]:
        return LEVELS.index(finding["level"]), finding["code"]

    lines = []
    for _, group in groupby(sorted(findings, key=kind), key=kind):
        alike = list(group)
        for finding in alike[:SHOWN_OF_A_KIND]:
            lines.append(f"{finding['level']} {finding['code']}: {finding['message']}")
            lines.append(f"    what helps: {finding['remedy']}")
        if len(alike) > SHOWN_OF_A_KIND:
            lines.append(f"    and {len(alike) - SHOWN_OF_A_KIND} more {alike[0]['code']}")
    return lines
