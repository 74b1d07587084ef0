"""The sheet job: which discs are wanted, and the stock they are laid on."""

from dataclasses import dataclass
from typing import Annotated, Literal, Self

from pydantic import ConfigDict, Field, field_validator, model_validator
from shapely import Polygon, is_valid_reason

from layout.documents.conditions import LEFT_OUT, STATED, beside
from layout.documents.cutter import Layer, Layers, check_layers, layer_of
from layout.documents.reading import (
    LEAST_MM,
    Identifier,
    Length,
    LengthOrZero,
    Part,
    Title,
    Within,
    check_document,
    read_json,
)
from layout.limits import limit

FORMAT = "discwright-sheets/1"
LEAST_AREA_MM2 = 1.0  # mm²; below it an outline is a slip of the pen, not a piece of sheet
LEAST_CORNERS = 3
# Layers of a sheet's drawing that no cutter may give another meaning: they are never cut.
STOCK_LAYER, CLAMPS_LAYER = "STOCK", "CLAMPS"
LEAST_REMNANT_MM = 100.0  # mm; unless the job says otherwise: a hand's width, worth a place in the rack


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetLimits:
    """How large a sheet job may be; each keeps the time it takes, and the files it gives, within reason."""

    stock_kinds: int = limit(32, "kinds", "most entries of stock: a rack of remnants; each takes up to about a second")
    sheets: int = limit(200, "sheets", "most sheets of all kinds together; each gives a drawing")
    disc_kinds: int = limit(24, "kinds", "most entries of discs: each is placed in turn on every sheet")
    discs: int = limit(
        2000, "discs", "most discs of all kinds together; a full sheet of them takes a quarter of a minute"
    )
    least_disc_mm: int = limit(1, "mm", "least diameter of a disc: smaller ones are never told from dirt")
    outline_corners: int = limit(500, "corners", "most corners of an outline with its openings: a much cut remnant")
    job_corners: int = limit(1600, "corners", "most corners of all outlines of a job: a rack of remnants, each with 50")
    clamps: int = limit(20, "zones", "most clamp zones of a sheet: more than a bed has clamps")
    drawing_mib: int = limit(4, "MiB", "all drawings of a job together; to read that much takes seven seconds")
    drawn_vertices: int = limit(
        500_000,
        "vertices",
        "most vertices of the drawings of all discs together: 125 of 4000 each; to write that much takes ten seconds",
    )
    longest_mm: int = limit(6000, "mm", "farthest a sheet may reach: above the largest plates that are traded")


LIMITS = SheetLimits()

SheetLength = Annotated[float, Within(ge=LEAST_MM, le=LIMITS.longest_mm)]
SheetPlace = Annotated[float, Within(ge=-LIMITS.longest_mm, le=LIMITS.longest_mm)]
Corner = tuple[SheetPlace, SheetPlace]
Ring = Annotated[
    tuple[Corner, ...], Field(max_length=LIMITS.outline_corners, json_schema_extra={"minItems": LEAST_CORNERS})
]
# Ends up in a CSV file: no sign a spreadsheet would take for a formula can stand first.
Lot = Annotated[str, Field(pattern=r"^([A-Za-z0-9][A-Za-z0-9 ._/-]{0,39})?$")]
Quantity = Annotated[int, Field(ge=1)]


class Clamp(Part):
    """A rectangle of a sheet that stays free of discs: lower left corner and size, in the sheet's frame."""

    x_mm: SheetPlace
    y_mm: SheetPlace
    width_mm: SheetLength
    height_mm: SheetLength


class Stock(Part):
    """Sheets of one shape: a rectangle with its lower left corner at the origin, or an outline.

    `openings_mm` are holes that are in the sheet already. Rims keep `margin_mm` from edge and
    openings; the job's own margin holds where the stock has none.
    """

    model_config = ConfigDict(
        json_schema_extra={
            "allOf": [
                beside(
                    "outline_mm",
                    {"width_mm": LEFT_OUT, "height_mm": LEFT_OUT},
                    otherwise={"width_mm": STATED, "height_mm": STATED},
                )
            ]
        }
    )

    id: Identifier
    lot: Lot = ""
    quantity: Quantity = 1
    width_mm: SheetLength | None = None
    height_mm: SheetLength | None = None
    outline_mm: Ring | None = None
    openings_mm: tuple[Ring, ...] = ()
    clamps: Annotated[tuple[Clamp, ...], Field(max_length=LIMITS.clamps)] = ()
    margin_mm: LengthOrZero | None = None

    @field_validator("outline_mm")
    @classmethod
    def _goes_round_once(cls, ring: tuple[Corner, ...] | None) -> tuple[Corner, ...] | None:
        if ring is not None:
            _check_ring(ring)
        return ring

    @field_validator("openings_mm")
    @classmethod
    def _each_goes_round_once(cls, rings: tuple[tuple[Corner, ...], ...]) -> tuple[tuple[Corner, ...], ...]:
        for ring in rings:
            _check_ring(ring)
        return rings

    @model_validator(mode="after")
    def _has_one_shape(self) -> Self:
        sides = (self.width_mm, self.height_mm)
        if self.outline_mm is not None and sides != (None, None):
            raise ValueError("a sheet is given by width_mm and height_mm, or by outline_mm; leave one of them out")
        if self.outline_mm is None and None in sides:
            raise ValueError("a sheet needs width_mm and height_mm, or outline_mm")
        corners = len(self.outline_mm or ()) + sum(map(len, self.openings_mm))
        if corners > LIMITS.outline_corners:
            raise ValueError(
                f"outline_mm and openings_mm have {corners} corners, {LIMITS.outline_corners} are allowed; "
                "leave out corners that hardly turn"
            )
        shape = self.shape()
        if not shape.is_valid:
            raise ValueError(
                f"openings_mm must lie inside the sheet and apart from each other: {is_valid_reason(shape)}"
            )
        return self

    def shape(self) -> Polygon:
        """The sheet with its openings; clamp zones are part of it."""
        if self.outline_mm is not None:
            return Polygon(self.outline_mm, self.openings_mm)
        width_mm, height_mm = self.width_mm or 0.0, self.height_mm or 0.0
        return Polygon(((0, 0), (width_mm, 0), (width_mm, height_mm), (0, height_mm)), self.openings_mm)


