import pytest

from layout.read import read_score
from tests.layout.read.hexdump import midi_file

END = b"\x00\xff\x2f\x00"


def name_event(name: bytes) -> bytes:
    """A track-name event at the current tick."""
    assert len(name) < 128  # so that the length is one byte
    return b"\x00\xff\x03" + bytes([len(name)]) + name


@pytest.mark.parametrize(
    ("name", "title"),
    [
        (b"Fernhollow Reel", "Fernhollow Reel"),
        ("Über den Bach".encode(), "Über den Bach"),
        ("Über den Bach".encode("latin-1"), "Über den Bach"),
        (b"Two\r\nlines\tand\x00more\x7f", "Twolinesandmore"),
        ("\ufeffwith \u202eorder marks".encode(), "with order marks"),
        (b"  spaces round it  ", "spaces round it"),
        (b"x" * 100, "x" * 80),
        ("ü".encode() * 60, "ü" * 60),
        (b"x" * 79 + b" y", "x" * 79),
        (b"", ""),
    ],
    ids=[
        "plain",
        "utf-8",
        "latin-1",
        "controls",
        "format marks",
        "spaces",
        "long",
        "characters, not bytes",
        "cut at a space",
        "empty",
    ],
)
def test_the_title_is_the_track_name_made_printable(name: bytes, title: str) -> None:
    tune = midi_file(name_event(name) + END)

    score = read_score(tune)

    assert score.title == title


def test_the_first_name_that_leaves_something_is_the_title() -> None:
    tune = midi_file(name_event(b"\n") + name_event(b"First") + name_event(b"Second") + END)

    score = read_score(tune)

    assert score.title == "First"


def test_a_name_in_a_later_track_of_a_format_1_file_names_a_part_and_not_the_tune() -> None:
    # Standard MIDI Files 1.0: in the first track the name of the sequence, otherwise of the track.
    tune = midi_file(END, name_event(b"Left hand") + END, midi_format=1)

    score = read_score(tune)

    assert score.title == ""


def test_each_sequence_of_a_format_2_file_has_its_own_title() -> None:
    tune = midi_file(name_event(b"One") + END, name_event(b"Two") + END, midi_format=2)

    score = read_score(tune, sequence=2)

    assert score.title == "Two"
