"""making.json read back: every figure with its unit, amounts as decimal text, what is missing named."""

import json
import math
from decimal import Decimal

from layout.making.making import Making, PriceLine, TimeParts, ToolWork
from layout.version import ENGINE_VERSION
from layout.write.making_json import write_making

FINGERPRINT = "0123456789abcdef"
FIELDS = [
    *(
        "format",
        "fingerprint",
        "engine_version",
        "disc",
        "order_number",
        "cut_length_mm",
        "mark_length_mm",
        "rapid_length_mm",
    ),
    *("pierce_count", "hit_count", "hit_force_n", "stripping_force_n", "press_force_n", "tool_change_count", "tools"),
    *("fold_to_deg", "blank_mass_kg", "disc_mass_kg"),
    *("time_s", "time_parts", "currency", "currency_decimals", "price_lines", "total", "not_stated", "not_counted"),
]
PRICED = Making(
    cut_length_mm=1000.0000004,
    mark_length_mm=12.5,
    rapid_length_mm=500.0,
    pierce_count=5,
    hit_count=0,
    fold_to_rad=math.radians(91.5),
    blank_mass_kg=0.1775619,
    disc_mass_kg=0.17,
    time_parts=TimeParts(cut_s=20.0, rapid_s=0.6),
    price_lines=(
        PriceLine(name="setup", quantity=Decimal(1), per="disc", rate=Decimal("12.50"), amount=Decimal("12.50")),
        PriceLine(name="pierces", quantity=Decimal(5), per="pierce", rate=Decimal("0.015"), amount=Decimal("0.08")),
    ),
    total=Decimal("12.58"),
    currency="EUR",
    currency_decimals=2,
    not_stated=("cutter.feeds.pierce_s",),
    not_counted=("rim",),
)


def test_the_fields_stand_in_their_order_with_what_the_making_holds() -> None:
    record = json.loads(write_making(PRICED, FINGERPRINT))

    assert list(record) == FIELDS
    assert (record["format"], record["fingerprint"]) == ("discwright-making/1", FINGERPRINT)
    assert record["engine_version"] == ENGINE_VERSION
    assert (record["cut_length_mm"], record["mark_length_mm"], record["rapid_length_mm"]) == (1000.0, 12.5, 500.0)
    assert (record["pierce_count"], record["hit_count"], record["blank_mass_kg"]) == (5, 0, 0.1775619)
    assert (record["time_s"], record["hit_force_n"], record["stripping_force_n"]) == (None, None, None)
    assert record["fold_to_deg"] == 91.5
    assert record["time_parts"]["cut_s"] == 20.0
    assert record["time_parts"]["pierce_s"] is None
    assert record["not_stated"] == ["cutter.feeds.pierce_s"]
    assert record["not_counted"] == ["rim"]


def test_a_making_says_which_disc_of_a_set_it_is_and_for_which_order() -> None:
    alone = json.loads(write_making(Making(), FINGERPRINT))
    second = json.loads(write_making(Making(), FINGERPRINT, disc=(2, 3), order_number="2026-118"))

    assert (alone["disc"], alone["order_number"]) == ({"number": 1, "of": 1}, None)
    assert (second["disc"], second["order_number"]) == ({"number": 2, "of": 3}, "2026-118")


def test_every_tool_is_a_line_with_its_strikes_and_forces() -> None:
    works = (
        ToolWork(tool="R9", hit_count=1, hit_force_n=3901.8578, press_force_n=4682.2293641),
        ToolWork(tool="L12", hit_count=359, hit_force_n=None, press_force_n=None),
    )

    record = json.loads(write_making(Making(tools=works, tool_change_count=1, press_force_n=4682.2293641), FINGERPRINT))

    assert record["tools"] == [
        {"tool": "R9", "hit_count": 1, "hit_force_n": 3901.8578, "press_force_n": 4682.229364},
        {"tool": "L12", "hit_count": 359, "hit_force_n": None, "press_force_n": None},
    ]
    assert (record["tool_change_count"], record["press_force_n"]) == (1, 4682.229364)


def test_amounts_are_decimal_text_whose_sum_is_the_total() -> None:
    record = json.loads(write_making(PRICED, FINGERPRINT))

    assert record["price_lines"] == [
        {"name": "setup", "quantity": "1", "per": "disc", "rate": "12.50", "amount": "12.50"},
        {"name": "pierces", "quantity": "5", "per": "pierce", "rate": "0.015", "amount": "0.08"},
    ]
    assert (record["currency"], record["currency_decimals"], record["total"]) == ("EUR", 2, "12.58")
    assert sum(Decimal(line["amount"]) for line in record["price_lines"]) == Decimal(record["total"])


def test_an_amount_is_never_written_in_powers_of_ten() -> None:
    tiny = PriceLine(name="hits", quantity=Decimal(1), per="hit", rate=Decimal("0.0000001"), amount=Decimal("1E-7"))

    record = json.loads(write_making(Making(price_lines=(tiny,), total=Decimal("1E+2")), FINGERPRINT))

    assert record["price_lines"][0]["amount"] == "0.0000001"
    assert record["total"] == "100"


def test_a_making_of_which_nothing_can_be_told_is_all_null() -> None:
    record = json.loads(write_making(Making(), FINGERPRINT))

    told = {name for name, value in record.items() if value not in (None, [])}
    assert told == {"format", "fingerprint", "engine_version", "disc", "time_parts"}
    assert set(record["time_parts"].values()) == {None}
