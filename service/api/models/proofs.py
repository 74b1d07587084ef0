"""What a customer says about a proof."""

from typing import Annotated, Literal

from pydantic import Field

from layout.documents.reading import Part
from service.api.models.orders import OneLine
from service.api.models.records import DocumentTold


class VerdictBody(Part):
    """Whether a customer accepts the disc as it was shown."""

    verdict: Literal["accepted", "declined"]
    by: OneLine = Field(description="who says so", examples=["B. Client"])
    note: Annotated[str, Field(max_length=500)] | None = Field(default=None, description="what is said beside")


class ProofLinkAnswer(Part):
    """A link to a proof."""

    href: str = Field(
        description="to be handed to the customer; begins with a slash where the service does not know how it is "
        "reached from outside: resolve it against the address by which customers reach it"
    )
    revision: int = Field(description="of the plan it shows")


class ProofDiscAnswer(Part):
    """A disc as a proof shows it."""

    number: int
    of: int
    asked_count: int = Field(description="notes that the tune asks for")
    kept_count: int = Field(description="notes that the disc plays")
    files: dict[str, str] = Field(
        description="where its picture, its report, and hearing.wav and hearing.mid are, by name"
    )


class ProofAnswer(Part):
    """What a proof shows."""

    reference: str | None
    title: str
    movement: DocumentTold
    revision: int
    waits_for_decision: bool
    discs: list[ProofDiscAnswer]


class VerdictAnswer(Part):
    """What a customer said."""

    verdict: str
    revision: int
