"""What a process and its computing child tell each other: JSON, which cannot run anything in whoever reads it.

Bytes of files stand behind it, one after the other, as long as it says.
"""

import json
import struct
from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, field, replace
from enum import StrEnum
from typing import Any

from layout.documents import Cutter, Movement, Settings
from layout.documents.movement import movement_from_values, values_of_movement
from layout.errors import LayoutError
from service.computing.errors_told import error_from_told, told_of_error

LENGTH = struct.Struct(">Q")


class Want(StrEnum):
    """What is asked of a child."""

    DISCS = "discs"  # the tune laid out, and what each disc tells
    TOLD = "told"  # what one disc tells, marked as not good to cut
    FILES = "files"  # the files of one disc


class Kind(StrEnum):
    """What an answer of a child is."""

    WARM = "warm"  # everything is imported; it waits to be asked
    DONE = "done"
    REFUSED = "refused"  # the computation raised an error of its own
    TOO_LARGE = "too large"  # it would take more memory than it may
    FAILED = "failed"  # the program itself is at fault


@dataclass(frozen=True, slots=True, kw_only=True)
class ChildSetup:
    """What a child is told once.

    Attributes:
        planner: The module of the computation, by its import path.
        memory_mib: MiB that one piece of work may take beyond what the child has.
    """

    planner: str
    memory_mib: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Work:
    """What is laid out.

    Attributes:
        tune: The MIDI file.
        movement: The movement.
        cutter: The cutter.
        settings: What the maker asks for.
        is_timed: Whether the settings' limit of time holds.
        most_s: Seconds that the search may take where the settings allow more; None for as long as these say.
    """

    tune: bytes
    movement: Movement
    cutter: Cutter
    settings: Settings
    is_timed: bool
    most_s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """What a child is asked.

    Attributes:
        want: What is wanted.
        work: Of what.
        name: Under which the child keeps the discs for a while, so as not to lay them out again; each work another.
        disc_number: Of which disc, from 1; of no meaning for Want.DISCS.
        not_good: The reason to have cutting files although an error-level finding stands, or None.
    """

    want: Want
    work: Work
    name: str
    disc_number: int = 1
    not_good: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class DiscTold:
    """A disc as a child tells of it.

    Attributes:
        title: Of the tune.
        fingerprint: Names the inputs.
        disc_number: From 1.
        disc_count: How many discs the tune is cut into.
        good_to_cut: Whether no error-level finding stands.
        stopped: What ended the search too early, or None.
        told: layout.json and report.json.
    """

    title: str
    fingerprint: str
    disc_number: int
    disc_count: int
    good_to_cut: bool
    stopped: str | None
    told: Mapping[str, bytes]


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What a child answers.

    Attributes:
        kind: What it is.
        discs: The discs laid out, in order; of Want.TOLD and Want.FILES the one asked for, where it had to be laid out.
        files: What was asked for of one disc.
        error: Why it was refused.
        trace: Where the program itself was at fault, for the log alone.
        resident_mib: MiB of memory that the child holds after it.
    """

    kind: Kind
    discs: tuple[DiscTold, ...] = ()
    files: Mapping[str, bytes] = field(default_factory=dict)
    error: LayoutError | None = None
    trace: str = ""
    resident_mib: float = 0.0


def setup_as_bytes(setup: ChildSetup) -> bytes:
    """A setup for a pipe."""
    return json.dumps(asdict(setup)).encode()


def setup_from_bytes(message: bytes) -> ChildSetup:
    """The setup that `setup_as_bytes` wrote."""
    return ChildSetup(**json.loads(message))


def asked_as_bytes(asked: Asked) -> bytes:
    """What is asked, for a pipe."""
    work = asked.work
    head = {
        "want": asked.want,
        "name": asked.name,
        "disc_number": asked.disc_number,
        "not_good": asked.not_good,
        "movement": values_of_movement(work.movement),
        "cutter": work.cutter.model_dump(mode="json"),
        "settings": work.settings.model_dump(mode="json"),
        "is_timed": work.is_timed,
        "most_s": work.most_s,
    }
    return _message(head, [work.tune])


def asked_from_bytes(message: bytes) -> Asked:
    """What `asked_as_bytes` wrote."""
    head, [tune] = _taken_apart(message)
    work = Work(
        tune=tune,
        movement=movement_from_values(head["movement"]),
        cutter=Cutter.model_validate(head["cutter"]),
        settings=Settings.model_validate(head["settings"]),
        is_timed=head["is_timed"],
        most_s=head["most_s"],
    )
    named = {name: head[name] for name in ("name", "disc_number", "not_good")}
    return Asked(want=Want(head["want"]), work=work, **named)


def answer_as_bytes(answer: Answer) -> bytes:
    """What is answered, for a pipe."""
    contents: list[bytes] = []

    def names(files: Mapping[str, bytes]) -> list[str]:
        contents.extend(files.values())
        return list(files)

    head = {
        "kind": answer.kind,
        "discs": [{**asdict(replace(disc, told={})), "told": names(disc.told)} for disc in answer.discs],
        "files": names(answer.files),
        "error": None if answer.error is None else told_of_error(answer.error),
        "trace": answer.trace,
        "resident_mib": answer.resident_mib,
    }
    return _message(head, contents)


def answer_from_bytes(message: bytes) -> Answer:
    """What `answer_as_bytes` wrote."""
    head, contents = _taken_apart(message)
    following = iter(contents)

    def files(names: Sequence[str]) -> dict[str, bytes]:
        return {name: next(following) for name in names}

    discs = tuple(DiscTold(**{**disc, "told": files(disc["told"])}) for disc in head["discs"])
    error = None if head["error"] is None else error_from_told(head["error"])
    told = {name: head[name] for name in ("trace", "resident_mib")}
    return Answer(kind=Kind(head["kind"]), discs=discs, files=files(head["files"]), error=error, **told)


def _message(head: dict[str, Any], contents: Sequence[bytes]) -> bytes:
    text = json.dumps({**head, "sizes": [len(content) for content in contents]}).encode()
    return b"".join([LENGTH.pack(len(text)), text, *contents])


def _taken_apart(message: bytes) -> tuple[dict[str, Any], list[bytes]]:
    [length] = LENGTH.unpack_from(message)
    at = LENGTH.size + length
    head: dict[str, Any] = json.loads(message[LENGTH.size : at])
    contents = []
    for size in head["sizes"]:
        contents.append(message[at : at + size])
        at += size
    return head, contents
