"""What was odd but readable, gathered into one sentence per kind.

A hostile file can hold the same oddity tens of thousands of times, so each kind is counted and
only its first place is kept.
"""

from enum import Enum

from layout.read.faults import counted


class Oddity(Enum):
    """A kind of oddity; its value is the pair of sentences for one case and for several."""

    FORMAT_0_WITH_TRACKS = (
        "The header says format 0, which has one track, but counts several: they are played together.",
        "",
    )
    TRACKS_MISSING = (
        "The header counts 1 track more than the file holds: notes may be missing.",
        "The header counts {count} tracks more than the file holds: notes may be missing.",
    )
    NO_END_OF_TRACK = (
        "1 track stops at byte {at} without an end-of-track event; its notes are kept.",
        "{count} tracks stop without an end-of-track event, the first at byte {at}; their notes are kept.",
    )
    AFTER_END_OF_TRACK = (
        "1 track has bytes after its end-of-track event, from byte {at}: they were ignored.",
        "{count} tracks have bytes after their end-of-track event, the first from byte {at}: they were ignored.",
    )
    LONG_TEMPO = (
        "The tempo event at byte {at} is longer than 3 bytes: what follows the third was ignored.",
        "{count} tempo events are longer than 3 bytes, the first at byte {at}: what follows the third was ignored.",
    )
    BAD_METRE = (
        "The time signature at byte {at} is cut short, or has a numerator of 0 or a denominator above 128: "
        "it was ignored.",
        "{count} time signatures, the first at byte {at}, are cut short, or have a numerator of 0 or a denominator "
        "above 128: they were ignored.",
    )
    NEVER_ENDED = (
        "1 note has no note-off (its note-on is at byte {at}): it lasts to the end of the sequence.",
        "{count} notes have no note-off (the first note-on is at byte {at}): they last to the end of the sequence.",
    )


class Oddities:
    """The oddities of one file, as they are met.

    Sentences of a kind are merged: the count grows and the first place stays.
    """

    def __init__(self) -> None:
        self._counts: dict[Oddity, int] = {}
        self._first_at: dict[Oddity, int] = {}
        self._sentences: list[tuple[int, str]] = []

    def meet(self, oddity: Oddity, *, at: int, count: int = 1) -> None:
        """Count an oddity that stands at a byte offset (or `count` of them, the first of them there)."""
        self._counts[oddity] = self._counts.get(oddity, 0) + count
        self._first_at[oddity] = min(at, self._first_at.get(oddity, at))

    def say(self, sentence: str, *, at: int) -> None:
        """Add a sentence of its own, met once a file at most, at a byte offset."""
        self._sentences.append((at, sentence))

    def say_ignored(self, ignored: bytes, *, at: int, after: str, remark: str = "") -> None:
        """Say that the bytes after something were ignored; nothing to say where there are none."""
        if ignored:
            size = counted(len(ignored), "byte", "bytes")
            self.say(f"{size} after {after}, from byte {at}, ignored{remark}.", at=at)

    def sentences(self) -> tuple[str, ...]:
        """One sentence per kind, in the order of the first places in the file; empty for a sound file."""
        placed = list(self._sentences)
        for oddity, count in self._counts.items():
            at = self._first_at[oddity]
            one, many = oddity.value
            placed.append((at, (one if count == 1 else many).format(count=count, at=at)))
        return tuple(sentence for _, sentence in sorted(placed))
