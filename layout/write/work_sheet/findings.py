"""The findings of the disc: every kind of them, errors first, and as many more as there is room for."""

from collections import Counter
from dataclasses import dataclass

from layout.check.finding import Finding, Level
from layout.write.laid_out import LaidOut
from layout.write.svg_header import level_counts
from layout.write.work_sheet.paper import SMALL, Area, Face, Paper, at_most, headed, wrapped

_BOLD = Face(size_mm=SMALL.size_mm, bold=True)
_LEVEL_MM, _CODE_MM = 14.0, 34.0
_MOST_LINES = 2  # of one message where there is no room for all; layout.json has it whole
_URGENCY = {level: place for place, level in enumerate(Level)}
_Kind = tuple[Level, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Listing:
    """What is written: findings with their lines, and the words under them."""

    entries: tuple[tuple[Finding, tuple[str, ...]], ...]
    tail: tuple[str, ...]

    @property
    def line_count(self) -> int:
        """How many lines it takes."""
        return sum(len(lines) for _, lines in self.entries) + len(self.tail)


def findings_written(paper: Paper, area: Area, laid_out: LaidOut) -> Area:
    """Writes the findings down from the top of an area, and gives what is left.

    Where there is room for all of them, each is told whole, with what to do about it. Else the first
    finding of every kind comes before the second of any, and what is not listed is counted by its
    code, so that every code stands on the sheet.
    """
    counts = ", ".join(level_counts(laid_out)) or "none"
    area = headed(paper, area, f"Findings: {counts}")
    if not laid_out.findings:
        return area
    room = int((area.height_mm + 1e-6) / SMALL.line_mm)
    listing = _listing(laid_out.findings, area.width_mm, room)
    for finding, lines in listing.entries:
        base_mm = area.top_mm - SMALL.size_mm * 0.8
        paper.text((area.left_mm, base_mm), finding.level.value.upper(), _BOLD)
        paper.text((area.left_mm + _LEVEL_MM, base_mm), finding.code.value, _BOLD)
        for line in lines:
            paper.text((area.left_mm + _LEVEL_MM + _CODE_MM, area.top_mm - SMALL.size_mm * 0.8), line, SMALL)
            area = area.below(SMALL.line_mm)
    for line in listing.tail:
        paper.text((area.left_mm, area.top_mm - SMALL.size_mm * 0.8), line, SMALL)
        area = area.below(SMALL.line_mm)
    return area


def _listing(findings: tuple[Finding, ...], width_mm: float, room: int) -> _Listing:
    """As many findings as fit into so many lines, the urgent first, each kind once before any twice."""
    urgent = sorted(findings, key=lambda finding: _URGENCY[finding.level])
    seen: Counter[_Kind] = Counter()
    turns: list[tuple[int, int]] = []
    for place, finding in enumerate(urgent):
        turns.append((min(seen[_kind(finding)], 1), place))
        seen[_kind(finding)] += 1
    places = [place for _, place in sorted(turns)[:room]]
    message_mm = width_mm - _LEVEL_MM - _CODE_MM
    messages = {place: at_most(_MOST_LINES, urgent[place].message, SMALL, message_mm) for place in places}
    whole = {place: _with_remedy(urgent[place], message_mm) for place in places}
    short = {place: at_most(1, urgent[place].message, SMALL, message_mm) for place in places}
    for shown in range(len(places), -1, -1):
        chosen = sorted(places[:shown])
        tail = _tail(seen - Counter(_kind(urgent[place]) for place in chosen), width_mm)
        for lines in (whole, messages, short):
            listing = _Listing(entries=tuple((urgent[place], tuple(lines[place])) for place in chosen), tail=tail)
            if listing.line_count <= room:
                return listing
    return _Listing(entries=(), tail=_tail(seen, width_mm)[:room])


def _with_remedy(finding: Finding, message_mm: float) -> list[str]:
    return [*wrapped(finding.message, SMALL, message_mm), *wrapped(f"To do: {finding.remedy}", SMALL, message_mm)]


def _kind(finding: Finding) -> _Kind:
    return finding.level, finding.code.value


def _tail(rest: Counter[_Kind], width_mm: float) -> tuple[str, ...]:
    """What is not listed, counted by kind; nothing where all is listed."""
    if not rest:
        return ()
    return tuple(wrapped(f"… and {rest.total()} more, see layout.json: {_by_level(rest)}.", SMALL, width_mm))


def _by_level(counts: Counter[_Kind]) -> str:
    """The kinds in short, such as "errors web-too-thin × 3, web-to-rim; advice damper-not-recovered"."""
    many = {Level.ERROR: "errors", Level.WARNING: "warnings", Level.ADVICE: "advice"}
    parts = []
    for level in Level:
        codes = [code if count == 1 else f"{code} × {count}" for (of, code), count in counts.items() if of is level]
        parts += [f"{many[level]} {', '.join(codes)}"] if codes else []
    return "; ".join(parts)
