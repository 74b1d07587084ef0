"""What making one disc takes: lengths, strokes, masses, time and price.

A figure that cannot be told is None, and `not_stated` names the fields of the documents that would tell it.
"""

from dataclasses import dataclass
from decimal import Decimal


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeParts:
    """Seconds of the machine, part by part.

    Attributes:
        cut_s: Along what is cut.
        mark_s: Along what is marked.
        rapid_s: Between cuts and marks.
        pierce_s: Piercing.
        hit_s: Strikes of a press.
        turn_s: Turning a press's table from hit to hit.
        slide_s: Moving its slide from hit to hit.
        tool_change_s: Taking up tools after the first.

    A part is 0 where there is nothing of its kind, None where there is and its speed is not stated.
    """

    cut_s: float | None = None
    mark_s: float | None = None
    rapid_s: float | None = None
    pierce_s: float | None = None
    hit_s: float | None = None
    turn_s: float | None = None
    slide_s: float | None = None
    tool_change_s: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class PriceLine:
    """One line of a price: amount = quantity × rate, rounded to the currency's smallest coin.

    Attributes:
        name: "setup", "machine time", "pierces", "hits" or "sheet".
        quantity: How many of `per`, as a person would write it, so that the line can be worked again by hand.
        per: What is counted: "disc", "min", "pierce", "hit" or "kg".
        rate: What the shop asks for one of them.
        amount: What the line comes to.
    """

    name: str
    quantity: Decimal
    per: str
    rate: Decimal
    amount: Decimal


@dataclass(frozen=True, slots=True, kw_only=True)
class ToolWork:
    """What one tool of a press does to make one disc.

    Attributes:
        tool: Its name.
        hit_count: Strikes.
        hit_force_n: That one of them takes to cut, with a sharp tool; None where the shear strength is not stated.
        press_force_n: That the press must give for it: cutting and stripping; None as `hit_force_n`, and where the
            cutter states no press.
    """

    tool: str
    hit_count: int
    hit_force_n: float | None
    press_force_n: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Making:
    """What the machine does to make one disc, and what that takes.

    Attributes:
        cut_length_mm: Along all that is cut, leads included; None where the path is not worked out, as the
            next six.
        mark_length_mm: Along all that is marked.
        rapid_length_mm: Between cuts and marks.
        pierce_count: Cuts begun.
        hit_count: Strikes of a press, by all its tools.
        hit_force_n: That one projection's hit takes to cut, with a sharp tool; None on a laser, where no tool fits,
            and where the shear strength is not stated.
        stripping_force_n: That pulls the punch out again after it; None as `hit_force_n`, and where the cutter
            states no press.
        press_force_n: The most that the press must give for any hit of the disc: cutting and stripping together;
            None where it cannot be told for every tool, and on a laser.
        tool_change_count: Tools taken up after the first; None where the path is not worked out.
        tools: What each tool of a press does, in the order taken up; empty on a laser.
        fold_to_rad: The angle the tabs are bent to, so that they stand at 90° once let go; None where nothing is
            folded, and where the springback is not stated.
        blank_mass_kg: The round blank before anything is cut in it; None where the density is not stated.
        disc_mass_kg: The disc as it is played: the blank less all that falls out; None as the blank's.
        time_parts: The machine's time, part by part.
        time_s: Their sum; None where one of them is. Loading, unloading and breaking out are not in it, nor what
            `not_counted` names.
        price_lines: One for each rate the shop states and whose quantity can be told.
        total: The lines' exact sum; None where a stated rate has no quantity, or no rate is stated.
        currency: Of the amounts, by ISO 4217; None where no rates are stated.
        currency_decimals: How many decimals the amounts are rounded to; None where there are no rates, and where
            the currency's smallest unit is not known here: amounts are then exact, and not rounded.
        not_stated: Fields of the documents that would be needed for a figure that is missing, such as
            "cutter.feeds.cut_mm_per_s"; empty where all can be told.
        not_counted: What no figure of time and price counts, each with the reason in brackets: on a press the
            rim, holes and projections that none of its tools makes, and the first tool, which is taken to be in the
            press already; empty on a laser.
    """

    cut_length_mm: float | None = None
    mark_length_mm: float | None = None
    rapid_length_mm: float | None = None
    pierce_count: int | None = None
    hit_count: int | None = None
    hit_force_n: float | None = None
    stripping_force_n: float | None = None
    press_force_n: float | None = None
    tool_change_count: int | None = None
    tools: tuple[ToolWork, ...] = ()
    fold_to_rad: float | None = None
    blank_mass_kg: float | None = None
    disc_mass_kg: float | None = None
    time_parts: TimeParts = TimeParts()
    time_s: float | None = None
    price_lines: tuple[PriceLine, ...] = ()
    total: Decimal | None = None
    currency: str | None = None
    currency_decimals: int | None = None
    not_stated: tuple[str, ...] = ()
    not_counted: tuple[str, ...] = ()
