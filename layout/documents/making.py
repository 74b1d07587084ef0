"""Parts of a cutter document that say how it works: its speeds, rates, leads, rules and classes.

All are optional. What is not stated is not checked or told, and the report says so.
"""

import re
from decimal import Decimal
from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, WithJsonSchema, model_validator

from layout.documents.reading import Angle, At, Length, Part, Positive, PositiveAngle, TimeOrZero, Within

MOST_BRIDGES = 24  # bridges round the rim; a few hold a disc
MOST_SLUG_BRIDGES = 6  # bridges of one slug; one or two hold it
MOST_RATIO = 20.0  # times the thickness; far above any rule for sheet
MOST_TAKE_UP_DEG = 30.0  # degrees; far more than any table has play
MONEY_PATTERN = r"[0-9]{1,9}(\.[0-9]{1,6})?"

ToleranceClass = Literal["iso-9013-1", "iso-9013-2", "iso-2768-f", "iso-2768-m", "iso-2768-c", "iso-2768-v"]


def _money(value: object) -> object:
    if isinstance(value, Decimal):
        return value  # a document that is checked already
    text = value if isinstance(value, str) else None
    if text is None or re.fullmatch(MONEY_PATTERN, text) is None:
        raise ValueError(f'an amount is text with a decimal number, such as "12.50"; got {value!r}')
    return Decimal(text)


Money = Annotated[
    Decimal,
    BeforeValidator(_money),
    WithJsonSchema({"type": "string", "pattern": f"^{MONEY_PATTERN}$", "examples": ["12.50"]}, mode="validation"),
]
Ratio = Annotated[float, Within(gt=0, le=MOST_RATIO)]
Word = Annotated[str, Field(pattern=r"^[A-Z]([A-Z0-9 .-]|\{tool\}){0,39}$", examples=["M20"])]


class Feeds(Part):
    """How fast the machine works. A laser needs the first three, a press the others."""

    cut_mm_per_s: Positive | None = None
    rapid_mm_per_s: Positive | None = None
    pierce_s: TimeOrZero | None = None
    mark_mm_per_s: Positive | None = None
    hit_s: TimeOrZero | None = None
    turn_deg_per_s: Positive | None = None
    slide_mm_per_s: Positive | None = None
    tool_change_s: TimeOrZero | None = None


class Rates(Part):
    """What the shop asks for; every line of a price comes from one of these. Amounts are decimal text."""

    currency: Annotated[str, Field(pattern=r"^[A-Z]{3}$", examples=["EUR"])]
    setup: Money | None = None
    per_minute: Money | None = None
    per_pierce: Money | None = None
    per_hit: Money | None = None
    per_kg: Money | None = None


class LeadIn(Part):
    """How a laser comes up to a closed contour: pierced in the scrap, then straight to the contour."""

    length_mm: Length


class SlugBridges(Part):
    """Metal left in the cuts of holes and slots that holds each slug till it is knocked out.

    Held is a slug whose longest side is `least_slug_mm` or more: one that can lie on two slats of the machine's bed
    and tip up between them into the head's way. Smaller ones fall through. The slug is the opening less the kerf on
    every side. A folded tab's channel leaves a strip too thin to tip; its slug is never held.
    """

    count: Annotated[int, Field(ge=1, le=MOST_SLUG_BRIDGES)]
    width_mm: Length
    least_slug_mm: Length


class Bridges(Part):
    """Metal left in the rim's cut that holds the disc in the sheet till it is broken out; and its slugs, if wanted."""

    count: Annotated[int, Field(ge=1, le=MOST_BRIDGES)]
    width_mm: Length
    slugs: SlugBridges | None = None


class FeatureRules(Part):
    """Least sizes of features, as multiples of the sheet's thickness, in three levels.

    Below the first a feature is an error, below the second a warning, below the third advice. Shop
    rules differ; these are one shop's.
    """

    hole: tuple[Ratio, Ratio, Ratio] = (0.7, 1.0, 1.5)
    web: tuple[Ratio, Ratio, Ratio] = (0.7, 1.0, 1.5)
    edge: tuple[Ratio, Ratio, Ratio] = (0.7, 1.0, 1.5)
    slit: tuple[Ratio, Ratio, Ratio] = (0.7, 1.0, 1.5)

    @model_validator(mode="after")
    def _levels_rise(self) -> Self:
        for name in ("hole", "web", "edge", "slit"):
            levels = getattr(self, name)
            if not levels[0] <= levels[1] <= levels[2]:
                raise At(f"/{name}", f"{name}: the three levels must not fall, from error over warning to advice")
        return self


class NetSection(Part):
    """Least share of metal that openings may leave along any radial line and along any ring of the tracks' band."""

    least_line_share: Annotated[float, Within(ge=0, le=1)]
    least_ring_share: Annotated[float, Within(ge=0, le=1)]


class Press(Part):
    """What the press can do.

    `stripping_share` is the force that pulls the punch out, as a share of the cutting force. The
    words go into press.nc where they stand in braces: `{tool}` in `change_word`. `take_up_deg` is how far the
    table goes past and comes back, where it must come onto every hit from one side. `forms` is the way its
    tools bend the tabs as the sheet lies on the machine; the drawing shows the upper face, unless the cutter states
    another side.
    """

    capacity_n: Positive | None = None
    stripping_share: Annotated[float, Within(ge=0, le=1)] = 0.2
    metric_word: Literal["G71", "G21"] = "G71"
    strike_word: Word = "M20"
    change_word: Word = "T{tool} M6"
    turns_one_way: bool = True
    take_up_deg: Annotated[PositiveAngle, Within(le=MOST_TAKE_UP_DEG)] = 1.0
    forms: Literal["up", "down"] | None = None

    @model_validator(mode="after")
    def _change_names_the_tool(self) -> Self:
        if self.change_word.count("{tool}") != 1:
            raise At("/change_word", "change_word must hold {tool} once")
        if "{tool}" in self.strike_word:
            raise At("/strike_word", "strike_word cannot hold {tool}; the tool is named by change_word")
        return self


class Foot(Part):
    """The outline of a tool's stripper or die foot round the strike point: metal there must be flat."""

    length_mm: Length
    width_mm: Length


class Springback(Part):
    """How far a fold opens again when it is let go, as measured by the shop on a trial piece."""

    opens_deg: Annotated[Angle, Within(ge=0, lt=45)]
