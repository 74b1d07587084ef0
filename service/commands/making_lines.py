"""What making a disc takes, as lines of text for a person."""

from collections.abc import Mapping
from typing import Any

from service.commands.report_lines import wrapped

Making = Mapping[str, Any]  # content of making.json

_MM_PER_M = 1000
_S_PER_MIN = 60


def making_lines(making: Making) -> list[str]:
    """Lines that tell what is cut, the machine's time, masses and price; and what would have to be stated for more.

    Args:
        making: Content of making.json.
    """
    told = [_work(making), *([f"machine time {_time(making['time_s'])}"] if making["time_s"] is not None else [])]
    if making["blank_mass_kg"] is not None:
        told.append(f"blank {making['blank_mass_kg']:.3f} kg")
    lines = wrapped("making", "; ".join(told))
    if making["total"] is not None:
        parts = ", ".join(f"{line['name']} {line['amount']}" for line in making["price_lines"])
        lines += wrapped("price", f"{making['total']} {making['currency']}: {parts}")
    if making["not_stated"]:
        lines += wrapped("not stated", ", ".join(making["not_stated"]))
    if making["not_counted"]:
        lines += wrapped("not counted", ", ".join(making["not_counted"]))
    return lines


def _work(making: Making) -> str:
    if making["hit_count"]:
        count = len(making["tools"])
        tools = f" with {count} tool{'s' if count > 1 else ''}" if count else ""
        force_n = making["press_force_n"]
        force = "" if force_n is None else f", press force up to {force_n:.0f} N"
        return f"{making['hit_count']} hits{tools}{force}"
    if making["cut_length_mm"] is None:
        return "path not worked out"
    return f"{making['cut_length_mm'] / _MM_PER_M:.2f} m of cut with {making['pierce_count']} pierces"


def _time(time_s: float) -> str:
    minutes, seconds = divmod(round(time_s), _S_PER_MIN)
    return f"{minutes} min {seconds} s" if minutes else f"{seconds} s"
