"""making.json: what making a disc takes, for programs. Fields may be added, never renamed."""

import math
from dataclasses import asdict
from typing import Any

from layout.making.making import Making, PriceLine, ToolWork
from layout.version import ENGINE_VERSION
from layout.write.json_lines import json_lines

FORMAT = "discwright-making/1"
DECIMALS = 6  # of mm, s and N: under what any of them is known to, and the same on every machine
DECIMALS_KG = 9  # of a kilogram: a microgram


def write_making(
    making: Making, fingerprint: str, *, disc: tuple[int, int] = (1, 1), order_number: str | None = None
) -> bytes:
    """The making as UTF-8 JSON, one line of the price, or one tool, to a line.

    What a figure means stands at layout.making.making. One that cannot be told is null, and `not_stated` names the
    fields of the documents it needs. Amounts, rates and quantities of the price are text, since they are decimal
    numbers: their sums are exact.

    Args:
        making: What making the disc takes.
        fingerprint: Of the layout's inputs.
        disc: Which disc of its set it is, from 1, and how many the set has.
        order_number: The shop's; None for none.

    Raises:
        ValueError: A number is not finite: a fault of the program, never of an input.
    """
    return json_lines(
        {
            "format": FORMAT,
            "fingerprint": fingerprint,
            "engine_version": ENGINE_VERSION,
            "disc": {"number": disc[0], "of": disc[1]},
            "order_number": order_number,
            "cut_length_mm": _rounded(making.cut_length_mm),
            "mark_length_mm": _rounded(making.mark_length_mm),
            "rapid_length_mm": _rounded(making.rapid_length_mm),
            "pierce_count": making.pierce_count,
            "hit_count": making.hit_count,
            "hit_force_n": _rounded(making.hit_force_n),
            "stripping_force_n": _rounded(making.stripping_force_n),
            "press_force_n": _rounded(making.press_force_n),
            "tool_change_count": making.tool_change_count,
            "tools": [_tool(work) for work in making.tools],
            "fold_to_deg": _rounded(None if making.fold_to_rad is None else math.degrees(making.fold_to_rad)),
            "blank_mass_kg": _rounded(making.blank_mass_kg, DECIMALS_KG),
            "disc_mass_kg": _rounded(making.disc_mass_kg, DECIMALS_KG),
            "time_s": _rounded(making.time_s),
            "time_parts": {name: _rounded(seconds) for name, seconds in asdict(making.time_parts).items()},
            "currency": making.currency,
            "currency_decimals": making.currency_decimals,
            "price_lines": [_line(line) for line in making.price_lines],
            "total": None if making.total is None else f"{making.total:f}",
            "not_stated": list(making.not_stated),
            "not_counted": list(making.not_counted),
        }
    )


def _tool(work: ToolWork) -> dict[str, Any]:
    return {
        "tool": work.tool,
        "hit_count": work.hit_count,
        "hit_force_n": _rounded(work.hit_force_n),
        "press_force_n": _rounded(work.press_force_n),
    }


def _line(line: PriceLine) -> dict[str, Any]:
    return {
        "name": line.name,
        "quantity": f"{line.quantity:f}",
        "per": line.per,
        "rate": f"{line.rate:f}",
        "amount": f"{line.amount:f}",
    }


def _rounded(value: float | None, decimals: int = DECIMALS) -> float | None:
    return None if value is None else round(value, decimals) + 0.0
