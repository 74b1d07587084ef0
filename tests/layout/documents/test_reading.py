"""What no document may hold is refused in the same words, whichever document it is."""

from collections.abc import Callable

import pytest

from layout.documents import read_cutter, read_movement, read_settings
from layout.documents.sheets import read_sheet_job
from layout.errors import DocumentError

READERS: dict[str, Callable[[str | bytes], object]] = {
    "movement": read_movement,
    "cutter": read_cutter,
    "settings": read_settings,
    "sheet job": read_sheet_job,
}

FAULTS: dict[str, tuple[str | bytes, str, str]] = {
    "long whole number": ('{"a": ' + "9" * 10_000 + "}", "", "a number has 10000 digits; 400 are the most"),
    "long negative number": ('{"a": -' + "9" * 401 + "}", "", "a number has 401 digits; 400 are the most"),
    "large number": ('{"a": [1e400]}', "", "the number 1e400 is larger than any field needs"),
    "long power": ('{"a": 1e' + "9" * 500 + "}", "", "... (502 characters) is larger than any field needs"),
    "not a number": ('{"a": NaN}', "", "not JSON: NaN is not a JSON number; write the document as one JSON object"),
    "infinity": ('{"a": -Infinity}', "", "not JSON: -Infinity is not a JSON number"),
    "very deep": ("[" * 100_000, "", "lists and objects are nested more than 12 deep; a document needs fewer"),
    "deep": ('{"a":' * 20 + "1" + "}" * 20, "", "lists and objects are nested more than 12 deep"),
    "name twice": ('{"a": 1, "\\u0061": 2}', "", "the field 'a' is given twice; leave one of them out"),
    "name twice inside": ('{"x": [{"a": 1, "a": 2}]}', "", "the field 'a' is given twice"),
    "half a character": ('{"x": ["", "\\ud83d"]}', "/x/1", "\\ud83d is half a character; write the character itself"),
    "half a character in a name": ('{"x": {"\\udfff": 1}}', "/x", "\\udfff is half a character"),
    "half a character in bytes": (b'{"x": "\xed\xa0\xbd"}', "/x", "\\ud83d is half a character"),
    "another encoding": (b'{"x": "\xe9"}', "", "not UTF-8: byte 0xe9 at place 7 is no part of a character; save it as"),
    "nothing": (b" \n", "", "the document is empty; write it as one JSON object"),
    "no object": ('"x"', "", "a JSON object is needed, got 'x'"),
    "worth that is no number": (
        '{"x": {"value": 1, "plus_minus": "a"}, "y": {"value": 2, "plus_minus": -1}}',
        "/x/plus_minus",
        "a number is needed, got 'a'",
    ),
}


def first_fault(read: Callable[[str | bytes], object], text: str | bytes) -> tuple[str, str]:
    with pytest.raises(DocumentError) as raised:
        read(text)
    return raised.value.problems[0].pointer, raised.value.problems[0].message


@pytest.mark.parametrize("fault", FAULTS)
@pytest.mark.parametrize("document", READERS)
def test_what_no_document_may_hold_is_refused_in_our_words(document: str, fault: str) -> None:
    text, pointer, message = FAULTS[fault]

    at, told = first_fault(READERS[document], text)

    assert at == pointer
    assert message in told
    assert len(told) < 300
    assert "codec" not in told
    assert "int_max_str_digits" not in told
    told.encode()  # what is told can be written anywhere


def test_every_worth_that_is_not_valid_is_told_with_its_place() -> None:
    text, *_ = FAULTS["worth that is no number"]

    with pytest.raises(DocumentError) as raised:
        read_settings(text)

    assert [problem.pointer for problem in raised.value.problems] == ["/x/plus_minus", "/y/plus_minus"]


def test_a_whole_number_too_large_for_its_field_is_shown_in_short() -> None:
    at, told = first_fault(read_settings, '{"largest_nudge_ms": ' + "7" * 400 + "}")

    assert at == "/largest_nudge_ms"
    assert told.endswith(f"got {'7' * 120}... (400 characters)")


def test_characters_beyond_the_first_plane_are_whole_in_both_ways_of_writing_them() -> None:
    in_escapes, as_they_are = read_settings('{"title": "\\ud83c\\udfb5"}'), read_settings('{"title": "🎵"}')

    assert in_escapes.title == as_they_are.title == "\N{MUSICAL NOTE}"
