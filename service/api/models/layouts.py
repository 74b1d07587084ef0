"""Layouts, trial pieces and sheets, as requests ask for them and answers tell them."""

from typing import Annotated

from pydantic import AfterValidator, Field, RootModel

from layout.documents.reading import Part
from service.api.models.records import DiscAnswer, LayoutRecord
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


class LayoutAnswer(Part):
    """A layout."""

    fingerprint: str = Field(
        description="names the layout: the same input gives the same", examples=["5f0c1d2e3a4b5c6d"]
    )
    title: str
    disc: DiscAnswer
    good_to_cut: bool
    links: dict[str, str] = Field(
        description="where its files are, by name, hearing.wav and hearing.mid among them, each made when it is asked "
        "for; those kept back are left out"
    )
    layout: LayoutRecord = Field(description="the record of the disc: notes, projections, findings")


class LayoutsAnswer(Part):
    """The layouts of a tune that is cut into several discs."""

    discs: list[LayoutAnswer]


class MadeAnswer(RootModel[LayoutAnswer | LayoutsAnswer]):
    """A layout, or one for each disc."""
