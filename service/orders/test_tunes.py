"""Tunes that lead an order to a state of one's choice, so that a client can be tried against every one of them.

Most do so by what they are. Three cannot: for those a worker's child looks here what to do, for orders of test keys
alone. Ordered with any other key they are tunes like all others.
"""

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from functools import cache

from service.orders.states import State

TICKS = 480  # to a beat, which takes half a second where a file says nothing (Standard MIDI Files 1.0)
LOUDNESS = 90
SLOW_S = 5.0
REFUSAL = "this tune is refused because it was ordered with a test key; order another"


class Deed(StrEnum):
    """What a child does with the order of a test key before it plans it."""

    NOTHING = "nothing"
    REFUSE = "refuse"
    WAIT = "wait"  # for SLOW_S
    DIE = "die"  # each time, so that its attempts are used up


@dataclass(frozen=True, slots=True, kw_only=True)
class StateTune:
    """A tune, and where it leads.

    Attributes:
        name: Of its file, without the ending.
        state: Where an order of a test key for any shipped movement ends.
        meaning: How it comes to that.
        content: The MIDI file.
        deed: What is done for it beside planning.
        needs_release_alone: Whether the order must ask for release_alone.
    """

    name: str
    state: State
    meaning: str
    content: bytes
    deed: Deed = Deed.NOTHING
    needs_release_alone: bool = False


@cache
def state_tunes() -> tuple[StateTune, ...]:
    """All of them."""
    four = (72, 76, 79, 84)
    return (
        StateTune(
            name="ready",
            state=State.READY,
            meaning="four notes that every shipped movement has: nothing stands, and it waits for release",
            content=_tune("Test: ready", four),
        ),
        StateTune(
            name="released",
            state=State.RELEASED,
            meaning="the same, to be ordered with release_alone: it is released without a person",
            content=_tune("Test: released", four),
            needs_release_alone=True,
        ),
        StateTune(
            name="attention-finding",
            state=State.ATTENTION,
            meaning="five minutes of music, longer than any shipped movement turns: an error-level finding stands",
            content=_tune("Test: attention by a finding", (72, 76) * 300),
        ),
        StateTune(
            name="attention-loss",
            state=State.ATTENTION,
            meaning="every note of six octaves, of which no comb has all: good to cut, but a third or more is lost",
            content=_tune("Test: attention by loss", range(36, 108)),
        ),
        StateTune(
            name="failed",
            state=State.FAILED,
            meaning="refused by planning, as a tune is that no disc can be made of",
            content=_tune("Test: failed", four),
            deed=Deed.REFUSE,
        ),
        StateTune(
            name="slow",
            state=State.READY,
            meaning=f"as ready, but stays in planning for {SLOW_S:g} s: time to cancel it, or to wait by Prefer",
            content=_tune("Test: slow", four),
            deed=Deed.WAIT,
        ),
        StateTune(
            name="killed",
            state=State.FAILED,
            meaning="ends the process that plans it, each time: failed once its attempts are used up",
            content=_tune("Test: killed", four),
            deed=Deed.DIE,
        ),
    )


@cache
def _deeds() -> dict[str, Deed]:
    return {hashlib.sha256(tune.content).hexdigest(): tune.deed for tune in state_tunes()}


def deed_of(tune_digest: str) -> Deed:
    """What is done with the order of a test key.

    Args:
        tune_digest: SHA-256 of its tune, in hex digits.
    """
    return _deeds().get(tune_digest, Deed.NOTHING)


def _tune(title: str, notes: Sequence[int]) -> bytes:
    """A MIDI file of notes one after the other, each a beat long (Standard MIDI Files 1.0, format 0)."""
    name = title.encode("ascii")
    track = b"\x00\xff\x03" + bytes([len(name)]) + name
    beat = bytes([0x80 | TICKS >> 7, TICKS & 0x7F])  # a quantity of variable length
    for note in notes:
        track += b"\x00\x90" + bytes([note, LOUDNESS]) + beat + b"\x80" + bytes([note, 0])
    track += b"\x00\xff\x2f\x00"
    head = b"MThd" + (6).to_bytes(4) + (0).to_bytes(2) + (1).to_bytes(2) + TICKS.to_bytes(2)
    return head + b"MTrk" + len(track).to_bytes(4) + track
