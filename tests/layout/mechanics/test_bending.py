import math

import pytest

from layout.mechanics.bending import bend_allowance_mm, neutral_fibre_factor


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