def _check_ring(ring: tuple[Corner, ...]) -> None:
    if len(ring) < LEAST_CORNERS:
        raise ValueError(f"an outline has at least {LEAST_CORNERS} corners, got {len(ring)}")
    shape = Polygon(ring)
    if not shape.is_valid:
        raise ValueError(
            f"the outline crosses or touches itself ({is_valid_reason(shape)}); give its corners in order, once round"
        )
    if shape.area < LEAST_AREA_MM2:
        raise ValueError(f"the outline holds {shape.area:g} mm²; at least {LEAST_AREA_MM2:g} mm² are needed")


class WantedDiscs(Part):
    """Discs of one diameter that are wanted."""

    id: Identifier
    diameter_mm: Annotated[Length, Within(ge=LIMITS.least_disc_mm)]
    quantity: Quantity


class SheetJob(Part):
    """Discs and the stock to lay them on. Stock is used in the order in which it is listed.

    `gap_mm` is left between two rims, `margin_mm` between a rim and an edge; both count to the
    nominal rim, so they must hold the kerf; where a disc's drawing is compensated, to the rim as it is
    drawn. `least_remnant_mm` is the width below which what is left of a sheet is scrap.
    `layers` are those of the cutter, where it has names of its own: drawings of discs have them, and
    the sheets get them. With `labels` each disc's id and number are lettered beside it.
    """

    format: Literal["discwright-sheets/1"]
    title: Title
    gap_mm: LengthOrZero
    margin_mm: LengthOrZero
    least_remnant_mm: Length = LEAST_REMNANT_MM
    stock: Annotated[tuple[Stock, ...], Field(max_length=LIMITS.stock_kinds, json_schema_extra={"minItems": 1})]
    discs: Annotated[tuple[WantedDiscs, ...], Field(max_length=LIMITS.disc_kinds, json_schema_extra={"minItems": 1})]
    layers: Layers = Field(default_factory=dict)
    labels: Annotated[bool, Field(strict=True)] = True

    @field_validator("stock")
    @classmethod
    def _stock_is_bounded(cls, stock: tuple[Stock, ...]) -> tuple[Stock, ...]:
        _check_listed([(each.id, each.quantity) for each in stock], "sheets", LIMITS.sheets)
        corners = sum(len(each.outline_mm or ()) + sum(map(len, each.openings_mm)) for each in stock)
        if corners > LIMITS.job_corners:
            raise ValueError(
                f"the outlines have {corners} corners, {LIMITS.job_corners} are allowed; make several jobs of it"
            )
        return stock

    @field_validator("layers")
    @classmethod
    def _layers_stay_apart(cls, layers: dict[str, Layer]) -> dict[str, Layer]:
        check_layers(layers)
        for ours, layer in layers.items():
            if layer.name.upper() in (STOCK_LAYER, CLAMPS_LAYER):
                raise ValueError(
                    f"layers: {ours} would be the layer {layer.name!r}, which is never cut; give it another name"
                )
        return layers

    @field_validator("discs")
    @classmethod
    def _discs_are_bounded(cls, discs: tuple[WantedDiscs, ...]) -> tuple[WantedDiscs, ...]:
        _check_listed([(each.id, each.quantity) for each in discs], "discs", LIMITS.discs)
        return discs

    def layer(self, ours: str) -> Layer:
        """The layer name and colour wanted for one of our layer names."""
        return layer_of(self.layers, ours)


def _check_listed(listed: list[tuple[str, int]], what: str, most: int) -> None:
    if not listed:
        raise ValueError("the list is empty; name one at least")
    ids = [each for each, _ in listed]
    twice = sorted({each for each in ids if ids.count(each) > 1})
    if twice:
        raise ValueError(f"the id {twice[0]!r} is given twice; give each its own")
    total = sum(quantity for _, quantity in listed)
    if total > most:
        raise ValueError(f"{total} {what} are more than the {most} of one job; make several jobs of it")


def read_sheet_job(text: str | bytes) -> SheetJob:
    """A sheet job.

    Raises:
        DocumentError: Not JSON, or not a valid sheet job; names every fault found.
    """
    plain, _ = read_json(text, document="sheet job")
    return check_document(SheetJob, plain, document="sheet job")
