"""Which findings the picture shows, and what they say below the disc."""

from collections.abc import Iterator
from dataclasses import dataclass

from svgwrite.container import Group

from layout.check.finding import Finding, Level
from layout.write.svg_markers import BADGE, Numbered, badge
from layout.write.svg_page import Face, Page, at_most, words
from layout.write.svg_style import LEVEL_STYLES, TEXT_SIZE, WORD_GREY

MOST_RINGED = 20  # findings; more rings would hide the disc, and layout.json has them all
MOST_LISTED = 12  # findings; a page that must be scrolled far is not read
MOST_OF_KIND = 3  # findings of one kind: they differ in their numbers only
_LINE_HEIGHT = 1.35  # of the letter size
_IN_FULL = 4  # findings that are written out
_MOST_LINES, _MOST_LATER_LINES = (4, 3), (2, 1)  # of a message and its remedy; of the later ones
_URGENCY = {level: place for place, level in enumerate(Level)}  # errors first
_INDENT = 4.0  # hundredths of the page's width
Line = tuple[str, Face]


@dataclass(frozen=True, slots=True, kw_only=True)
class Kind:
    """The findings of one code and level.

    Attributes:
        listed: Those that are written out.
        more: Those that are only counted.
    """

    listed: tuple[Numbered, ...]
    more: tuple[Numbered, ...]


def shown_kinds(findings: tuple[Finding, ...]) -> list[Kind]:
    """The findings by kind: errors first, then in their own order; as many kinds as the list has room for."""
    kinds: dict[tuple[Level, str], list[Numbered]] = {}
    for number, finding in enumerate(findings, start=1):
        entry = Numbered(number=number, finding=finding)
        kinds.setdefault((finding.level, finding.code.value), []).append(entry)
    shown: list[Kind] = []
    room = MOST_LISTED
    for (_, _), entries in sorted(kinds.items(), key=lambda kind: _URGENCY[kind[0][0]]):
        most = min(MOST_OF_KIND, room)
        if most:
            shown.append(Kind(listed=tuple(entries[:most]), more=tuple(entries[most:])))
        room -= len(entries[:most])
    return shown


def ringed(kinds: list[Kind]) -> list[Numbered]:
    """The findings that get a ring on the disc: first those that are written out; at most MOST_RINGED."""
    written = [entry for kind in kinds for entry in kind.listed]
    return (written + [entry for kind in kinds for entry in kind.more])[:MOST_RINGED]


def findings_list(kinds: list[Kind], finding_count: int, page: Page, top_mm: float) -> tuple[Group, float]:
    """What the findings say, from top_mm down, and where the list ends; nothing where there are none."""
    group = Group(id="findings_list", debug=False)
    line_mm = page.units_mm(TEXT_SIZE) * _LINE_HEIGHT
    y_mm = top_mm
    for entry, lines in _paragraphs(kinds, finding_count, page):
        if entry is not None:
            group.add(badge(entry, (page.left_mm + page.units_mm(BADGE), y_mm + 0.75 * line_mm), page))
        for text, face in lines:
            y_mm += line_mm
            group.add(words(text, (page.left_mm + page.units_mm(_INDENT), y_mm), face))
        y_mm += 0.6 * line_mm
    return group, y_mm


def _paragraphs(kinds: list[Kind], finding_count: int, page: Page) -> Iterator[tuple[Numbered | None, list[Line]]]:
    """What is written, paragraph by paragraph, each with the finding whose badge stands beside it."""
    face = Face(size_mm=page.units_mm(TEXT_SIZE))
    written = 0
    for kind in kinds:
        for place, entry in enumerate(kind.listed):
            most = _MOST_LINES if written < _IN_FULL else _MOST_LATER_LINES
            is_last = place + 1 == len(kind.listed)
            says_more = is_last or kind.listed[place + 1].finding.remedy != entry.finding.remedy
            yield entry, _said(entry.finding, most if says_more else (most[0], 0), page)
            written += 1
        if kind.more:
            text = f"and {len(kind.more)} more of this kind, {_numbers(kind.more)}: see layout.json"
            yield None, [(line, face) for line in at_most(2, text, face, _room_mm(page))]
    unseen = finding_count - sum(len(kind.listed) + len(kind.more) for kind in kinds)
    if unseen:
        yield None, [(f"and {unseen} more: see layout.json", face)]


def _said(finding: Finding, most: tuple[int, int], page: Page) -> list[Line]:
    """The lines of a message and of its remedy, at most so many of either; the remedy is left out for 0."""
    face = Face(size_mm=page.units_mm(TEXT_SIZE))
    message = f"{LEVEL_STYLES[finding.level].word}: {finding.message}"
    lines = [(line, face) for line in at_most(most[0], message, face, _room_mm(page))]
    if most[1]:
        grey = Face(size_mm=face.size_mm, colour=WORD_GREY)
        lines += [(line, grey) for line in at_most(most[1], finding.remedy, grey, _room_mm(page))]
    return lines


def _room_mm(page: Page) -> float:
    return page.room_mm - page.units_mm(_INDENT)


def _numbers(entries: tuple[Numbered, ...]) -> str:
    """The numbers of findings in short: "number 7", "numbers 4 to 9, 12"."""
    runs: list[list[int]] = []
    for entry in entries:
        if runs and entry.number == runs[-1][-1] + 1:
            runs[-1].append(entry.number)
        else:
            runs.append([entry.number])
    told = ", ".join(f"{run[0]} to {run[-1]}" if len(run) > 1 else str(run[0]) for run in runs)
    return f"number{'s' if len(entries) > 1 else ''} {told}"
