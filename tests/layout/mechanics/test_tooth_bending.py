"""The bar's partials against published roots, worked frequencies, and a bar built of many small elements."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.arrays import FloatArray
from layout.mechanics.tooth_bending import bar_roots, decay_s, frequency_hz, lift_shares, partial_ratios


def test_the_roots_of_a_plain_bar_are_the_published_ones() -> None:
    # "Cantilever higher modes" (solver-docs.pages.dev) and a strain-gauge maker's manual 2310, p. 97.
    published = [1.875104069, 4.694091133, 7.854757438, 10.995540735, 14.137168391]

    assert bar_roots(0.0, 5) == pytest.approx(published, abs=5e-10)


def test_the_partials_of_a_plain_bar_stand_in_the_published_ratios() -> None:
    # Squares of the published roots over the first: 22.034492/3.516015, 61.697214/3.516015.
    assert partial_ratios(bar_roots(0.0, 4)) == pytest.approx([1.0, 6.26689, 17.54748, 34.38606], abs=5e-6)


def test_the_roots_give_the_published_frequencies_of_a_steel_bar() -> None:
    # Worked example of the same page, after Rao table 8.1 and Timoshenko section 5.3: 1 m, 50 mm square, 200 GPa,
    # 7850 kg/m³ gives 40.77, 255.5, 715.39 and 1402 Hz; √(E·I/(m·L³)) = √(E/12)/√7850·h/L².
    factor_hz = math.sqrt(200e9 / 12 / 7850) * 0.05 / (2 * math.pi)

    assert bar_roots(0.0, 4) ** 2 * factor_hz == pytest.approx([40.77, 255.5, 715.39, 1402.0], rel=2e-4)


@pytest.mark.parametrize(
    ("end_mass_ratio", "root"),
    [(0.1, 1.722742), (0.25, 1.573751), (0.5, 1.419964), (1.0, 1.247917), (2.0, 1.076196), (5.0, 0.870021)],
)
def test_a_mass_at_the_tip_lowers_the_first_root_as_tables_say(end_mass_ratio: float, root: float) -> None:
    # Roots of the transcendental equation, computed apart from this program.
    assert bar_roots(end_mass_ratio, 1) == pytest.approx([root], abs=5e-7)


@pytest.mark.parametrize("end_mass_ratio", [0.5, 1.0, 5.0])
def test_a_heavy_tip_sounds_as_rayleigh_s_quotient_says(end_mass_ratio: float) -> None:
    # ω² = 3·E·I/(L³·(M + 33/140·m)), textbooks; high by 0.150 % at µ 0.5, 0.053 % at 1, 0.003 % at 5.
    rayleigh = math.sqrt(3 / (end_mass_ratio + 33 / 140))
    high = {0.5: 0.00150, 1.0: 0.00053, 5.0: 0.00003}[end_mass_ratio]

    assert rayleigh / bar_roots(end_mass_ratio, 1)[0] ** 2 - 1 == pytest.approx(high, abs=1e-5)


@given(st.floats(0, 1000), st.integers(1, 12))
def test_every_partial_has_one_root_between_multiples_of_half_a_turn(end_mass_ratio: float, count: int) -> None:
    roots = bar_roots(end_mass_ratio, count)
    x = roots
    left = 1 / np.cosh(x) + np.cos(x) + end_mass_ratio * x * (np.cos(x) * np.tanh(x) - np.sin(x))

    assert np.all((roots > np.arange(count) * math.pi) & (roots < np.arange(1, count + 1) * math.pi))
    assert np.abs(left).max() < 1e-11 * (1 + end_mass_ratio * roots[-1] ** 2)


def test_no_partials_are_no_roots() -> None:
    assert (len(bar_roots(0.0, 0)), len(partial_ratios(bar_roots(0.0, 0)))) == (0, 0)


@pytest.mark.parametrize("end_mass_ratio", [0.0, 0.1, 1.0, 10.0])
def test_the_shares_of_all_partials_make_the_whole_lift(end_mass_ratio: float) -> None:
    shares = lift_shares(bar_roots(end_mass_ratio, 100), end_mass_ratio)

    assert np.all(shares > 0)
    assert shares.sum() == pytest.approx(1, abs=1e-6)  # 12/x⁴ from the 101st on: under 12/(3·π⁴·99.5³)


def test_a_plain_bar_s_partials_take_the_fourth_power_of_their_roots() -> None:
    roots = bar_roots(0.0, 3)

    assert lift_shares(roots, 0.0) == pytest.approx(12 / roots**4)


@pytest.mark.parametrize("end_mass_ratio", [0.0, 0.3, 2.0])
def test_shares_and_ratios_are_those_of_a_bar_of_many_small_elements(end_mass_ratio: float) -> None:
    ratios, shares = by_elements(end_mass_ratio, element_count=40)
    roots = bar_roots(end_mass_ratio, 4)

    assert partial_ratios(roots) == pytest.approx(ratios[:4], rel=1e-5)
    assert lift_shares(roots, end_mass_ratio) == pytest.approx(shares[:4], rel=1e-4)


def by_elements(end_mass_ratio: float, element_count: int) -> tuple[FloatArray, FloatArray]:
    """Frequency ratios and shares of a clamped bar of Hermite beam elements (textbooks), E·I = m = L = 1.

    Shares: the static shape under a tip force, taken apart into the modes, which mass makes orthogonal.
    """
    h = 1 / element_count
    size = 2 * element_count + 2
    stiffness, mass = np.zeros((size, size)), np.zeros((size, size))
    k = np.array([[12, 6 * h, -12, 6 * h], [6 * h, 4 * h * h, -6 * h, 2 * h * h]])
    k = np.vstack([k, -k[0], [6 * h, 2 * h * h, -6 * h, 4 * h * h]]) / h**3
    m = np.array(
        [
            [156, 22 * h, 54, -13 * h],
            [22 * h, 4 * h * h, 13 * h, -3 * h * h],
            [54, 13 * h, 156, -22 * h],
            [-13 * h, -3 * h * h, -22 * h, 4 * h * h],
        ]
    ) * (h / 420)
    for element in range(element_count):
        span = slice(2 * element, 2 * element + 4)
        stiffness[span, span] += k
        mass[span, span] += m
    mass[-2, -2] += end_mass_ratio
    stiffness, mass = stiffness[2:, 2:], mass[2:, 2:]
    lower = np.linalg.inv(np.linalg.cholesky(mass))
    squares, modes = np.linalg.eigh(lower @ stiffness @ lower.T)
    shapes = lower.T @ modes
    force = np.zeros(len(mass))
    force[-2] = 1
    lifted = np.linalg.solve(stiffness, force)
    shares = (shapes.T @ mass @ lifted) * shapes[-2] / lifted[-2]
    return np.sqrt(squares / squares[0]), shares


def test_pitches_are_those_of_equal_temperament_from_440_hz() -> None:
    # ISO 16; published tables: C4 261.62557, C6 1046.50226; 442 Hz is 7.851 cents above 440.
    assert frequency_hz(69, 0.0) == 440.0
    assert frequency_hz(60, 0.0) == pytest.approx(261.62557, abs=5e-6)
    assert frequency_hz(84, 0.0) == pytest.approx(1046.50226, abs=5e-6)
    assert frequency_hz(69, 7.851) == pytest.approx(442.0, abs=1e-3)


def test_a_quality_of_1000_at_1_khz_decays_in_0_318_s() -> None:
    # τ = Q/(π·f); to a thousandth, 60 dB, in 6.908·τ = 2.20 s.
    assert decay_s(1000.0, 1000.0) == pytest.approx(0.3183, abs=5e-5)
    assert math.log(1000) * decay_s(1000.0, 1000.0) == pytest.approx(2.20, abs=0.005)
