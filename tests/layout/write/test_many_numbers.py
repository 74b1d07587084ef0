"""Many numbers at once, against each by itself."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from layout.write.many_numbers import as_repr, lines_as_data, strokes_as_data
from layout.write.numbers import number, rounded

# Whole ones, coordinates as a file has them, and doubles of every size.
NUMBERS = st.one_of(
    st.integers(-400, 400).map(float),
    st.floats(-400, 400).map(lambda value: round(value, 6) + 0.0),
    st.floats(allow_nan=False, allow_infinity=False),
    st.sampled_from([0.0, 1e-6, 9.9e-5, 1e-4, 1e15, 1e16, 123456789.000001]),
)


@given(rows=st.integers(1, 5).flatmap(lambda width: st.lists(st.lists(NUMBERS, min_size=width, max_size=width))))
def test_many_numbers_are_written_as_python_writes_each(rows: list[list[float]]) -> None:
    width = len(rows[0]) if rows else 1

    written = as_repr(np.array(rows, dtype=np.float64).reshape(len(rows), width))

    assert written == [[repr(value) for value in row] for row in rows]


@given(
    lines=st.integers(2, 4).flatmap(
        lambda points: st.lists(st.lists(st.tuples(NUMBERS, NUMBERS), min_size=points, max_size=points))
    )
)
def test_lines_are_written_with_each_number_as_it_is_by_itself(lines: list[list[tuple[float, float]]]) -> None:
    # No machine is larger than a kilometre; up to there six decimals are all a double holds.
    within = np.clip(np.array(lines, dtype=np.float64), -1e6, 1e6)
    lines_mm = rounded(within).reshape(len(lines), len(lines[0]) if lines else 2, 2)

    written = lines_as_data(lines_mm)

    each = ("M" + "L".join(f"{number(x)} {number(y)}" for x, y in line) for line in lines_mm.tolist())
    assert written == "".join(each)


@given(st.lists(st.lists(st.tuples(NUMBERS, NUMBERS), min_size=1, max_size=4), max_size=4))
def test_strokes_of_any_lengths_are_written_with_each_number_as_it_is_by_itself(
    strokes: list[list[tuple[float, float]]],
) -> None:
    strokes_mm = [rounded(np.clip(np.array(stroke, dtype=np.float64), -1e6, 1e6)) for stroke in strokes]

    written = strokes_as_data(strokes_mm)

    each = ("M" + "L".join(f"{number(x)} {number(y)}" for x, y in stroke.tolist()) for stroke in strokes_mm)
    assert written == "".join(each)
