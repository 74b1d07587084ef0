"""Arrays frozen; places counted out and runs laid end to end, against doing it one by one."""

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.arrays import (
    FloatArray,
    IntArray,
    begins_run,
    counted_out,
    end_to_end,
    frozen_floats,
    frozen_ints,
)

RUNS = st.lists(st.tuples(st.integers(-50, 50), st.integers(0, 6)))


@pytest.mark.parametrize(("freeze", "kind"), [(frozen_floats, np.float64), (frozen_ints, np.int64)])
@pytest.mark.parametrize("values", [[1, 2], [], range(3, 5), np.array([5, 6])], ids=["some", "none", "lazy", "array"])
def test_what_is_frozen_is_a_copy_of_its_kind_that_cannot_be_written_to(
    freeze: Callable[..., FloatArray | IntArray], kind: type, values: object
) -> None:
    frozen = freeze(values)

    assert frozen.dtype == kind
    assert frozen is not values
    with pytest.raises(ValueError, match="read-only"):
        frozen[...] = 0


def test_a_run_begins_wherever_a_value_differs_from_the_one_before() -> None:
    assert begins_run(frozen_ints([5, 5, 7, 5])).tolist() == [True, False, True, True]
    assert begins_run(frozen_ints([])).tolist() == []


@given(runs=RUNS)
def test_places_are_counted_out_run_by_run(runs: list[tuple[int, int]]) -> None:
    first, count = np.array(runs, dtype=np.int64).reshape(len(runs), 2).T

    run, place = counted_out(first, count)

    by_hand = [(number, begin + step) for number, (begin, many) in enumerate(runs) for step in range(many)]
    assert list(zip(run.tolist(), place.tolist(), strict=True)) == by_hand


@given(st.lists(st.lists(st.integers(0, 99), max_size=4), max_size=8))
def test_runs_laid_end_to_end_keep_their_order_and_know_their_run(runs: list[list[int]]) -> None:
    run, entry = end_to_end(runs)

    expected = [(place, value) for place, values in enumerate(runs) for value in values]
    assert list(zip(run.tolist(), entry.tolist(), strict=True)) == expected
    assert run.dtype == entry.dtype == np.dtype(np.int64)
