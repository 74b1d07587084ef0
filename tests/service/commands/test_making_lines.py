from typing import Any

import pytest

from service.commands.making_lines import making_lines

LASER: dict[str, Any] = {
    "cut_length_mm": 5708.9,
    "pierce_count": 364,
    "hit_count": 0,
    "hit_force_n": None,
    "stripping_force_n": None,
    "press_force_n": None,
    "tools": [],
    "blank_mass_kg": 0.173151,
    "time_s": 136.7,
    "currency": "EUR",
    "price_lines": [{"name": "setup", "amount": "18.00"}, {"name": "sheet", "amount": "0.42"}],
    "total": "18.42",
    "not_stated": [],
    "not_counted": [],
}
TOOLS = [{"tool": "R9", "hit_count": 1}, {"tool": "L12", "hit_count": 358}]
PRESS = LASER | {"cut_length_mm": 0.0, "pierce_count": 0, "hit_count": 359, "hit_force_n": 855.6, "tools": TOOLS}


def test_a_cut_disc_is_told_with_its_time_its_blank_and_its_price() -> None:
    assert making_lines(LASER) == [
        "  making      5.71 m of cut with 364 pierces; machine time 2 min 17 s; blank 0.173 kg",
        "  price       18.42 EUR: setup 18.00, sheet 0.42",
    ]


@pytest.mark.parametrize(
    ("force_n", "force"), [(4682.2, ", press force up to 4682 N"), (None, "")], ids=["known", "not known"]
)
def test_a_struck_disc_is_told_with_its_tools_and_the_press_force(force_n: float | None, force: str) -> None:
    lines = making_lines(PRESS | {"press_force_n": force_n, "blank_mass_kg": None})

    assert lines[0] == f"  making      359 hits with 2 tools{force}; machine time 2 min 17 s"


def test_one_tool_is_one_tool() -> None:
    [work, *_] = making_lines(PRESS | {"tools": TOOLS[1:]})

    assert work.startswith("  making      359 hits with 1 tool;")


def test_what_is_not_known_is_left_out_and_what_would_tell_it_is_named() -> None:
    nothing = PRESS | {"tools": [], "hit_force_n": None, "blank_mass_kg": None, "time_s": None, "total": None}

    lines = making_lines(nothing | {"not_stated": ["cutter.rates", "cutter.feeds.hit_s"]})

    assert lines == ["  making      359 hits", "  not stated  cutter.rates, cutter.feeds.hit_s"]


@pytest.mark.parametrize(("time_s", "told"), [(59.4, "59 s"), (59.6, "1 min 0 s"), (3725, "62 min 5 s")])
def test_a_time_is_told_in_minutes_and_seconds(time_s: float, told: str) -> None:
    [work, _] = making_lines(LASER | {"time_s": time_s})

    assert f"machine time {told};" in work


def test_a_disc_whose_path_is_not_worked_out_says_so() -> None:
    [work, _] = making_lines(LASER | {"cut_length_mm": None, "pierce_count": None})

    assert "path not worked out" in work


def test_what_time_and_price_leave_out_is_said() -> None:
    lines = making_lines(PRESS | {"not_counted": ["holes", "rim"]})

    assert lines[-1] == "  not counted holes, rim"
