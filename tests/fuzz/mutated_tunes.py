"""MIDI files changed as damage and malice change them: a file and a die in, a file out.

One change out of the table is made, often on top of another. Nothing but the die decides, so a seed is an input.
"""

import random
from collections.abc import Callable

MOST_BYTES = 300_000  # joined files stop growing here
_WILD = (0x00, 0x01, 0x7F, 0x80, 0x81, 0x8F, 0x90, 0x99, 0xF0, 0xF7, 0xF8, 0xFF)
_LENGTHS = (0, 1, 6, 0x7F, 0x80, 0xFFFF, 0x7FFFFFFF, 0x80000000, 0xFFFFFFFF)
_QUANTITIES = (
    b"\x00",
    b"\x7f",
    b"\x81\x00",
    b"\xff\x7f",
    b"\xff\xff\x7f",
    b"\xff\xff\xff\x7f",
    b"\xff" * 5,
    b"\x80" * 4,
)
_EVENTS = (
    b"\x00\xff\x51\x03\x00\x00\x00",
    b"\x00\xff\x51\x03\x00\x00\x01",
    b"\x00\xff\x51\x03\xff\xff\xff",
    b"\x00\xff\x58\x04\x00\xff\x00\x00",
    b"\x00\xff\x58\x04\xff\x00\x01\x01",
    b"\x00\xff\x2f\x00",
    b"\x00\xff\x03\x04\xff\xfe\x00\x0a",
    b"\x00\xf0\x03\x01\x02\xf7",
    b"\x00\x90\x3c\x40",
    b"\x00\x90\x3c\x00",
    b"\x83\x60",
)


def mutated_tune(tune: bytes, dice: random.Random) -> bytes:
    """The file with one to four changes."""
    for _ in range(dice.choice((1, 1, 2, 4))):
        tune = dice.choice(CHANGES)(tune, dice)
    return tune[:MOST_BYTES]


def _place(tune: bytes, dice: random.Random) -> int:
    return dice.randrange(len(tune) + 1)


def _bits_flipped(tune: bytes, dice: random.Random) -> bytes:
    changed = bytearray(tune)
    for _ in range(dice.choice((1, 2, 8, 40)) if tune else 0):
        changed[dice.randrange(len(changed))] ^= 1 << dice.randrange(8)
    return bytes(changed)


def _bytes_set(tune: bytes, dice: random.Random) -> bytes:
    changed = bytearray(tune)
    for _ in range(dice.choice((1, 2, 8)) if tune else 0):
        changed[dice.randrange(len(changed))] = dice.choice(_WILD)
    return bytes(changed)


def _cut(tune: bytes, dice: random.Random) -> bytes:
    return tune[: _place(tune, dice)]


def _piece_away(tune: bytes, dice: random.Random) -> bytes:
    at = _place(tune, dice)
    return tune[:at] + tune[at + dice.choice((1, 2, 3, 4, 8, 100)) :]


def _piece_again(tune: bytes, dice: random.Random) -> bytes:
    at = _place(tune, dice)
    size = dice.choice((1, 2, 4, 30, 300))
    return tune[:at] + tune[at : at + size] * dice.choice((2, 3, 20)) + tune[at + size :]


def _joined(tune: bytes, dice: random.Random) -> bytes:
    at = _place(tune, dice)
    return (tune[:at] + tune[_place(tune, dice) :]) if dice.random() < 0.5 else tune + tune


def _length_changed(tune: bytes, dice: random.Random) -> bytes:
    """The length of a chunk, the header's among them."""
    chunks = chunks_at(tune)
    if not chunks:
        return tune
    at = dice.choice(chunks)
    length = int.from_bytes(tune[at + 4 : at + 8], "big")
    wrong = dice.choice((*_LENGTHS, max(length - 1, 0), length + 1, length * 2)) & 0xFFFFFFFF
    return tune[: at + 4] + wrong.to_bytes(4, "big") + tune[at + 8 :]


def _lengths_mended(tune: bytes, _: random.Random) -> bytes:
    """Every chunk's length set to reach the next, so that what was changed inside is read."""
    chunks = chunks_at(tune)
    if not chunks:
        return tune
    parts = [tune[: chunks[0]]]
    for at, end in zip(chunks, [*chunks[1:], len(tune)], strict=True):
        parts.append(tune[at : at + 4] + max(end - at - 8, 0).to_bytes(4, "big") + tune[at + 8 : end])
    return b"".join(parts)


def _header_field(tune: bytes, dice: random.Random) -> bytes:
    """Format, number of tracks or division."""
    at = 8 + 2 * dice.randrange(3)
    field = dice.choice((0, 1, 2, 3, 96, 480, 0x7FFF, 0x8000, 0xE728, 0xE250, 0xE300, 0xFFFF, dice.randrange(0x10000)))
    return tune[:at] + field.to_bytes(2, "big") + tune[at + 2 :]


def _tracks_swapped(tune: bytes, dice: random.Random) -> bytes:
    chunks = chunks_at(tune)
    if not chunks:
        return tune
    ends = [*chunks[1:], len(tune)]
    bodies = [tune[at:end] for at, end in zip(chunks, ends, strict=True)]
    head, tracks = bodies[:1], bodies[1:]
    dice.shuffle(tracks)
    return b"".join(head + tracks)


def _status_away(tune: bytes, dice: random.Random) -> bytes:
    """Running status broken: a status byte taken away, or one put where a data byte stands."""
    if not tune:
        return tune
    start = dice.randrange(len(tune))
    at = next((place for place in range(start, len(tune)) if tune[place] & 0x80), start)
    return tune[:at] + (b"" if dice.random() < 0.5 else bytes([dice.choice(_WILD)])) + tune[at + 1 :]


def _quantity_stretched(tune: bytes, dice: random.Random) -> bytes:
    """A variable-length number written longer, or a great one put in."""
    at = _place(tune, dice)
    longer = b"\x80" * dice.randrange(1, 5) + tune[at : at + 1]
    return tune[:at] + (longer if dice.random() < 0.5 else dice.choice(_QUANTITIES)) + tune[at + 1 :]


def _event_put_in(tune: bytes, dice: random.Random) -> bytes:
    at = _place(tune, dice)
    return tune[:at] + dice.choice(_EVENTS) * dice.choice((1, 1, 3, 200)) + tune[at:]


def _wrapped(tune: bytes, dice: random.Random) -> bytes:
    data = b"data" + len(tune).to_bytes(4, "little") + tune + b"\0" * (len(tune) % 2)
    size = (len(data) + 4 + dice.choice((0, 0, 0, 1, -1))) & 0xFFFFFFFF
    return b"RIFF" + size.to_bytes(4, "little") + b"RMID" + data


def chunks_at(tune: bytes) -> list[int]:
    """Where the names of chunks stand, whatever lengths say."""
    found = []
    for name in (b"MThd", b"MTrk"):
        at = tune.find(name)
        while at >= 0:
            found.append(at)
            at = tune.find(name, at + 1)
    return sorted(found)


CHANGES: tuple[Callable[[bytes, random.Random], bytes], ...] = (
    _bits_flipped,
    _bytes_set,
    _cut,
    _piece_away,
    _piece_again,
    _joined,
    _length_changed,
    _lengths_mended,
    _header_field,
    _tracks_swapped,
    _status_away,
    _quantity_stretched,
    _event_put_in,
    _wrapped,
)
