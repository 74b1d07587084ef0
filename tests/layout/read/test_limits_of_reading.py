"""The limits themselves, and files made to be slow or large within them.

A 2 MiB file is to be answered within about 2 s. Measured on two shared cores the slowest kind takes
0.9 s; the tests count processor time and allow 4 s, so that a busy or slow machine does not fail them.
"""

import time
import tracemalloc

import pytest

from layout.errors import MidiReadError
from layout.read import read_score
from layout.read.limits import LIMITS
from tests.layout.read.hexdump import chunk, midi_file

END = b"\x00\xff\x2f\x00"
ROOM = LIMITS.file_bytes - 14 - 8 - len(END)  # bytes: what one track may hold beside its end


def filled(unit: bytes, *, begin: bytes = b"", room: int = ROOM) -> bytes:
    """A track of one unit of bytes over and over, with its end."""
    return begin + unit * ((room - len(begin)) // len(unit)) + END


def test_the_limits_are_those_the_service_promises() -> None:
    assert LIMITS.file_bytes == 2 * 1024 * 1024
    assert LIMITS.notes == 50_000
    assert LIMITS.last_onset_s == 4 * 3600


def test_a_file_of_just_the_limit_is_read() -> None:
    tune = midi_file("00 90 3C 40 60 80 3C 40 00 FF 2F 00")
    padded = tune + b"\0" * (LIMITS.file_bytes - len(tune))

    score = read_score(padded)

    assert score.note_count == 1


def test_a_file_over_the_limit_is_refused_before_it_is_looked_at() -> None:
    tune = b"\xff" * (LIMITS.file_bytes + 1)

    with pytest.raises(MidiReadError, match="found a file of 2097153 bytes, expected at most 2097152 bytes") as error:
        read_score(tune)

    assert error.value.byte_offset == LIMITS.file_bytes


def test_as_many_notes_as_the_limit_are_read() -> None:
    tune = midi_file(b"\x00\x90\x3c\x40" + b"\x00\x3c\x40" * (LIMITS.notes - 1) + END)

    score = read_score(tune)

    assert score.note_count == LIMITS.notes


def test_a_hundred_thousand_notes_at_one_instant_are_refused_at_the_first_one_too_many() -> None:
    tune = midi_file(b"\x00\x90\x3c\x40" + b"\x00\x3c\x40" * 99_999 + END)

    with pytest.raises(
        MidiReadError, match=r"found note 50001, expected at most 50000 notes .*; cut the tune"
    ) as error:
        read_score(tune)

    # Note 2 has its first data byte at 22 + 4 + 1, note n 3 * (n - 2) bytes later.
    assert error.value.byte_offset == 27 + 3 * 49_999


def test_notes_are_counted_over_all_tracks() -> None:
    half = b"\x00\x90\x3c\x40" + b"\x00\x3c\x40" * 29_999 + END
    tune = midi_file(half, half, midi_format=1)

    with pytest.raises(MidiReadError, match="found note 50001"):
        read_score(tune)


def test_percussion_does_not_count_towards_the_limit() -> None:
    tune = midi_file(b"\x00\x99\x3c\x40" + b"\x00\x3c\x40" * 60_000 + END)

    score = read_score(tune)

    assert (score.note_count, score.percussion_count) == (0, 60_001)


# With one tick per quarter note this makes ticks seconds; 14400 = 112 * 128 + 64 is written F0 40.
SECONDS = "00 FF 51 03 0F4240"


def test_an_onset_at_four_hours_is_read() -> None:
    tune = midi_file(f"{SECONDS} F0 40 90 3C 40 00 80 3C 40 00 FF 2F 00", division=1)

    score = read_score(tune)

    assert score.onset_s.tolist() == [14_400.0]


def test_an_onset_after_four_hours_is_refused() -> None:
    tune = midi_file(f"{SECONDS} F0 41 90 3C 40 00 80 3C 40 00 FF 2F 00", division=1)

    with pytest.raises(MidiReadError, match=r"a note that begins after 14401 s, expected at most 14400 s") as error:
        read_score(tune)

    assert error.value.byte_offset == 22 + 7 + 2


def test_an_onset_the_least_tick_after_four_hours_is_refused() -> None:
    # 32767 ticks per quarter note of 1 s: 4 h and a tick are 14400 * 32767 + 1 ticks,
    # which is 268435455 (FFFFFF7F) and 203409346 (E0FF8F42).
    tune = midi_file(f"{SECONDS} FFFFFF7F FF 01 00 E0FF8F42 90 3C 40 00 FF 2F 00", division=32_767)
    assert 268_435_455 + 203_409_346 == 14_400 * 32_767 + 1

    with pytest.raises(MidiReadError, match="expected at most 14400 s"):
        read_score(tune)


def test_a_note_may_end_after_four_hours() -> None:
    tune = midi_file(f"{SECONDS} 00 90 3C 40 F0 41 80 3C 40 00 FF 2F 00", division=1)

    score = read_score(tune)

    assert score.duration_s.tolist() == [14_401.0]


def test_sixteen_million_ticks_may_be_far_too_long() -> None:
    tune = midi_file("FFFFFF7F 90 3C 40 00 FF 2F 00", division=1)

    with pytest.raises(MidiReadError, match="begins after 134217728 s"):  # 268435455 / 2, rounded half to even
        read_score(tune)


def every_note_off() -> bytes:
    """Note-offs that are all different, in running status."""
    pairs = b"".join(b"\x00" + bytes([pitch, velocity]) for pitch in range(128) for velocity in range(128))
    return b"".join(bytes([0, 0x80 | channel, 0, 0]) + pairs for channel in range(16))[:ROOM]


SLOW = {
    "programme changes in running status": midi_file(filled(b"\x00\x01", begin=b"\x00\xc0\x00")),
    "empty text events": midi_file(filled(b"\x00\xff\x01\x00")),
    "titles of nothing": midi_file(filled(b"\x00\xff\x03\x01\x01")),
    "empty system exclusive": midi_file(filled(b"\x00\xf0\x00")),
    "tempo changes": midi_file(filled(b"\x01\xff\x51\x03\x07\xa1\x20")),
    "long delta times": midi_file(filled(b"\xff\xff\xff\x7f\xb0\x01\x01")),
    "note-offs of nothing": midi_file(filled(b"\x00\x01\x01", begin=b"\x00\x80\x00\x00")),
    "note-offs all different": midi_file(every_note_off()[: ROOM - ROOM % 3]),
    "percussion": midi_file(filled(b"\x00\x24\x40", begin=b"\x00\x99\x24\x40")),
    "one pitch fifty thousand times, ended elsewhere": midi_file(
        b"\x00\x90\x3c\x40" + b"\x00\x3c\x40" * 49_999 + END,
        filled(b"\x01\x3c\x00", begin=b"\x01\x90\x3c\x00", room=ROOM - 150_100),
        midi_format=1,
    ),
    "empty tracks": midi_file(*[b""] * 65_535, midi_format=1),
    "tracks claimed": midi_file(END, midi_format=1, count=65_535),
    "empty unknown chunks": midi_file(midi_format=1, count=1) + chunk(b"abcd", b"") * ((LIMITS.file_bytes - 14) // 8),
    "a track of FF": midi_file(b"\xff" * ROOM),
}


def answer(tune: bytes) -> str:
    """What reading gives: notes or the error."""
    try:
        return f"{read_score(tune).note_count} notes"
    except MidiReadError as error:
        return str(error)


@pytest.mark.parametrize("kind", list(SLOW))
def test_a_file_made_to_be_slow_is_answered_soon(kind: str) -> None:
    tune = SLOW[kind]
    assert len(tune) <= LIMITS.file_bytes

    begin_s = time.process_time()
    answered = answer(tune)
    took_s = time.process_time() - begin_s

    assert answered
    assert took_s < 4


def test_a_file_made_to_be_large_stays_in_bounded_memory() -> None:
    tune = SLOW["tempo changes"]  # the largest of them in memory

    tracemalloc.start()
    answered = answer(tune)
    peak_mb = tracemalloc.get_traced_memory()[1] / 1e6
    tracemalloc.stop()

    # Measured: 85 MB for 300,000 tempo changes.
    assert answered
    assert peak_mb < 128
