"""Array types shared by the stages' values, the one way to freeze an array, and runs of places."""

from collections.abc import Iterable, Sequence
from itertools import chain

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


def frozen_floats(values: Iterable[float] | FloatArray) -> FloatArray:
    """A read-only float64 copy of the values; empty in, empty out."""
    array = np.array(values if isinstance(values, np.ndarray) else list(values), dtype=np.float64)
    array.setflags(write=False)
    return array


def frozen_ints(values: Iterable[int] | IntArray) -> IntArray:
    """A read-only int64 copy of the values; empty in, empty out."""
    array = np.array(values if isinstance(values, np.ndarray) else list(values), dtype=np.int64)
    array.setflags(write=False)
    return array


def begins_run(values: IntArray) -> BoolArray:
    """Where a value differs from the one before it: for 5 5 7 the first and the third; empty for none."""
    begins = np.ones(len(values), dtype=np.bool_)
    begins[1:] = values[1:] != values[:-1]
    return begins


def counted_out(first: IntArray, count: IntArray) -> tuple[IntArray, IntArray]:
    """Runs of places end to end: for first 5 and 0, count 2 and 3 the runs are 0 0 1 1 1, the places 5 6 0 1 2.

    Args:
        first: Shape (n,). The first place of each run.
        count: Shape (n,). How many places it has; 0 for none.

    Returns:
        The run and the place, both in as many entries as there are places in all; empty for no runs.
    """
    run = np.repeat(np.arange(len(count)), count)
    return run, np.arange(len(run)) + (first - np.cumsum(count) + count)[run]


def end_to_end(runs: Sequence[Sequence[int]]) -> tuple[IntArray, IntArray]:
    """The entries of all runs one after the other: (7, 5), () and (3,) are the runs 0 0 2, the entries 7 5 3.

    Returns:
        The place of the run and the entry, both in as many entries as there are in all; empty for no runs.
    """
    entry = np.fromiter(chain.from_iterable(runs), dtype=np.int64)
    count = np.fromiter(map(len, runs), dtype=np.int64, count=len(runs))
    return np.repeat(np.arange(len(runs)), count), entry
