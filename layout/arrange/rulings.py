"""The maker's rulings, checked against each other, the tune and the movement.

What is asked against one another here does not depend on transposition; what does is told by
layout.arrange.refusals.
"""

from collections.abc import Mapping
from dataclasses import dataclass

from layout.arrange.arrangement import LeftOutReason
from layout.arrange.comb import Comb
from layout.documents.settings import Ruling
from layout.errors import Problem, RulingError
from layout.read.score import Score

_OUT_BECAUSE: dict[LeftOutReason, str] = {
    "outside-passage": "lies outside the passage; widen the passage or drop the ruling",
    "ruled-out": "is on a channel that /channels/leave_out leaves out; keep the channel or drop the ruling",
    "past-the-turn": "is asked for after the free part of the turn; play faster, start later or drop the ruling",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Forced:
    """A note that a ruling wants on the disc.

    Attributes:
        ruling: Place of the ruling in the settings, from 0.
        note: The note's index.
        track: The track it is put on, from 0; None where any will do.
    """

    ruling: int
    note: int
    track: int | None

    @property
    def pointer(self) -> str:
        """JSON pointer of the ruling in the settings."""
        return f"/rulings/{self.ruling}"

    def __str__(self) -> str:
        on_track = "" if self.track is None else f" on track {self.track + 1}"
        return f"note {self.note}{on_track} ({self.pointer})"


@dataclass(frozen=True, slots=True, kw_only=True)
class Rulings:
    """Rulings that agree with each other.

    Attributes:
        left_out: Notes to leave out.
        forced: Notes that must sound, by index; the ruling that says most where two agree.
    """

    left_out: frozenset[int]
    forced: Mapping[int, Forced]

    def of_pluck(self, notes: tuple[int, ...]) -> Forced | None:
        """What forces a pluck that plays these notes, the ruling that says most; None where nothing does.

        Raises:
            RulingError: Two rulings put the pluck on different tracks.
        """
        forced = [self.forced[note] for note in notes if note in self.forced]
        placed = [one for one in forced if one.track is not None]
        for other in placed[1:]:
            if other.track != placed[0].track:
                first, second = sorted((placed[0], other), key=lambda one: one.ruling)
                message = (
                    f"{second} and {first} have one pitch at one onset and so are one pluck; "
                    "put both on one track, or leave one note out"
                )
                raise ruling_error([Problem(pointer=second.pointer, message=message)])
        return next(iter(placed or forced), None)


def ruling_error(problems: list[Problem]) -> RulingError:
    """The error for these problems, in the order of the document."""
    ordered = sorted(problems, key=lambda problem: int(problem.pointer.rpartition("/")[2]))
    return RulingError(document="settings", problems=tuple(ordered))


def read_rulings(rulings: tuple[Ruling, ...], score: Score, comb: Comb) -> Rulings:
    """The rulings, checked against each other and against what exists.

    Raises:
        RulingError: A note or track that does not exist, a track without a usable tooth, or two
            rulings for one note that disagree; names every fault found.
    """
    problems: list[Problem] = []
    first: dict[int, tuple[int, Ruling]] = {}
    forced: dict[int, Forced] = {}
    for place, ruling in enumerate(rulings):
        message = _not_there(ruling, score, comb)
        before = first.setdefault(ruling.note, (place, ruling))
        if message is None and _disagree(before[1], ruling):
            message = (
                f"note {ruling.note}: {_said(ruling)!r} here and {_said(before[1])!r} in /rulings/{before[0]} "
                "disagree; keep one of them"
            )
        if message is not None:
            problems.append(Problem(pointer=f"/rulings/{place}", message=message))
        elif ruling.do != "leave-out" and (ruling.track is not None or ruling.note not in forced):
            track = None if ruling.track is None else ruling.track - 1
            forced[ruling.note] = Forced(ruling=place, note=ruling.note, track=track)
            if ruling.track is not None:
                first[ruling.note] = (place, ruling)
    if problems:
        raise ruling_error(problems)
    left_out = frozenset(ruling.note for ruling in rulings if ruling.do == "leave-out")
    return Rulings(left_out=left_out, forced=forced)


def check_in_time(rulings: Rulings, out: Mapping[int, LeftOutReason]) -> None:
    """Refuse rulings that want a note that passage, channels or the length of the turn leave out.

    Raises:
        RulingError: Names every such ruling.
    """
    problems = [
        Problem(pointer=forced.pointer, message=f"note {note} must sound, but {_OUT_BECAUSE[out[note]]}")
        for note, forced in rulings.forced.items()
        if note in out
    ]
    if problems:
        raise ruling_error(problems)


def _not_there(ruling: Ruling, score: Score, comb: Comb) -> str | None:
    if ruling.note >= score.note_count:
        known = f"notes 0 to {score.note_count - 1}" if score.note_count else "no notes"
        return f"there is no note {ruling.note}; the tune has {known}"
    if ruling.track is None:
        return None
    if ruling.track > comb.track_count:
        return f"there is no track {ruling.track}; the movement has tracks 1 to {comb.track_count}"
    if ruling.track - 1 not in comb.key_of_track:
        return f"track {ruling.track} has no usable tooth; choose another track or drop the ruling"
    return None


def _disagree(one: Ruling, two: Ruling) -> bool:
    if (one.do == "leave-out") != (two.do == "leave-out"):
        return True
    return one.track is not None and two.track is not None and one.track != two.track


def _said(ruling: Ruling) -> str:
    return ruling.do if ruling.track is None else f"{ruling.do} on track {ruling.track}"
