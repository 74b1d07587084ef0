"""What planning an order gives: facts and the digests of its files, small enough to go through a pipe."""

import json
from dataclasses import asdict, dataclass
from typing import Any


@dataclass(frozen=True, slots=True, kw_only=True)
class OrderInputs:
    """All that decides an order's files: the same inputs and engine give the same bytes.

    Attributes:
        tune: The MIDI file.
        movement: The movement document's text.
        cutter: The cutter document's text.
        settings: The settings document's text.
        not_good: The reason for which cutting files are given although an error-level finding stands; None: kept back.
    """

    tune: bytes
    movement: bytes
    cutter: bytes
    settings: bytes
    not_good: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedFile:
    """One file, kept in the store of files.

    Attributes:
        disc: Which disc, from 1.
        name: Such as disc.dxf.
        digest: SHA-256 in hex digits.
        byte_count: Its size.
        media_type: What it is sent as.
        saved_as: The name of its download.
        is_for_cutting: Whether it is given only after release.
    """

    disc: int
    name: str
    digest: str
    byte_count: int
    media_type: str
    saved_as: str
    is_for_cutting: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedOrder:
    """The plan of an order.

    Attributes:
        engine_version: Of the program that made it.
        good_to_cut: Whether no error-level finding stands on any disc.
        lost_share: Weight lost of the weight asked for over all discs, 0 to 1; 1 where nothing was asked.
        told: What an answer tells: `title`, and `discs`, each with its findings counted, worth, time and price.
        files: Of all discs, in the order of discs and then of `layout.file_names.FILES`.
    """

    engine_version: str
    good_to_cut: bool
    lost_share: float
    told: dict[str, Any]
    files: tuple[PlannedFile, ...]


def planned_as_json(planned: PlannedOrder) -> bytes:
    """The plan as text for a pipe."""
    return json.dumps(asdict(planned)).encode()


def planned_from_json(text: bytes) -> PlannedOrder:
    """The plan that `planned_as_json` wrote."""
    read = json.loads(text)
    return PlannedOrder(**{**read, "files": tuple(PlannedFile(**file) for file in read["files"])})
