"""Places counted out and runs laid end to end, against doing it one by one."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.arrays import counted_out, end_to_end

RUNS = st.lists(st.tuples(st.integers(-50, 50), st.integers(0, 6)))


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
