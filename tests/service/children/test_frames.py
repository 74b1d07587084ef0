"""Messages through a pipe: whole ones only, and nobody waits for the rest of one for ever."""

import io
import os
import time
from collections.abc import Iterator

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.children.frames import LENGTH, MOST_BYTES, BrokenFrameError, FrameReader, read_frame, write_frame


@pytest.fixture
def pipe() -> Iterator[tuple[int, io.FileIO]]:
    reading, writing = os.pipe()
    file = io.FileIO(writing, "wb")
    yield reading, file
    os.close(reading)
    file.close()


@given(st.lists(st.binary(max_size=300)))
def test_messages_come_out_as_they_went_in(messages: list[bytes]) -> None:
    file = io.BytesIO()

    for message in messages:
        write_frame(file, message)
    file.seek(0)

    assert [read_frame(file) for _ in messages] == messages
    assert read_frame(file) is None


@given(st.lists(st.binary(max_size=300), min_size=1), st.integers(1, 20))
def test_a_reader_puts_pieces_together(messages: list[bytes], piece_bytes: int) -> None:
    written = b"".join(LENGTH.pack(len(message)) + message for message in messages)
    reading, writing = os.pipe()
    reader = FrameReader(reading)

    found = []
    for start in range(0, len(written), piece_bytes):
        os.write(writing, written[start : start + piece_bytes])
        while (message := reader.read_within(0.0)) is not None:
            found.append(message)
    os.close(reading)
    os.close(writing)

    assert found == messages


def test_a_reader_waits_no_longer_for_the_second_half_of_a_message(pipe: tuple[int, io.FileIO]) -> None:
    reading, writing = pipe
    writing.write(LENGTH.pack(10) + b"half")
    begun_s = time.monotonic()

    found = FrameReader(reading).read_within(0.1)

    assert found is None
    assert 0.1 <= time.monotonic() - begun_s < 2.0


def test_a_reader_tells_that_the_other_side_has_ended(pipe: tuple[int, io.FileIO]) -> None:
    reading, writing = pipe
    writing.write(LENGTH.pack(10) + b"half")
    writing.close()

    with pytest.raises(BrokenFrameError, match=r"^the other side has ended$"):
        FrameReader(reading).read_within(1.0)


@pytest.mark.parametrize(
    ("written", "told"),
    [
        (b"\0\0", "ended within the length of a message"),
        (LENGTH.pack(10) + b"half", "ended after 4 of 10 bytes of a message"),
        (LENGTH.pack(MOST_BYTES + 1), f"a message of {MOST_BYTES + 1} bytes; at most {MOST_BYTES} are sent"),
    ],
)
def test_what_is_no_message_is_told(written: bytes, told: str) -> None:
    with pytest.raises(BrokenFrameError, match=f"^{told}$"):
        read_frame(io.BytesIO(written))
