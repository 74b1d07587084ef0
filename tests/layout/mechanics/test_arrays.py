"""Places counted out, against counting them one by one."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.arrays import counted_out

RUNS = st.lists(st.tuples(st.integers(-50, 50), st.integers(0, 6)))


@given(runs=RUNS)
def test_places_are_counted_out_run_by_run(runs: list[tuple[int, int]]) -> None:
    first, count = np.array(runs, dtype=np.int64).reshape(len(runs), 2).T

    run, place = counted_out(first, count)

    by_hand = [(number, begin + step) for number, (begin, many) in enumerate(runs) for step in range(many)]
    assert list(zip(run.tolist(), place.tolist(), strict=True)) == by_hand
