"""press.nc: what a press strikes of one disc, as a program for a press with a rotary table and a radial slide."""

import math
import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.cut.plan import CutPlan
from layout.documents.making import Press
from layout.documents.reading import FULL_TURN_DEG
from layout.mechanics.arrays import FloatArray
from layout.mechanics.hits import take_up_rad
from layout.mechanics.table import MIDDLE_MM, forward_angles_rad, table_moves
from layout.place.disc import Disc
from layout.version import ENGINE_VERSION
from layout.write.laid_out import NOT_GOOD
from layout.write.numbers import number

DECIMALS = 4  # of a millimetre and of a degree: 0.35 micrometres on a circle of 200 mm, finer than any press is set
# Of C in one block. At half a turn the shortest way is either way, so a move that is one but for the rounding of
# both its ends is made in two.
LONGEST_MOVE_DEG = FULL_TURN_DEG / 2 - 0.01
_UPPER_FACE = {"up": "star side", "down": "label side"}  # by the way tools form: tabs stand on the star side
LETTERS_OF_A_COMMENT = 60  # characters; a line that shows whole on a control's screen (common practice)
# Left out of comments: what ISO 6983-1 gives a meaning of its own there, % and :, brackets, and small letters (from
# memory of the standard; fewer signs than it allows do no harm).
_NOT_SAID = re.compile(r"[^A-Z0-9 .,+/=-]+")


def write_press_program(plan: CutPlan, disc: Disc) -> bytes:
    r"""All that the press strikes, in its order, as a program of words as in ISO 6983-1, ASCII, lines end in \n.

    X is the slide, in millimetres: the distance of the tool's strike point from the table's middle. C is the
    table, in degrees: the angle of the strike point on the drawing, to be brought under the tool. Both are
    absolute. C counts on over whole turns, and after the first move, from wherever the table stands, none
    is half a turn or longer, so that a control that counts on and one that takes the shortest way go the
    same way: one that would be is made in two.

    A table that turns one way (`press.turns_one_way`) comes onto every hit from one side, so that its
    backlash is always taken up: before the first hit, and wherever it goes back, it first goes
    `press.take_up_deg` further back, then onto the angle (common practice).

    Every hit is a move with G0, then the press's `strike_word` in a block of its own. Every tool, the first
    one too, is taken up with the press's `change_word`. Its `{tool}` becomes a number, since a T word holds
    digits alone: the tool's place in the cutter's `tools`, counted from 1. A comment beside it gives the
    tool's name. The two words are the shop's own. `metric_word` says millimetres: G71 by ISO 6983-1 (from
    memory), G21 on many controls (common practice). All others are N, G0, G90 and M30.

    The tool stays square to the slide, as it stands in the record's openings.

    Holes come first, tool by tool, where the press has a tool of just their size; then the projections, whose
    hits are numbered as the rows of hits.csv are. What is not in it stands at its head: the rim, holes
    without a tool, and projections that no tool makes (an error overruled), so that it never strikes with
    a tool it has not named. A program without hits ends at once.

    Args:
        plan: The cut plan of a disc for a punch press.
        disc: The disc.

    Raises:
        ValueError: The cutter is no press: a fault of the program, never of an input.
    """
    if disc.cutter.kind != "punch-press":
        raise ValueError(f"{disc.cutter.id} is no press, and has no press program")
    groups = _groups(plan)
    lines = [f"({line})" for line in _head(plan, disc, groups)]
    lines += [f"N{place} {block}" for place, block in enumerate(_blocks(disc, groups), start=1)]
    return "\n".join(["%", *lines, "%", ""]).encode("ascii")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Group:
    """Hits of one tool: its name, what a hit is called, and the strike points as drawn, shape (n, 2)."""

    tool: str
    called: str
    at_mm: FloatArray


def _groups(plan: CutPlan) -> list[_Group]:
    groups = [_Group(tool=hits.tool, called="HOLE", at_mm=hits.at_mm) for hits in plan.hole_hits]
    if plan.tool and len(plan.order):
        groups.append(_Group(tool=plan.tool, called="HIT", at_mm=plan.at_mm))
    return groups


