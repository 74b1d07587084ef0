"""press.nc: the hits of one disc as a program for a press with a rotary table and a radial slide."""

import math
import re
import unicodedata
from collections.abc import Iterator

import numpy as np

from layout.cut.plan import CutPlan
from layout.documents.making import Press
from layout.documents.reading import FULL_TURN_DEG
from layout.mechanics.table import table_moves
from layout.place.disc import Disc
from layout.version import ENGINE_VERSION
from layout.write.laid_out import NOT_GOOD
from layout.write.numbers import number

DECIMALS = 4  # of a millimetre and of a degree: 0.35 micrometres on a circle of 200 mm, finer than any press is set
LETTERS_OF_A_COMMENT = 60  # characters; a line that shows whole on a control's screen (common practice)
# Left out of comments: what ISO 6983-1 gives a meaning of its own there, % and :, brackets, and small letters (from
# memory of the standard; fewer signs than it allows do no harm).
_NOT_SAID = re.compile(r"[^A-Z0-9 .,+/=-]+")


def write_press_program(plan: CutPlan, disc: Disc) -> bytes:
    r"""The hits in the order struck as a program of words as in ISO 6983-1, ASCII, lines end in \n.

    X is the slide, in millimetres: the distance of the tool's strike point from the table's middle. C is the
    table, in degrees: the angle of the strike point on the drawing, to be brought under the tool. Both are
    absolute. C counts on over whole turns and no move is longer than half a turn, so that a control that
    counts on and one that takes the shortest way go the same way: one that would be is made in two.

    A table that turns one way (`press.turns_one_way`) comes onto every hit from one side, so that its
    backlash is always taken up: before the first hit, and wherever it goes back, it first goes
    `press.take_up_deg` further back, then onto the angle (common practice).

    Every hit is a move with G0, then the press's `strike_word` in a block of its own. The tool is taken up
    with the press's `change_word`. Its `{tool}` becomes a number, since a T word holds digits alone: the
    tool's place in the cutter's `tools`, counted from 1. A comment beside it gives the tool's name. Where
    no tool fits (an error overruled), the program stops there with M0 instead. The two words are the
    shop's own. `metric_word` says millimetres: G71 by ISO 6983-1 (from memory), G21 on many controls (common
    practice). All others are N, G0, G90, M0 and M30.

    The tool stays square to the slide, as it stands in the record's openings.

    Only the hits are in it: holes and rim are cut apart. A disc without projections gives a program that
    ends at once.

    Args:
        plan: The cut plan of a disc for a punch press.
        disc: The disc.

    Raises:
        ValueError: The cutter is no press: a fault of the program, never of an input.
    """
    if disc.cutter.kind != "punch-press":
        raise ValueError(f"{disc.cutter.id} is no press, and has no press program")
    lines = [f"({line})" for line in _head(plan, disc)]
    lines += [f"N{place} {block}" for place, block in enumerate(_blocks(plan, disc), start=1)]
    return "\n".join(["%", *lines, "%", ""]).encode("ascii")


def _head(plan: CutPlan, disc: Disc) -> list[str]:
    movement, press = disc.movement, disc.cutter.press or Press()
    tool = next((f"{one.tool}, {one.title}" for one in disc.cutter.tools if one.tool == plan.tool), "none that fits")
    said = [
        *([] if plan.not_good is None else [f"{NOT_GOOD}, {plan.not_good}"]),
        f"discwright {ENGINE_VERSION}",
        f"title {_in_ascii(plan.title)}",
        *([plan.part] if plan.part else []),
        f"movement {movement.id} revision {movement.revision}",
        f"blank {movement.disc.material}, {movement.disc.thickness_mm:g} mm thick",
        f"cutter {disc.cutter.id}",
        f"fingerprint {plan.fingerprint}",
        f"tool {tool}",
        f"{len(plan.order)} hits, seen from the {plan.drawn_from}",
        "X slide, radius of the strike point in mm",
        "C table, angle of the strike point on disc.dxf in degrees",
        "C counts on over whole turns, no move above half a turn",
        *([f"table comes onto every hit with C {_forward(disc)}"] if press.turns_one_way else []),
        "tool stands square to the slide, as record.dxf shows its openings",
        "hits only, holes before them and rim after them are not in this program",
        "caution, for trained people, local rules come first",
        "caution, guards in place, hands out, one person at the control",
        "caution, wear eye protection, slugs fly",
        "caution, first run it dry, without a blank, stroke switched off",
    ]
    return [part for line in said for part in _broken(line)]


def _forward(disc: Disc) -> str:
    return "rising" if _forward_sign(disc) > 0 else "falling"


def _forward_sign(disc: Disc) -> int:
    """+1 where the drawing's angles rise the way the table turns onto its hits: against the disc's travel."""
    return disc.turning.direction * (-1 if disc.cutter.drawn_from == "star-side" else 1)


def _blocks(plan: CutPlan, disc: Disc) -> Iterator[str]:
    press = disc.cutter.press or Press()
    yield f"{press.metric_word} G90"
    if len(plan.order):
        yield _tool_taken_up(plan, disc, press)
    sign = _forward_sign(disc)
    radius_mm = np.hypot(plan.at_mm[:, 0], plan.at_mm[:, 1])
    drawn_deg = np.degrees(np.arctan2(plan.at_mm[:, 1], plan.at_mm[:, 0])) % FULL_TURN_DEG
    take_up_deg = press.take_up_deg if press.turns_one_way else 0.0
    moves = table_moves(sign * np.radians(drawn_deg), take_up_rad=math.radians(take_up_deg))
    to_deg = sign * np.degrees(moves.to_rad)
    for place, slide_mm in enumerate(radius_mm.tolist()):
        table_deg = float(to_deg[place])
        if moves.taken_up[place]:
            past_deg = table_deg - sign * take_up_deg
            from_deg = float(to_deg[place - 1]) if place else past_deg
            if abs(past_deg - from_deg) > FULL_TURN_DEG / 2:
                yield _move(slide_mm, (from_deg + past_deg) / 2)
            yield _move(slide_mm, past_deg)
        yield f"{_move(slide_mm, table_deg)} (HIT {place + 1})"
        yield press.strike_word
    yield "M30"


def _move(slide_mm: float, table_deg: float) -> str:
    return f"G0 X{_with_point(slide_mm)} C{_with_point(table_deg)}"


def _with_point(value: float) -> str:
    """With a decimal point even where whole: some controls read a number without one in their least step."""
    text = number(value, DECIMALS)
    return text if "." in text else f"{text}.0"


def _tool_taken_up(plan: CutPlan, disc: Disc, press: Press) -> str:
    names = [tool.tool for tool in disc.cutter.tools]
    if plan.tool not in names:
        return "M0 (NO TOOL OF THIS PRESS FITS)"
    word = press.change_word.replace("{tool}", str(names.index(plan.tool) + 1))
    return f"{word} (TOOL {plan.tool})"


def _in_ascii(text: str) -> str:
    """The text without accents; what has no letter in ASCII is left out, and all of it is said to be."""
    plain = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode("ascii").strip()
    return plain or "not in latin letters, see layout.json"


def _broken(line: str) -> list[str]:
    words, parts = _NOT_SAID.sub(" ", _in_ascii(line).upper()).split(), [""]
    for word in words:
        joined = f"{parts[-1]} {word}".strip()
        if len(joined) <= LETTERS_OF_A_COMMENT:
            parts[-1] = joined
        else:
            parts.append(word[:LETTERS_OF_A_COMMENT])
    return [part for part in parts if part]
