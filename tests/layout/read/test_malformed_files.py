"""Files that cannot be read: each gives one error that names the place, what stands there and what may."""

from typing import NamedTuple

import pytest

from layout.errors import MidiReadError
from layout.read import read_score
from tests.layout.read.hexdump import chunk, from_hexdump, midi_file, riff

END = "00 FF 2F 00"
GOOD = midi_file(f"00 90 3C 40 60 80 3C 40 {END}")  # 34 bytes; its one track begins at byte 22


class Malformed(NamedTuple):
    """A file, and the error it must give."""

    name: str
    tune: bytes
    message: str
    byte_offset: int


def header(text: str) -> bytes:
    """A file of one sound track after the header chunk given as a hexdump."""
    return from_hexdump(text) + chunk(b"MTrk", from_hexdump(END))


def data(tune: bytes) -> bytes:
    """A RIFF data chunk."""
    return chunk(b"data", tune, byteorder="little")


MALFORMED = [
    # The file and its header chunk
    Malformed("empty file", b"", 'found an empty file, expected the header chunk "MThd"', 0),
    Malformed("text file", b"Hello, world\n", r'found 48 65 6C 6C \("Hell"\), expected the header chunk "MThd"', 0),
    Malformed("one byte", b"M", r'found 4D \("M"\), expected the header chunk', 0),
    Malformed("track chunk first", GOOD[14:], r'found .*\("MTrk"\), expected the header chunk "MThd"', 0),
    Malformed("header cut in its length", GOOD[:6], r"found only 4D 54 68 64 00 00 before the end of the file", 0),
    Malformed("header cut in its fields", GOOD[:11], 'a chunk "MThd" of 6 bytes, expected at most the 3 bytes', 4),
    Malformed(
        "header of 4 bytes",
        header("4D546864 00000004  0000 0001  # no division"),
        "found a header of 4 bytes, expected at least 6 bytes",
        4,
    ),
    Malformed(
        "format 3",
        header("4D546864 00000006  0003 0001 0060"),
        "found format 3, expected format 0, 1 or 2; export the tune as",
        8,
    ),
    Malformed(
        "no track counted",
        header("4D546864 00000006  0001 0000 0060"),
        "found a track count of 0, expected at least 1 track",
        10,
    ),
    Malformed(
        "division 0",
        header("4D546864 00000006  0000 0001 0000"),
        "found a division of 0, expected at least 1 tick per quarter note",
        12,
    ),
    Malformed(
        "unknown frame code",
        header("4D546864 00000006  0000 0001 E628  # -26 frames a second"),
        "found a division with the frame code -26, expected a frame code of -24, -25, -29 or -30",
        12,
    ),
    Malformed(
        "no ticks per frame",
        header("4D546864 00000006  0000 0001 E700  # -25 frames a second of 0 ticks"),
        "found a division of 0 ticks per frame, expected at least 1 tick per frame",
        13,
    ),
    # Chunks
    Malformed("no chunk after the header", GOOD[:14], 'the end of the file, expected a track chunk "MTrk"', 14),
    Malformed(
        "unknown chunks and no track",
        GOOD[:14] + chunk(b"XFIH", b"abcd"),
        'found the end of the file, expected a track chunk "MTrk"; the file holds no track',
        26,
    ),
    Malformed("chunk head cut short", GOOD[:18], "found only 4D 54 72 6B .* expected a chunk type and a chunk", 14),
    Malformed("track cut short", GOOD[:-5], 'a chunk "MTrk" of 12 bytes, expected at most the 7 bytes', 18),
    Malformed(
        "unknown chunk past the end",
        GOOD[:14] + from_hexdump("58464948 7FFFFFFF 00  # XFIH, 2147483647 bytes"),
        'a chunk "XFIH" of 2147483647 bytes, expected at most the 1 bytes that are left',
        18,
    ),
    Malformed("track of a byte too many", GOOD[:-1], 'a chunk "MTrk" of 12 bytes, expected at most the 11 bytes', 18),
    Malformed(
        "no chunk between the tracks",
        midi_file(END, midi_format=1, count=2) + from_hexdump("00 FF 2F 00 4D 54 72 6B  # track length too short"),
        "found 00 FF 2F 00, expected a chunk type of four characters",
        26,
    ),
    # The RIFF wrapper
    Malformed("wrapper cut short", riff(data(GOOD))[:-4], 'a chunk "RIFF" of 46 bytes, expected at most the 42', 4),
    Malformed("sound in a wrapper", riff(data(GOOD), form=b"WAVE"), r'form 57 41 56 45 \("WAVE"\), expected', 8),
    Malformed("wrapper without a form", riff(form=b""), "a RIFF file of the form the end of the file", 8),
    Malformed("wrapper without data", riff(), 'the end of the RIFF wrapper, expected its chunk "data"', 12),
    Malformed("wrapper in a wrapper", riff(data(riff(data(GOOD)))), "a RIFF wrapper inside a RIFF wrapper", 20),
    Malformed("wrapper beside data", riff(riff(data(GOOD))), "a RIFF wrapper inside a RIFF wrapper", 12),
    Malformed("data past its wrapper", riff(data(GOOD)[:-4]), 'a chunk "data" of 34 bytes, expected at most', 16),
    Malformed("wrapper round no MIDI file", riff(data(b"abcd")), r'found 61 62 63 64 \("abcd"\), expected', 20),
    Malformed("wrapper round nothing", riff(data(b"")), "found the end of the file, expected the header chunk", 20),
    # Delta times and lengths
    Malformed(
        "delta time of five bytes",
        midi_file(f"81 80 80 80 00 90 3C 40 {END}"),
        "found 81 80 80 80, which does not end .* expected a variable-length quantity of at most 4 bytes",
        22,
    ),
    Malformed(
        "delta time cut short",
        midi_file("00 90 3C 40 81"),
        "found the end of the track, expected the rest of the variable-length quantity that begins at byte 26",
        27,
    ),
    Malformed(
        "delta time and no event",
        midi_file("00 90 3C 40 60"),
        "found the end of the track, expected an event after the delta time",
        27,
    ),
    Malformed(
        "length of five bytes",
        midi_file(f"00 FF 01 FF FF FF FF 7F {END}"),
        "found FF FF FF FF, which does not end .* expected a variable-length quantity",
        25,
    ),
    Malformed(
        "length cut short",
        midi_file("00 F0 81"),
        "found the end of the track, expected the rest of the variable-length quantity that begins at byte 24",
        25,
    ),
    Malformed(
        "length left out",
        midi_file("00 F0"),
        "found the end of the track, expected the rest of the variable-length quantity that begins at byte 24",
        24,
    ),
    # Channel messages
    Malformed(
        "note-on cut short",
        midi_file("00 90 3C"),
        "found the end of the track, expected 2 data bytes of note_on at byte 24",
        25,
    ),
    Malformed(
        "programme change cut short",
        midi_file("00 C0"),
        "found the end of the track, expected 1 data bytes of program_change at byte 24",
        24,
    ),
    Malformed(
        "status byte for a pitch",
        midi_file(f"00 90 90 40 {END}"),
        r"found 90, expected data byte 1 of 2 of note_on \(status 90\), 00 to 7F",
        24,
    ),
    Malformed(
        "velocity above 127",
        midi_file(f"00 93 3C 80 {END}"),
        r"found 80, expected data byte 2 of 2 of note_on \(status 93\), 00 to 7F",
        25,
    ),
    Malformed(
        "controller value above 127",
        midi_file(f"00 B0 07 FF {END}"),
        "found FF, expected data byte 2 of 2 of control_change",
        25,
    ),
    Malformed(
        "running status from the start",
        midi_file(f"00 3C 40 {END}"),
        "found data byte 3C with no status in force, expected a status byte, 80 or above",
        23,
    ),
    Malformed(
        "running status after a meta event",
        midi_file(f"00 90 3C 40 00 FF 01 00 60 3C 00 {END}"),
        r"found data byte 3C with no status in force, .*meta events end running status\)",
        31,
    ),
    Malformed(
        "running status after system exclusive",
        midi_file(f"00 90 3C 40 00 F0 01 F7 60 3C 00 {END}"),
        "found data byte 3C with no status in force",
        31,
    ),
    Malformed(
        "running status from the track before",
        midi_file(f"00 90 3C 40 {END}", f"00 3C 00 {END}", midi_format=1),
        "found data byte 3C with no status in force",
        22 + 8 + 8 + 1,
    ),
    # System messages of live MIDI
    *(
        Malformed(
            f"status byte {status:02X}",
            midi_file(f"00 {status:02X} 00 00 {END}"),
            f"found status byte {status:02X}, a system message of live MIDI, expected a channel message 80 to EF",
            23,
        )
        for status in (0xF1, 0xF2, 0xF3, 0xF4, 0xF5, 0xF6, 0xF8, 0xF9, 0xFA, 0xFB, 0xFC, 0xFD, 0xFE)
    ),
    # System exclusive and meta events
    Malformed(
        "system exclusive past the end",
        midi_file(f"00 F0 20 7E 7F {END}"),
        "found an event of 32 bytes, expected at most the 6 bytes left in the track",
        24,
    ),
    Malformed(
        "system exclusive of a byte too many",
        midi_file("00 F0 03 7E F7"),
        "found an event of 3 bytes, expected at most the 2 bytes left in the track",
        24,
    ),
    Malformed(
        "text past the end",
        midi_file(f"00 FF 01 FF FF FF 7F {END}"),
        "found an event of 268435455 bytes, expected at most the 4 bytes left in the track",
        25,
    ),
    Malformed(
        "meta event without a type",
        midi_file("00 FF"),
        "found the end of the track, expected the type of the meta event",
        24,
    ),
    Malformed(
        "meta type above 7F",
        midi_file(f"00 FF 85 00 {END}"),
        "found meta event type 85, expected a type from 00 to 7F",
        24,
    ),
    Malformed(
        "tempo of two bytes",
        midi_file(f"00 FF 51 02 07 A1 {END}"),
        "found a tempo event of 2 bytes, expected 3 bytes, microseconds per quarter note",
        25,
    ),
    Malformed(
        "tempo 0",
        midi_file(f"00 FF 51 03 000000 {END}"),
        "found a tempo of 0 microseconds per quarter note, expected at least 1",
        26,
    ),
    # Nothing but the same byte
    Malformed("all FF", b"\xff" * 4096, "found FF FF FF FF, expected the header chunk", 0),
    Malformed("a track of FF", midi_file(b"\xff" * 4096), "found FF FF FF FF, which does not end", 22),
    Malformed("a track of 80", midi_file(b"\x80" * 4096), "found 80 80 80 80, which does not end", 22),
    Malformed("a track of 00", midi_file(b"\x00" * 4096), "found data byte 00 with no status in force", 23),
]


@pytest.mark.parametrize("malformed", MALFORMED, ids=[malformed.name for malformed in MALFORMED])
def test_a_malformed_file_is_answered_with_place_finding_and_remedy(malformed: Malformed) -> None:
    with pytest.raises(MidiReadError, match=malformed.message) as error:
        read_score(malformed.tune)

    assert error.value.byte_offset == malformed.byte_offset
    assert str(error.value).startswith(f"tune, byte {malformed.byte_offset}: found ")
    assert error.value.remedy


def test_the_sound_file_the_table_is_cut_from_can_be_read() -> None:
    score = read_score(GOOD)

    assert score.pitch.tolist() == [60]
    assert score.warnings == ()


@pytest.mark.parametrize("length", range(len(GOOD)))
def test_a_file_cut_at_any_byte_is_an_error(length: int) -> None:
    with pytest.raises(MidiReadError, match="expected"):
        read_score(GOOD[:length])
