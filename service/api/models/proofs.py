"""What a customer says about a proof."""

from typing import Annotated, Literal

from pydantic import Field

from layout.documents.reading import Part
from service.api.models.orders import OneLine


class VerdictBody(Part):
    """Whether a customer accepts the disc as it was shown."""

    verdict: Literal["accepted", "declined"]
    by: OneLine = Field(description="who says so", examples=["B. Client"])
    note: Annotated[str, Field(max_length=500)] | None = Field(default=None, description="what is said beside")
