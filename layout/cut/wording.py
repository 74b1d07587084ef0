"""What the drawings say: the lines at the head of the file, and the lettering on the disc."""

import unicodedata
from dataclasses import dataclass

from layout.documents.cutter import Cutter
from layout.place.disc import Disc
from layout.version import ENGINE_VERSION

NOT_GOOD = "NOT GOOD TO CUT"
RECORD = "RECORD - NOT FOR CUTTING"
MOST_LETTERS = 32  # characters on the disc; a longer title would take the room of every other line
MOST_COMMENT = 250  # characters; DXF reference: strings of releases before 2000 end at 255 bytes


@dataclass(frozen=True, slots=True, kw_only=True)
class Words:
    """What one drawing must say.

    Attributes:
        title: The tune's title.
        fingerprint: Of all inputs.
        not_good: The reason for which a faulty disc is cut, if it is.
        is_record: Whether it is the record, which is never cut.
    """

    title: str
    fingerprint: str
    not_good: str | None
    is_record: bool


def plain_ascii(text: str) -> str:
    """The text in printable ASCII on one line: accents dropped, what has no like "?", blanks made single.

    Old DXF readers and the engraving font know nothing else.
    """
    apart = unicodedata.normalize("NFKD", text)
    letters = (letter for letter in apart if not unicodedata.combining(letter))
    plain = "".join(letter if " " <= letter <= "~" else " " if letter.isspace() else "?" for letter in letters)
    return " ".join(plain.split())


def head_lines(disc: Disc, words: Words) -> tuple[str, ...]:
    """Comments for the file's head: the warnings first, every line in plain ASCII."""
    movement, cutter = disc.movement, disc.cutter
    lines = [
        *([RECORD] if words.is_record else []),
        *([] if words.not_good is None else [f"{NOT_GOOD}: {words.not_good}"]),
        f"discwright {ENGINE_VERSION}",
        f"title: {words.title}",
        f"movement: {movement.id} revision {movement.revision}",
        f"blank: {movement.disc.material}, {movement.disc.thickness_mm:g} mm thick",
        f"cutter: {cutter.id}",
        f"fingerprint: {words.fingerprint}",
        f"drawn from the {_side(cutter)}; origin at the disc centre; millimetres",
        *_how_it_is_drawn(disc),
        "index mark: at disc angle 0; its barb points the way the disc turns",
    ]
    return tuple(plain_ascii(line)[:MOST_COMMENT] for line in lines)


def warnings_of(words: Words) -> tuple[str, ...]:
    """The lines that must not be missing, if at all possible."""
    return (RECORD,) * words.is_record + (NOT_GOOD,) * (words.not_good is not None)


def lettering_lines(disc: Disc, words: Words) -> tuple[tuple[str, ...], ...]:
    """The lines to engrave, in the choices to try: first all, then ever fewer; the warnings stay longest."""
    warnings = warnings_of(words)
    movement = disc.movement
    telling = [words.title, f"{movement.id} rev {movement.revision}", _side(disc.cutter).upper()]
    choices = [(*warnings, *telling[:kept], words.fingerprint) for kept in range(len(telling), -1, -1)]
    if warnings:
        choices.append(warnings)
    return tuple(tuple(line for text in lines if (line := _shortened(plain_ascii(text)))) for lines in choices)


def _shortened(text: str) -> str:
    return text if len(text) <= MOST_LETTERS else text[: MOST_LETTERS - 3].rstrip() + "..."


def _side(cutter: Cutter) -> str:
    return cutter.drawn_from.replace("-", " ")


def _how_it_is_drawn(disc: Disc) -> list[str]:
    cutter = disc.cutter
    lines = ["outlines are finished edges; kerf is not added"]
    if cutter.fold is not None and cutter.fold.slit == "centre-line" and disc.pattern.making == "fold":
        lines.append(f"open slits are cut along their middle, one kerf of {cutter.kerf_mm:g} mm wide")
    if cutter.kind == "punch-press":
        tool = f"tool {disc.pattern.tool}" if disc.pattern.tool else "this press has no tool that fits"
        lines.append(f"hits: one point for each projection, where the tool strikes; {tool}")
    return lines
