"""What is sent and told: sheets. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypedDict

from service.client.shapes.records import FindingTold


class DiscKindTold(TypedDict):
    """A kind of disc, and how many found a place."""

    disc: str
    diameter_mm: float
    wanted: int
    placed: int
    not_placed: int
    drawing: "DrawingTold | None"


class DrawingTold(TypedDict):
    """What the head of a disc's drawing tells; "" where it does not."""

    title: str
    fingerprint: str


class PieceTold(TypedDict):
    """A piece of stock; as it is it can stand in the stock of another job."""

    outline_mm: list[list[float]]
    openings_mm: list[list[list[float]]]
    area_mm2: float


class PlacedTold(TypedDict):
    """A disc on a sheet."""

    disc: str
    x_mm: float
    y_mm: float
    diameter_mm: float
    number: int
    label: str | None


class SheetPlanAnswer(TypedDict):
    """A plan of sheets: what lies where, and what is left."""

    format: str
    title: str
    fingerprint: str
    engine_version: str
    complete: bool
    gap_mm: float
    discs: list["DiscKindTold"]
    sheets: list["SheetTold"]
    untouched_sheets: int
    findings: list["FindingTold"]


class SheetTold(TypedDict):
    """A sheet, what lies on it, and what is left of it."""

    outline_mm: list[list[float]]
    openings_mm: list[list[list[float]]]
    area_mm2: float
    sheet: int
    drawing: str
    stock: str
    copy: int
    lot: str
    clamps_mm: list[list[float]]
    used_percent: float
    found_by: str
    cut_from: str
    strip_mm: float
    travel_mm: float
    discs: list["PlacedTold"]
    remnants: list["PieceTold"]
