"""Tunes made to be slow or large: what the longest file allowed holds most of, or what a loop could stumble over.

The longest tune that is read is 2 MiB; files past it are here as well, since they must be refused without being read.
"""

from collections.abc import Callable
from functools import partial

from layout.read.limits import LIMITS
from tests.layout.read.hexdump import chunk, midi_file

_END = b"\x00\xff\x2f\x00"
_NOTE = b"\x00\x90\x3c\x40"
_FULL = LIMITS.file_bytes - 40  # bytes of one track that fills a file


def quantity(number: int) -> bytes:
    """A variable-length quantity (Standard MIDI File 1.0)."""
    groups = [number & 0x7F]
    while number := number >> 7:
        groups.append(number & 0x7F | 0x80)
    return bytes(reversed(groups))


def _filled(event: bytes, *, before: bytes = b"", after: bytes = b"", division: int = 96) -> bytes:
    """A file as long as may be of one event."""
    often = (_FULL - len(before) - len(after) - len(_END)) // len(event)
    return midi_file(before + event * often + after + _END, division=division)


def _notes_at_one_instant(count: int) -> bytes:
    return midi_file(_NOTE + b"\x00\x3c\x40" * (count - 1) + _END)


def _every_key_at_one_instant(count: int) -> bytes:
    """Notes over all keys of fifteen channels, the percussion channel left out."""
    channels = [channel for channel in range(16) if channel != 9]
    events = (bytes([0, 0x90 | channels[n % 15], n // 15 % 128, 1 + n % 127]) for n in range(count))
    return midi_file(b"".join(events) + _END)


def _tempi(count: int) -> bytes:
    events = (b"\x01\xff\x51\x03" + (1 + n * 57 % 0xFFFFFF).to_bytes(3, "big") for n in range(count))
    return midi_file(b"".join(events) + _NOTE + _END, division=0x7FFF)


def _ended_backwards(count: int) -> bytes:
    """Notes of every key begun one after the other, then ended from the last on."""
    on = b"".join(bytes([0, 0x90, n % 128, 64]) for n in range(count))
    off = b"".join(bytes([0, 0x80, n % 128, 0]) for n in reversed(range(count)))
    return midi_file(on + off + _END)


_LATE = quantity(16_000_000) + b"\x90\x3c\x40"
_LATEST = quantity(0x0FFFFFFF) + b"\x90\x3c\x40"
_QUICKEST = b"\x00\xff\x51\x03\x00\x00\x01"
_SLOWEST = b"\x00\xff\x51\x03\xff\xff\xff"

SLOW_TUNES: dict[str, Callable[[], bytes]] = {
    "a million empty texts": lambda: midi_file(b"\x00\xff\x01\x00" * 1_000_000 + _END),
    "empty texts, as many as go in": lambda: _filled(b"\x00\xff\x01\x00"),
    "megabytes of FF": lambda: b"\xff" * LIMITS.file_bytes,
    "ten megabytes of FF": lambda: b"\xff" * 10_000_000,
    "a track of FF": lambda: midi_file(b"\xff" * _FULL),
    "a track of 80": lambda: midi_file(b"\x80" * _FULL),
    "a track of 00": lambda: midi_file(bytes(_FULL)),
    "100,000 notes at one instant": lambda: _notes_at_one_instant(100_000),
    "50,000 notes at one instant": lambda: _notes_at_one_instant(50_000),
    "50,000 notes of every key at one instant": lambda: _every_key_at_one_instant(50_000),
    "notes ended backwards": lambda: _ended_backwards(50_000),
    "notes never ended": lambda: midi_file(b"\x00\x90\x3c\x40" * 50_000 + _END),
    "deltas of 16 million ticks": lambda: midi_file(_LATE * 40_000 + _END, division=1),
    "the longest deltas": lambda: midi_file(_LATEST * 40_000 + _END, division=0x7FFF),
    "a delta too long": lambda: midi_file(b"\x81\x80\x80\x80\x00" + _NOTE[1:] + _END),
    "a length too long": lambda: midi_file(b"\x00\xff\x01" + quantity(0x0FFFFFFF) + _END),
    "division 0": lambda: midi_file(_NOTE + _END, division=0),
    **{
        f"SMPTE division {field:04X}": partial(midi_file, _NOTE + _LATEST + _END, division=field)
        for field in (0x8000, 0x80FF, 0xE200, 0xE201, 0xE2FF, 0xE301, 0xE728, 0xE8FF, 0xFF01, 0xFFFF)
    },
    "65,535 tracks claimed": lambda: midi_file(_NOTE + _END, midi_format=1, count=65_535),
    "65,535 tracks": lambda: midi_file(*[_END] * 65_535, midi_format=1),
    "65,535 tracks without a byte": lambda: midi_file(*[b""] * 65_535, midi_format=1),
    "65,535 sequences": lambda: midi_file(*[_END] * 65_535, midi_format=2),
    "unknown chunks": lambda: midi_file(_END, midi_format=1, count=2) + chunk(b"XXXX", b"") * 250_000,
    "tempi of 0": lambda: _filled(b"\x00\xff\x51\x03\x00\x00\x00"),
    "tempi of FFFFFF": lambda: _filled(_SLOWEST, after=_NOTE),
    "tempi of FFFFFF, each a tick": lambda: _filled(b"\x01" + _SLOWEST[1:], after=_NOTE, division=0x7FFF),
    "no tempo like another": lambda: _tempi(200_000),
    "running status to the end": lambda: _filled(b"\x00\x3c\x00", before=_NOTE),
    "percussion to the end": lambda: _filled(b"\x00\x3c\x40", before=b"\x00\x99\x3c\x40"),
    "bends to the end": lambda: _filled(b"\x00\x00\x40", before=b"\x00\xe0\x00\x40"),
    "system exclusive without an end": lambda: midi_file(b"\x00\xf0" + quantity(_FULL) + bytes(_FULL - 100)),
    "system exclusive in pieces": lambda: _filled(b"\x00\xf7\x00", before=b"\x00\xf0\x00"),
    "metres to the end": lambda: _filled(b"\x01\xff\x58\x04\x01\x07\x01\x01", before=_QUICKEST, after=_NOTE),
    "the shortest beats for four hours": lambda: midi_file(
        b"\x00\xff\x58\x04\x01\x07\x01\x01" + _QUICKEST + _LATEST + _END, division=1
    ),
    "metres that are none": lambda: _filled(b"\x01\xff\x58\x04\x00\x07\x01\x01", after=_NOTE),
    "names to the end": lambda: _filled(b"\x00\xff\x03\x00"),
    "a name of two megabytes": lambda: midi_file(b"\x00\xff\x03" + quantity(2_000_000) + b"\xc3" * 2_000_000 + _END),
    "a name of line ends": lambda: midi_file(b"\x00\xff\x03" + quantity(2_000_000) + b"\x1b[\n " * 500_000 + _END),
}

# Whose notes are so many at so many moments that the search goes on until its budget of nodes is spent.
LONG_SEARCHES: dict[str, Callable[[], bytes]] = {
    "40,000 notes of a key within 20 s": lambda: midi_file(_QUICKEST + _LATE * 40_000 + _END, division=0x7FFF),
    "50,000 notes of every key within 3 s": lambda: midi_file(
        b"".join(
            b"\x01\xff\x51\x03" + (1 + n * 57 % 0xFFFFFF).to_bytes(3, "big") + bytes([0, 0x90, 40 + n % 60, 64])
            for n in range(49_999)
        )
        + _END,
        division=0x7FFF,
    ),
}
