import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.write.numbers import number, rounded
from layout.write.plain_text import dxf_text, one_line
from layout.write.svg_page import Face, at_most, fitted, shortened, text_width_mm, wrapped

FACE = Face(size_mm=2.0)


@pytest.mark.parametrize(
    ("value", "text"),
    [(1.5, "1.5"), (-0.0, "0"), (-4e-7, "0"), (100.0, "100"), (1e-5, "0.00001"), (123456.7891234, "123456.789123")],
)
def test_numbers_are_written_plainly_to_six_decimals(value: float, text: str) -> None:
    assert number(value) == text


@given(value=st.floats(-1e6, 1e6))
def test_a_written_number_is_within_half_a_nanometre(value: float) -> None:
    assert float(number(value)) == pytest.approx(value, abs=0.51e-6)
    assert "e" not in number(value)


def test_rounding_leaves_no_negative_zero() -> None:
    assert str(rounded(np.array([-1e-9, -0.0, -1.0])).tolist()) == "[0.0, 0.0, -1.0]"


@given(text=st.text())
def test_one_line_has_no_control_character_and_does_not_change_when_repeated(text: str) -> None:
    line = one_line(text)

    assert all(character.isprintable() or character == " " or ord(character) > 0x7F for character in line)
    assert len(line.splitlines()) <= 1
    assert one_line(line) == line


@given(text=st.text(), most=st.integers(0, 60))
def test_text_for_a_dxf_file_is_one_ascii_line_that_fits(text: str, most: int) -> None:
    written = dxf_text(text, most)

    assert written.isascii()
    assert len(written) <= most
    assert len(written.splitlines()) <= 1
    assert dxf_text(text).startswith(written)


@given(text=st.text(max_size=80), room_mm=st.floats(10, 60))
def test_a_shortened_line_fits_and_says_that_it_was_cut(text: str, room_mm: float) -> None:
    line = shortened(text, FACE, room_mm)

    assert text_width_mm(line, FACE) <= room_mm
    assert line == one_line(text) or line.endswith("…")


@given(text=st.text(alphabet="abcdefghmW ,", max_size=200), room_mm=st.floats(20, 60))
def test_wrapped_lines_fit_and_hold_all_of_the_text(text: str, room_mm: float) -> None:
    lines = wrapped(text, FACE, room_mm)

    assert all(text_width_mm(line, FACE) <= room_mm for line in lines)
    assert "".join(lines).replace(" ", "") == "".join(text.split())
    if all(text_width_mm(word, FACE) <= room_mm for word in text.split()):
        assert " ".join(lines) == one_line(text)


@given(text=st.text(max_size=200), room_mm=st.floats(20, 60), most=st.integers(1, 4))
def test_at_most_so_many_lines_are_written_and_the_last_says_that_it_was_cut(
    text: str, room_mm: float, most: int
) -> None:
    lines = at_most(most, text, FACE, room_mm)

    assert 1 <= len(lines) <= most
    assert lines == wrapped(text, FACE, room_mm) or lines[-1].endswith("…")


@given(text=st.text(max_size=90), room_mm=st.floats(20, 60))
def test_a_fitted_text_is_as_large_as_it_can_be(text: str, room_mm: float) -> None:
    face, lines = fitted(text, FACE, room_mm, 1.0)

    assert 1.0 <= face.size_mm <= FACE.size_mm
    assert len(lines) <= 2
    assert all(text_width_mm(line, face) <= room_mm for line in lines)
    if text_width_mm(one_line(text), FACE) <= room_mm:
        assert (face, lines) == (FACE, [one_line(text)])
