"""Layouts, trial pieces and sheets, as requests ask for them and answers tell them."""

from typing import Annotated, Any

from pydantic import AfterValidator, ConfigDict, Field, RootModel

from layout.documents.reading import Part
from service.limits import Limits
from service.reason import checked_reason

MOST_REASON = Limits().reason_characters


def _reason(text: str) -> str:
    return checked_reason(text, most_characters=MOST_REASON)


Movement = Annotated[str, Field(description="the id of a movement", examples=["fernhollow-31"])]
Cutter = Annotated[str, Field(description="the id of a cutter; the default one if left out", examples=["fibre-laser"])]
Despite = Annotated[
    str,
    AfterValidator(_reason),
    Field(
        description="why cutting files shall be given although an error-level finding stands; they are then marked "
        f"NOT GOOD TO CUT. 1 to {MOST_REASON} printable characters on one line",
        examples=["for the wall"],
    ),
]


class LayoutQuery(Part):
    """Which layout is asked for."""

    movement: Movement | None = None
    cutter: Cutter | None = None
    despite_findings: Despite | None = None


class DespiteQuery(Part):
    """Whether what is kept back is wanted all the same."""

    despite_findings: Despite | None = None


class TrialPieceQuery(Part):
    """Which trial piece is asked for."""

    movement: Movement | None = None
    cutter: Cutter | None = None


class NoQuery(Part):
    """No parameter is taken."""


class DiscAnswer(Part):
    """Which disc of its set a layout is."""

    number: int = Field(description="from 1")
    of: int


class LayoutAnswer(Part):
    """A layout."""

    fingerprint: str = Field(
        description="names the layout: the same input gives the same", examples=["5f0c1d2e3a4b5c6d"]
    )
    title: str
    disc: DiscAnswer
    good_to_cut: bool
    links: dict[str, str] = Field(description="where its files are, by name; those kept back are left out")
    layout: dict[str, Any] = Field(description="the record of the disc: projections, findings, report")


class LayoutsAnswer(Part):
    """The layouts of a tune that is cut into several discs."""

    discs: list[LayoutAnswer]


class MadeAnswer(RootModel[LayoutAnswer | LayoutsAnswer]):
    """A layout, or one for each disc."""


class TrialPieceAnswer(RootModel[dict[str, Any]]):
    """A trial piece: what is cut, and what is measured on it."""


class SheetPlanAnswer(RootModel[dict[str, Any]]):
    """A plan of sheets: what lies where, and what is left."""


class FileRecord(Part):
    """A file that is JSON; its member `format`, where it has one, says which."""

    model_config = ConfigDict(extra="allow")
