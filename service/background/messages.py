"""What a worker and its child tell each other: JSON, which cannot run anything in whoever reads it."""

import json
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from enum import StrEnum

from service.orders.planned import PlannedOrder, planned_as_json, planned_from_json


class Kind(StrEnum):
    """What an answer of a child is."""

    WARM = "warm"  # everything is imported; it waits for an order
    PLANNED = "planned"
    REFUSED = "refused"  # the order cannot be planned, today or tomorrow
    AWAY = "away"  # the store of files does not answer or is full; the same order can be planned later


@dataclass(frozen=True, slots=True, kw_only=True)
class ChildSetup:
    """What a child is told once.

    Attributes:
        database_url: The database, where files are noted before they are kept.
        files_url: The store of files.
        planner: The module of the computation, by its import path.
        memory_mib: MiB that planning one order may take beyond what the warm child has.
        parent_pid: The process that must live for the child to live.
    """

    database_url: str
    files_url: str
    planner: str
    memory_mib: int
    parent_pid: int


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanRequest:
    """An order to plan, by the digests of its inputs.

    Attributes:
        order_id: For the log.
        tune: Of the MIDI file.
        movement: Of the movement document.
        cutter: Of the cutter document.
        settings: Of the settings document.
        not_good: The reason for cutting files despite findings; None: kept back.
        is_test: Whether it is a test key's: some tunes are then more than they are, see `service.orders.test_tunes`.
    """

    order_id: str
    tune: str
    movement: str
    cutter: str
    settings: str
    not_good: str | None
    is_test: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class ChildAnswer:
    """What a child answers.

    Attributes:
        kind: What it is.
        planned: The plan, where there is one.
        reason: Why there is none, in one line fit to show.
        trace: Where the program itself was at fault, for the log alone.
        resident_mib: MiB of memory that the child holds after it.
        took_s: Seconds of each stage, by its name.
    """

    kind: Kind
    planned: PlannedOrder | None = None
    reason: str = ""
    trace: str = ""
    resident_mib: float = 0.0
    took_s: Mapping[str, float] = field(default_factory=dict)


def as_json(message: ChildSetup | PlanRequest) -> bytes:
    """A message to the child, as text for a pipe."""
    return json.dumps(asdict(message)).encode()


def setup_from_json(text: bytes) -> ChildSetup:
    """The message that `as_json` wrote."""
    return ChildSetup(**json.loads(text))


def request_from_json(text: bytes) -> PlanRequest:
    """The message that `as_json` wrote."""
    return PlanRequest(**json.loads(text))


def answer_as_json(answer: ChildAnswer) -> bytes:
    """A message from the child, as text for a pipe."""
    planned = None if answer.planned is None else planned_as_json(answer.planned).decode()
    return json.dumps({**asdict(answer), "planned": planned}).encode()


def answer_from_json(text: bytes) -> ChildAnswer:
    """The message that `answer_as_json` wrote."""
    read = json.loads(text)
    planned = None if read["planned"] is None else planned_from_json(read["planned"].encode())
    return ChildAnswer(**{**read, "kind": Kind(read["kind"]), "planned": planned})
