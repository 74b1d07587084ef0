"""The published values of Standard MIDI Files 1.0 (RP-001): both example files and the table of quantities."""

import hashlib

import pytest

from layout.read import Score, read_score
from layout.read.quantity import read_quantity
from tests.layout.read.hexdump import from_hexdump

# The format 0 example of the specification, read in a text that quotes it.
EXAMPLE_FORMAT_0 = from_hexdump("""
    4D546864 00000006 0000 0001 0060  # MThd, 6 bytes: format 0, one track, 96 ticks per quarter note
    4D54726B 0000003B                 # MTrk, 59 bytes
    00 FF5804 04021808                # time signature 4/4
    00 FF5103 07A120                  # tempo 500000 us per quarter note
    00 C005                           # channel 1, programme 5
    00 C12E                           # channel 2, programme 46
    00 C246                           # channel 3, programme 70
    00 923060                         # channel 3, note on 48, velocity 96
    00 3C60                           # running status: note on 60, velocity 96
    60 914340                         # tick 96: channel 2, note on 67, velocity 64
    60 904C20                         # tick 192: channel 1, note on 76, velocity 32
    8140 823040                       # tick 384: channel 3, note off 48
    00 3C40                           # running status: note off 60
    00 814340                         # channel 2, note off 67
    00 804C40                         # channel 1, note off 76
    00 FF2F00                         # end of track
""")

# The format 1 example. The notes are those of the same specification; the bytes are from memory, their
# chunk lengths counted.
EXAMPLE_FORMAT_1 = from_hexdump("""
    4D546864 00000006 0001 0004 0060  # MThd, 6 bytes: format 1, four tracks, 96 ticks per quarter note
    4D54726B 00000014                 # MTrk, 20 bytes
    00 FF5804 04021808                # time signature 4/4
    00 FF5103 07A120                  # tempo 500000 us per quarter note
    8300 FF2F00                       # tick 384: end of track
    4D54726B 00000010                 # MTrk, 16 bytes
    00 C005                           # channel 1, programme 5
    8140 904C20                       # tick 192: note on 76, velocity 32
    8140 4C00                         # tick 384: running status, velocity 0 ends it
    00 FF2F00                         # end of track
    4D54726B 0000000F                 # MTrk, 15 bytes
    00 C12E                           # channel 2, programme 46
    60 914340                         # tick 96: note on 67, velocity 64
    8220 4300                         # tick 384: running status, velocity 0 ends it
    00 FF2F00                         # end of track
    4D54726B 00000015                 # MTrk, 21 bytes
    00 C246                           # channel 3, programme 70
    00 923060                         # note on 48, velocity 96
    00 3C60                           # running status: note on 60, velocity 96
    8300 3000                         # tick 384: velocity 0 ends 48
    00 3C00                           # and 60
    00 FF2F00                         # end of track
""")


def notes_of(score: Score) -> list[tuple[float, float, int, int, int]]:
    """Onset, duration, pitch, velocity and channel of every note."""
    columns = (score.onset_s, score.duration_s, score.pitch, score.velocity, score.channel)
    return list(zip(*(column.tolist() for column in columns), strict=True))


def test_the_format_0_example_has_the_published_bytes() -> None:
    digest = hashlib.sha256(EXAMPLE_FORMAT_0).hexdigest()

    # Published length: 14 + 8 + 59 = 81 bytes; the digest is of that text's bytes.
    assert len(EXAMPLE_FORMAT_0) == 81
    assert digest == "9c512dc6fc73b8bef93a39c93142b7e828cfe51bf5340b84fe0fc87f0b8536ed"


@pytest.mark.parametrize("tune", [EXAMPLE_FORMAT_0, EXAMPLE_FORMAT_1], ids=["format 0", "format 1"])
def test_both_example_files_give_the_notes_the_specification_describes(tune: bytes) -> None:
    score = read_score(tune)

    # 96 ticks are a quarter note of 0.5 s: tick 96 = 0.5 s, 192 = 1.0 s, 384 = 2.0 s.
    assert notes_of(score) == [
        (0.0, 2.0, 48, 96, 3),
        (0.0, 2.0, 60, 96, 3),
        (0.5, 1.5, 67, 64, 2),
        (1.0, 1.0, 76, 32, 1),
    ]
    assert score.warnings == ()


# The specification's own table of variable-length quantities; the three rows marked M are from memory.
QUANTITIES = [
    (0x00000000, "00"),
    (0x00000040, "40"),
    (0x0000007F, "7F"),
    (0x00000080, "81 00"),
    (0x00002000, "C0 00"),
    (0x00003FFF, "FF 7F"),
    (0x00004000, "81 80 00"),  # M
    (0x00100000, "C0 80 00"),  # M
    (0x001FFFFF, "FF FF 7F"),
    (0x00200000, "81 80 80 00"),  # M
    (0x08000000, "C0 80 80 00"),
    (0x0FFFFFFF, "FF FF FF 7F"),  # the largest allowed
]


@pytest.mark.parametrize(("value", "written"), QUANTITIES, ids=[written for _, written in QUANTITIES])
def test_a_quantity_of_the_specifications_table_is_read(value: int, written: str) -> None:
    body = b"\xff" + bytes.fromhex(written) + b"\xff"

    read, after = read_quantity(body, 1, base=0)

    assert read == value
    assert after == len(body) - 1
