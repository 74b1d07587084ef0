"""What the JSON of trial pieces and of sheets holds, as answers tell it."""

from typing import Literal

from pydantic import Field

from layout.documents.reading import Part
from service.api.models.records import CutterTold, DocumentTold, FindingTold

Ring = list[list[float]]  # corners, each x and y


class LadderTold(Part):
    """A ladder of a trial piece: steps of growing size, of which one is measured."""

    ladder: str
    tool: str = Field(description='"" where no press tool strikes it')
    measure: str
    step_count: int


class StepTold(Part):
    """A step, and the field of a document that what is measured on it may correct."""

    ladder: str
    step: str
    nominal_mm: float
    document: str
    field: str = Field(description="a JSON pointer")
    how: str


class HitTold(Part):
    """A hit of a press."""

    sequence: int
    tool: str
    radius_mm: float
    angle_deg: float
    x_mm: float
    y_mm: float


class NotTriedTold(Part):
    """What the piece does not try, and why."""

    what: str
    why: str


class TrialPieceAnswer(Part):
    """A trial piece: what is cut, and what is measured on it."""

    format: Literal["discwright-trial-piece/1"]
    movement: DocumentTold
    cutter: CutterTold
    engine_version: str
    material: str
    thickness_mm: float
    drawn_from: str
    edges: str
    web_mm: float
    ladders: list[LadderTold]
    steps: list[StepTold]
    hits: list[HitTold] | None
    not_tried: list[NotTriedTold]
    cautions: list[str]


class DrawingTold(Part):
    """What the head of a disc's drawing tells; "" where it does not."""

    title: str
    fingerprint: str


class DiscKindTold(Part):
    """A kind of disc, and how many found a place."""

    disc: str
    diameter_mm: float
    wanted: int
    placed: int
    not_placed: int
    drawing: DrawingTold | None = Field(description="null for a plain circle")


class PieceTold(Part):
    """A piece of stock; as it is it can stand in the stock of another job."""

    outline_mm: Ring
    openings_mm: list[Ring]
    area_mm2: float


class PlacedTold(Part):
    """A disc on a sheet."""

    disc: str
    x_mm: float
    y_mm: float
    diameter_mm: float
    number: int = Field(description="of its kind, over all sheets")
    label: str | None = Field(description="what is lettered beside it; null for nothing")


class SheetTold(PieceTold):
    """A sheet, what lies on it, and what is left of it."""

    sheet: int
    drawing: str = Field(description="the name of its file")
    stock: str
    copy_: int = Field(alias="copy")
    lot: str
    clamps_mm: list[list[float]]
    used_percent: float
    found_by: str
    cut_from: str
    strip_mm: float
    travel_mm: float
    discs: list[PlacedTold]
    remnants: list[PieceTold]


class SheetPlanAnswer(Part):
    """A plan of sheets: what lies where, and what is left."""

    format: Literal["discwright-sheet-plan/1"]
    title: str
    fingerprint: str
    engine_version: str
    complete: bool
    gap_mm: float
    discs: list[DiscKindTold]
    sheets: list[SheetTold]
    untouched_sheets: int
    findings: list[FindingTold]
