from typing import Any

import pytest

from service.commands.making_lines import making_lines

LASER: dict[str, Any] = {
    "cut_length_mm": 5708.9,
    "pierce_count": 364,
    "hit_count": 0,
    "hit_force_n": None,
    "stripping_force_n": None,
    "blank_mass_kg": 0.173151,
    "time_s": 136.7,
    "currency": "EUR",
    "price_lines": [{"name": "setup", "amount": "18.00"}, {"name": "sheet", "amount": "0.42"}],
    "total": "18.42",
    "not_stated": [],
    "not_counted": [],
}
PRESS = LASER | {"cut_length_mm": 0.0, "pierce_count": 0, "hit_count": 359, "hit_force_n": 855.6}


def test_a_cut_disc_is_told_with_its_time_its_blank_and_its_price() -> None:
    assert making_lines(LASER) == [
        "  making      5.71 m of cut with 364 pierces; machine time 2 min 17 s; blank 0.173 kg",
        "  price       18.42 EUR: setup 18.00, sheet 0.42",
    ]


@pytest.mark.parametrize(("stripping_n", "force"), [(171.12, "1027 N"), (None, "856 N")])
def test_a_struck_disc_is_told_with_the_force_of_a_hit_stripping_included(
    stripping_n: float | None, force: str
) -> None:
    [work, _] = making_lines(PRESS | {"stripping_force_n": stripping_n})

    assert work == f"  making      359 hits of {force}; machine time 2 min 17 s; blank 0.173 kg"


def test_what_is_not_known_is_left_out_and_what_would_tell_it_is_named() -> None:
    nothing = PRESS | {"hit_force_n": None, "blank_mass_kg": None, "time_s": None, "total": None}

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
