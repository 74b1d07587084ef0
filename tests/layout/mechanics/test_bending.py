import math

import pytest

from layout.mechanics.bending import bend_allowance_mm, neutral_fibre_factor, over_bend_rad


# k = 0.65 + 0.5 log10(r/s) of DIN 6935 evaluated by hand calculator at each r/s; at 0.0501 it reaches 0.
@pytest.mark.parametrize(
    ("ratio", "k"),
    [(0.25, 0.34897), (0.5, 0.49949), (0.8, 0.60154), (1, 0.65), (2, 0.80051), (5, 0.99949), (10, 1), (0.05, 0)],
)
def test_the_neutral_fibre_factor_follows_din_6935(ratio: float, k: float) -> None:
    assert neutral_fibre_factor(ratio, 1.0) == pytest.approx(k, abs=5e-6)


def test_the_bend_allowance_equals_the_published_example() -> None:
    # Published worked example (pgsrl.eu bend allowance page): r 2, s 2, 90 deg gives 4.16 mm.
    assert bend_allowance_mm(2.0, 2.0) == pytest.approx(4.16, abs=0.005)


@pytest.mark.parametrize(
    ("radius_mm", "thickness_mm", "bend_deg", "allowance_mm"),
    [
        (0.8, 0.8, 90, 1.6650),  # 1.5708 * (0.8 + 0.65 * 0.4) = 1.5708 * 1.06
        (0.4, 0.8, 90, 0.9422),  # k 0.49949: 1.5708 * (0.4 + 0.49949 * 0.4)
        (1.0, 0.5, 90, 1.8852),  # k 0.80051: 1.5708 * (1 + 0.80051 * 0.25)
        (0.8, 0.8, 60, 1.1100),  # two thirds of the first
        (0.8, 0.8, 45, 0.8325),  # half of the first
    ],
)
def test_the_bend_allowance_is_the_length_of_the_neutral_fibre(
    radius_mm: float, thickness_mm: float, bend_deg: float, allowance_mm: float
) -> None:
    assert bend_allowance_mm(radius_mm, thickness_mm, math.radians(bend_deg)) == pytest.approx(allowance_mm, abs=5e-5)


def test_two_legs_of_a_published_example_come_out_of_a_flat_of_its_length() -> None:
    # Published worked example (pgsrl.eu bend allowance page): legs of 50 + 50 mm to the outside apex, r 2, s 2, 90 deg:
    # flat 96.16 mm. Each leg is straight up to r + s = 4 mm from the apex.
    assert 2 * (50 - 4) + bend_allowance_mm(2.0, 2.0) == pytest.approx(96.16, abs=0.005)


# Published stepped table of the same factor (wisetool.com, formula page): r/s and k, rounded to tenths.
@pytest.mark.parametrize(("ratio", "k"), [(0.5, 0.5), (0.8, 0.6), (1.2, 0.7), (2.0, 0.8), (3.0, 0.9), (5.0, 1.0)])
def test_the_factor_rounds_to_the_published_stepped_table(ratio: float, k: float) -> None:
    assert round(neutral_fibre_factor(ratio, 1.0), 1) == k


def test_a_fold_is_bent_further_by_as_much_as_it_opens() -> None:
    # 90 degrees wanted, opening by 1.5: bent to 91.5, let go, 90 again
    bent_rad = over_bend_rad(math.radians(1.5))

    assert math.degrees(bent_rad) == pytest.approx(91.5)
    assert over_bend_rad(0.0) == math.pi / 2
    assert math.degrees(over_bend_rad(math.radians(2), math.radians(45))) == pytest.approx(47.0)
