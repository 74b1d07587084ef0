"""What is sent and told: catalogue. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypedDict


class CheckAnswer(TypedDict):
    """What is wrong with a document; nothing where it could be saved."""

    faults: list["FaultAnswer"]
    fault_count: int


class CutterLine(TypedDict):
    """A cutter, in short."""

    id: str
    title: str
    kind: str
    drawn_from: str
    kerf_mm: float
    min_web_mm: float
    is_default: bool
    revision: int
    kept_by: str


class CuttersAnswer(TypedDict):
    """The cutters there are."""

    cutters: list["CutterLine"]


class FaultAnswer(TypedDict):
    """A fault of a document."""

    pointer: str
    detail: str


class MovementLine(TypedDict):
    """A movement, in short."""

    id: str
    title: str
    revision: int
    turns: str
    revolution_s: float
    free_turn_s: float
    track_count: int
    outer_diameter_mm: float
    thickness_mm: float
    material: str
    projection: str
    kept_by: str


class MovementsAnswer(TypedDict):
    """The movements there are."""

    movements: list["MovementLine"]


class RevisionAnswer(TypedDict):
    """A revision of a document."""

    revision: int
    sha256: str
    kept_by: str
    saved_at: str | None
    saved_by: str | None
    withdrawn_at: str | None
    href: str


class RevisionsAnswer(TypedDict):
    """The revisions of a document, the newest first."""

    revisions: list["RevisionAnswer"]


class SavedAnswer(TypedDict):
    """A document as it was saved."""

    id: str
    revision: int
    sha256: str
    entity_tag: str
    links: dict[str, str]
