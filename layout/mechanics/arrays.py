"""Array types shared by the stages' values, and the one way to freeze an array."""

from collections.abc import Iterable

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
