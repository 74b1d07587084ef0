"""Figures of the load test, against other ways to reckon them."""

import math
import statistics

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.load.judging import share, slope_of

MB = 1_000_000


def test_memory_that_rises_a_megabyte_a_minute_rises_sixty_an_hour() -> None:
    at_s = [60.0 * minute for minute in range(10)]

    slope = slope_of(at_s, [500 * MB + minute * MB for minute in range(10)])

    assert slope.per_hour == pytest.approx(60 * MB)
    assert slope.noise_per_hour == pytest.approx(0, abs=1e-3)
    assert slope.rises


def test_the_line_is_that_of_least_squares_and_its_error_the_usual_one_where_neighbours_are_not_alike() -> None:
    at_s = [5.0 * number for number in range(40)]
    values = [100 + 0.01 * s + (1 if number % 2 else -1) for number, s in enumerate(at_s)]

    slope = slope_of(at_s, values)

    line = np.polyfit(at_s, values, 1, cov=True)  # numpy's covariance is of n - 2 degrees of freedom, as ours
    assert slope.per_hour == pytest.approx(3600 * statistics.linear_regression(at_s, values).slope)
    assert slope.noise_per_hour == pytest.approx(2 * 3600 * math.sqrt(line[1][0, 0]))


def test_where_neighbours_are_alike_chance_explains_more() -> None:
    at_s = [5.0 * number for number in range(120)]
    alike = [math.sin(s / 100) for s in at_s]  # one turn in 628 s: few independent measurements
    mixed = [alike[number * 47 % 120] for number in range(120)]  # 47 is prime: the same values, neighbours far apart

    assert slope_of(at_s, alike).noise_per_hour > 3 * slope_of(at_s, mixed).noise_per_hour


def test_flat_memory_does_not_rise() -> None:
    assert not slope_of([0.0, 5.0, 10.0, 15.0], [7.0, 7.0, 7.0, 7.0]).rises


@pytest.mark.parametrize(
    ("of_hundred", "value"),
    [(50, 50), (99, 99), (100, 100), (0.5, 1)],
)
def test_of_the_numbers_to_a_hundred_so_many_of_a_hundred_do_not_pass_the_share(of_hundred: float, value: int) -> None:
    assert share(range(100, 0, -1), of_hundred) == value


@given(st.lists(st.integers(0, 50), min_size=1, max_size=60), st.integers(1, 100))
def test_a_share_is_the_least_value_that_is_not_passed_by_so_many(values: list[int], of_hundred: int) -> None:
    enough = [one for one in values if 100 * sum(other <= one for other in values) >= of_hundred * len(values)]

    assert share(values, of_hundred) == min(enough)
