import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.plain_letters import is_mostly_lost, plain_ascii


@pytest.mark.parametrize(
    ("text", "plain"),
    [
        ("Žluťoučký kůň", "Zlutoucky kun"),
        ("Søren Ærø Łódź Straße œuvre", "Soren Aero Lodz Strasse oeuvre"),
        ("Þing ðan ŋ \N{LATIN SMALL LETTER DOTLESS I}slak", "Thing dan ng islak"),
        ("“Come” – \u2018go\u2019, it\u2019s 5 − 3…", "\"Come\" - 'go', it's 5 - 3..."),
        ("½ × 2", "1/2 x 2"),
        ("one\n\t two\u2028three\u200b", "one two three"),
        ("音楽 for two", "?? for two"),
    ],
)
def test_text_is_written_with_the_letters_it_is_like(text: str, plain: str) -> None:
    assert plain_ascii(text) == plain


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("Пчёлы", True),
        ("音楽 a", True),
        ("音楽 ab", False),
        ("???", False),
        ("", False),
        (" \n", False),
        ("Łódź", False),
    ],
)
def test_a_text_is_mostly_lost_when_more_than_half_of_it_has_no_like(text: str, *, expected: bool) -> None:
    assert is_mostly_lost(text) is expected


@given(text=st.text())
def test_any_text_becomes_one_printable_ascii_line(text: str) -> None:
    plain = plain_ascii(text)

    assert plain.isascii()
    assert plain.isprintable()
    assert plain_ascii(plain) == plain
