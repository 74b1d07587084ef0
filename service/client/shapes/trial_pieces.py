"""What is sent and told: trial pieces. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypedDict

from service.client.shapes.records import CutterTold, DocumentTold


class HitTold(TypedDict):
    """A hit of a press."""

    sequence: int
    tool: str
    radius_mm: float
    angle_deg: float
    x_mm: float
    y_mm: float


class LadderTold(TypedDict):
    """A ladder of a trial piece: steps of growing size, of which one is measured."""

    ladder: str
    tool: str
    measure: str
    step_count: int


class NotTriedTold(TypedDict):
    """What the piece does not try, and why."""

    what: str
    why: str


class StepTold(TypedDict):
    """A step, and the field of a document that what is measured on it may correct."""

    ladder: str
    step: str
    nominal_mm: float
    document: str
    field: str
    how: str


class TrialPieceAnswer(TypedDict):
    """A trial piece: what is cut, and what is measured on it."""

    format: str
    movement: "DocumentTold"
    cutter: "CutterTold"
    engine_version: str
    material: str
    thickness_mm: float
    drawn_from: str
    edges: str
    web_mm: float
    ladders: list["LadderTold"]
    steps: list["StepTold"]
    hits: "list[HitTold] | None"
    not_tried: list["NotTriedTold"]
    cautions: list[str]
