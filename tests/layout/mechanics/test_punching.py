"""Forces of hits, against figures published elsewhere; τ in N/mm², lengths in mm."""

import math

import pytest

from layout.documents.cutter import Tool
from layout.mechanics.punching import cutting_force_n, press_force_n, sheared_length_mm, stripping_force_n

INCH_MM = 25.4
PSI_N_PER_MM2 = 4.4482216152605 / INCH_MM**2  # pound-force, exact by definition
US_TON_N = 2000 * 4.4482216152605


@pytest.mark.parametrize(
    ("length_mm", "thickness_mm", "shear_n_per_mm2", "published_n"),
    [
        # "Problem 115", punching a 20 mm hole through a 25 mm plate (attributed to Singer and Pytel; vkd-studio.ru)
        pytest.param(math.pi * 20, 25, 350, 549778.7, id="20 mm hole in 25 mm plate"),
        # electrical4u.net, punching force, hole of 10 mm in 3 mm
        pytest.param(math.pi * 10, 3, 350, 32986.7, id="10 mm hole in 3 mm"),
        # calculator.academy, punching force: 40 mm round, 3 mm aluminium
        pytest.param(40, 3, 172.4, 20688, id="40 mm round in 3 mm aluminium"),
        # scribd.com/document/541728896: brass, 126 mm round, 2 mm, 400 N/mm²
        pytest.param(126, 2, 400, 100800, id="126 mm round in 2 mm brass"),
    ],
)
def test_the_force_is_the_published_one(
    length_mm: float, thickness_mm: float, shear_n_per_mm2: float, published_n: float
) -> None:
    assert cutting_force_n(length_mm, thickness_mm, shear_n_per_mm2) == pytest.approx(published_n, rel=2e-6)


@pytest.mark.parametrize(
    ("diameter_in", "thickness_in", "shear_psi", "published_tons"),
    [
        # roperwhitney.com/reference-charts/tonnage; gauges by the Manufacturers' Standard Gauge
        pytest.param(4, 0.036, 50000, 11.3, id="4 in, 20 gauge mild steel"),
        pytest.param(0.25, 0.135, 60000, 3.2, id="1/4 in, 10 gauge A36"),
    ],
)
def test_the_force_is_that_of_a_tonnage_chart(
    diameter_in: float, thickness_in: float, shear_psi: float, published_tons: float
) -> None:
    force_n = cutting_force_n(math.pi * diameter_in * INCH_MM, thickness_in * INCH_MM, shear_psi * PSI_N_PER_MM2)

    assert round(force_n / US_TON_N, 1) == published_tons


def test_cutting_and_stripping_together_are_the_published_force_of_the_press() -> None:
    # scribd.com/document/541728896: brass, L 126 mm, s 2 mm, tau 400: 100.8 kN + 20 % = 120.96 kN
    assert stripping_force_n(100800, 0.2) == pytest.approx(20160)
    assert press_force_n(100800, 0.2) == pytest.approx(120960)


def tool_with(*, makes: str, length_mm: float, width_mm: float) -> Tool:
    tab = {"tab_width_mm": width_mm, "tab_depth_mm": 1.0, "edge_ahead_mm": 0.0}
    fields = tab if makes == "lance" else {"edge_ahead_mm": -length_mm / 2}
    size = {"footprint_length_mm": length_mm, "footprint_width_mm": width_mm}
    return Tool.model_validate({"tool": "A1", "title": "a tool", "makes": makes} | fields | size)


def test_a_lance_shears_three_sides() -> None:
    # 3 + 3 + 1.5 = 7.5 mm; 7.5 * 0.8 * 345 = 2070 N
    length_mm = sheared_length_mm(tool_with(makes="lance", length_mm=3, width_mm=1.5))

    assert length_mm == 7.5
    assert cutting_force_n(length_mm, 0.8, 345) == pytest.approx(2070)


def test_a_slot_is_sheared_all_round() -> None:
    # two straights of 2.2 - 1.3 = 0.9 mm and a circle of 1.3 mm
    assert sheared_length_mm(tool_with(makes="slot", length_mm=2.2, width_mm=1.3)) == pytest.approx(1.8 + math.pi * 1.3)


@pytest.mark.parametrize(("length_mm", "width_mm"), [(9, 4), (4, 9)])
def test_a_long_hole_is_sheared_all_round_whichever_way_it_lies(length_mm: float, width_mm: float) -> None:
    tool = Tool.model_validate(
        {"tool": "O1", "title": "a tool", "makes": "hole"}
        | {"footprint_length_mm": length_mm, "footprint_width_mm": width_mm}
    )

    assert sheared_length_mm(tool) == pytest.approx(2 * 5 + math.pi * 4)


def test_a_round_slot_is_a_hole() -> None:
    # 10 mm across in 0.8 mm at 345 N/mm²: 8670.8 N; at 276: 6936.6 N
    length_mm = sheared_length_mm(tool_with(makes="slot", length_mm=10, width_mm=10))

    assert cutting_force_n(length_mm, 0.8, 345) == pytest.approx(8670.8, abs=0.05)
    assert cutting_force_n(length_mm, 0.8, 276) == pytest.approx(6936.6, abs=0.05)