def _head(plan: CutPlan, disc: Disc, groups: list[_Group]) -> list[str]:
    movement, press = disc.movement, disc.cutter.press or Press()
    said = [
        *([] if plan.not_good is None else [f"{NOT_GOOD}, {plan.not_good}"]),
        f"discwright {ENGINE_VERSION}",
        f"title {_in_ascii(plan.title)}",
        *([plan.part] if plan.part else []),
        *([] if plan.order_number is None else [_order_told(plan.order_number)]),
        f"movement {movement.id} revision {movement.revision}",
        f"blank {movement.disc.material}, {movement.disc.thickness_mm:g} mm thick",
        f"cutter {disc.cutter.id}",
        f"fingerprint {plan.fingerprint}",
        *_work_told(plan, disc, groups),
        f"seen from the {plan.drawn_from}",
        *([] if press.forms is None else [f"tools form {press.forms}, the {_UPPER_FACE[press.forms]} lies above"]),
        "X slide, radius of the strike point in mm",
        "C table, angle of the strike point on disc.dxf in degrees",
        "C counts on over whole turns",
        "after the first move no move of C is half a turn or longer",
        *([f"table comes onto every hit with C {_forward(disc)}"] if press.turns_one_way else []),
        "tool stands square to the slide, as record.dxf shows its openings",
        "hold the blank clear of every hit, X 0 is struck" if _strikes_the_middle(groups) else "",
        "caution, for trained people, local rules come first",
        "caution, guards in place, hands out, one person at the control",
        "caution, wear eye protection, slugs fly",
        "caution, first run it dry, without a blank, stroke switched off",
    ]
    return [part for line in said for part in _broken(line)]


def _order_told(order_number: str) -> str:
    """Part of a number is another number, so a sign that a comment cannot hold is never dropped in silence."""
    kept = order_number.upper() == order_number and not _NOT_SAID.search(order_number)
    return f"order {order_number}" if kept else f"order {order_number}, spelt as on disc.dxf, not as here"


def _work_told(plan: CutPlan, disc: Disc, groups: list[_Group]) -> Iterator[str]:
    titles = {tool.tool: tool.title for tool in disc.cutter.tools}
    for group in groups:
        yield f"tool {group.tool}, {titles[group.tool]}, {_counted(group)}"
    if len(plan.order) and not plan.tool:
        yield "not in this program, the projections, no tool fits"
    for what in plan.not_struck:
        yield f"not in this program, {what}"


def _counted(group: _Group) -> str:
    count = len(group.at_mm)
    what = "hole" if group.called == "HOLE" else "projection"
    return f"{count} {what}{'s' if count > 1 else ''}"


def _strikes_the_middle(groups: list[_Group]) -> bool:
    return any(bool((np.hypot(*group.at_mm.T) < MIDDLE_MM).any()) for group in groups)


def _forward(disc: Disc) -> str:
    return "rising" if _forward_sign(disc) > 0 else "falling"


def _forward_sign(disc: Disc) -> int:
    """+1 where the drawing's angles rise the way the table turns onto its hits: against the disc's travel."""
    return disc.turning.direction * (-1 if disc.cutter.drawn_from == "star-side" else 1)


def _blocks(disc: Disc, groups: list[_Group]) -> Iterator[str]:
    press, sign = disc.cutter.press or Press(), _forward_sign(disc)
    yield f"{press.metric_word} G90"
    at_mm = np.concatenate([np.zeros((0, 2)), *(group.at_mm for group in groups)])
    moves = table_moves(forward_angles_rad(at_mm, sign), take_up_rad=take_up_rad(disc.cutter))
    slides_mm, forward_deg = np.hypot(at_mm[:, 0], at_mm[:, 1]), np.degrees(moves.to_rad)
    take_up_deg, stands_deg, place = math.degrees(moves.take_up_rad), math.nan, 0
    for group in groups:
        yield _tool_taken_up(disc, press, group.tool)
        for number_of_hit in range(1, len(group.at_mm) + 1):
            slide_mm, to_deg = float(slides_mm[place]), float(forward_deg[place])
            by_way_of = [to_deg - take_up_deg] if moves.taken_up[place] else []
            for next_deg in by_way_of:
                yield from (_move(slide_mm, sign * one) for one in _in_steps(stands_deg, next_deg))
                stands_deg = next_deg
            *halfway, last = (_move(slide_mm, sign * one) for one in _in_steps(stands_deg, to_deg))
            yield from halfway
            yield f"{last} ({group.called} {number_of_hit})"
            yield press.strike_word
            stands_deg, place = to_deg, place + 1
    yield "M30"


def _in_steps(from_deg: float, to_deg: float) -> list[float]:
    """Where the table stops on its way: at the end, and halfway where the way is half a turn or longer.

    The first move of all starts from nobody knows where (not a number) and is made at once.
    """
    halfway = [(from_deg + to_deg) / 2] if abs(to_deg - from_deg) > LONGEST_MOVE_DEG else []
    return [*halfway, to_deg]


def _move(slide_mm: float, table_deg: float) -> str:
    return f"G0 X{_with_point(slide_mm)} C{_with_point(table_deg)}"


def _with_point(value: float) -> str:
    """With a decimal point even where whole: some controls read a number without one in their least step."""
    text = number(value, DECIMALS)
    return text if "." in text else f"{text}.0"


def _tool_taken_up(disc: Disc, press: Press, tool: str) -> str:
    names = [one.tool for one in disc.cutter.tools]
    return f"{press.change_word.replace('{tool}', str(names.index(tool) + 1))} (TOOL {tool})"


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
