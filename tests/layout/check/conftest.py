"""What holds in every test of checks: findings are told in plain sentences, with their own numbers and units, and what
a number is worth is looked up where the movement has that number.
"""

import re
from collections.abc import Iterator
from typing import Any

import pytest

from layout.check.finding import Code, Finding, Level
from layout.documents import Movement

SHOUTED = re.compile(r"\w*[A-Z]{2}\w*")
A_NUMBER = re.compile(r"\d+(?:\.(\d+))?")
NAMED_TRACKS = re.compile(r"\btracks? (\d+(?:(?:, | and )\d+)*)", re.IGNORECASE)

UNITS = {"mm", "s", "ms", "deg", "N", "N mm", "%", "turns", ""}  # as Finding says

# Whose message quotes the file.
QUOTES = {Code.MARKED_NOT_GOOD}
# Whose limit is told in words: one note. So are turns: one that clears the star wheels and one that is heard.
LIMIT_IN_WORDS = {Code.NOTHING_TO_PLAY}
# Whose arc is measured past its nearer end, and told from the row.
MEASURED_PAST_AN_END = {Code.REST_NOT_CLEAR}
# Whose tracks are told by how many plucks or folds they hold.
TRACKS_IN_WORDS = {Code.DRIVE_OVERLOADED, Code.FOLDS_ALONG_ROLLING, Code.TIMING_TOO_COARSE, Code.MARGIN_UNSURE}


@pytest.fixture(autouse=True)
def findings_made(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[Finding]]:
    """Every finding made while a test runs, held to what must hold of each when the test is over."""
    made: list[Finding] = []
    make = Finding.__init__

    def kept(self: Finding, **fields: Any) -> None:
        make(self, **fields)
        made.append(self)

    monkeypatch.setattr(Finding, "__init__", kept)
    yield made
    for finding in dict.fromkeys(made):
        if finding.code not in QUOTES:
            it_speaks_plainly(finding)
            it_tells_its_numbers(finding)
            it_names_its_tracks(finding)


@pytest.fixture(autouse=True)
def pointers_lead_somewhere(monkeypatch: pytest.MonkeyPatch) -> None:
    """A pointer that leads nowhere would be worth 0 without a word."""
    look_up = Movement.plus_minus

    def looked_up(self: Movement, pointer: str) -> float:
        here: Any = self
        for step in pointer.removeprefix("/").split("/"):
            here = here[int(step)] if isinstance(here, list | tuple) else getattr(here, step)
        return look_up(self, pointer)

    monkeypatch.setattr(Movement, "plus_minus", looked_up)


def it_speaks_plainly(finding: Finding) -> None:
    """Sentences from a capital, a number or a document's name to a full stop; no word shouted, nothing doubled."""
    for text in (finding.message, finding.remedy):
        assert re.fullmatch(r"(?:[A-Z0-9]|[a-z0-9-]+-[a-z0-9]+ ).*[^.,;: ]\.", text), text
        assert not re.search(r"\. [a-z]", text), text
        assert not SHOUTED.search(text), text
        assert not re.search(r"  | [,;:.]|[,;:]\.|None(?! is left)|nan", text), text
    assert finding.unit in UNITS, finding
    assert finding.level is not Level.ERROR or finding.code is not Code.MARGIN_UNSURE, finding


def it_tells_its_numbers(finding: Finding) -> None:
    """What was measured, and its limit, stand in the message as far as it rounds them, with their unit."""
    overlap = finding.code is Code.WEB_TOO_THIN and (finding.measured or 0.0) < 0  # told as running into each other
    if finding.measured and not overlap and finding.code not in MEASURED_PAST_AN_END:
        assert stands_in(finding.measured, finding.message), finding
    if finding.limit and finding.code not in LIMIT_IN_WORDS and finding.unit != "turns":
        assert stands_in(finding.limit, finding.message), finding
    if finding.measured is not None and finding.unit:
        unit = "(?:°| degrees)" if finding.unit == "deg" else f" ?{re.escape(finding.unit)}(?!\\w)"
        assert re.search(rf"\d{unit}", finding.message), finding


def stands_in(number: float, text: str) -> bool:
    return any(
        abs(float(said[0]) - abs(number)) <= 0.5 * 10.0 ** -len(said[1] or "") + 1e-9
        for said in A_NUMBER.finditer(text)
    )


def it_names_its_tracks(finding: Finding) -> None:
    """The tracks that the message names are those of its place."""
    if finding.code in TRACKS_IN_WORDS:
        return
    named = {int(number) for tracks in NAMED_TRACKS.findall(finding.message) for number in re.findall(r"\d+", tracks)}
    assert named == set(finding.at.tracks), finding
