"""Test tunes, as answers tell them."""

from pydantic import Field

from layout.documents.reading import Part
from service.orders.states import State


class StateTuneAnswer(Part):
    """A tune that leads an order of a test key to a state."""

    name: str
    leads_to: State = Field(description="where an order of a test key for any shipped movement ends")
    meaning: str = Field(description="how it comes to that")
    release_alone: bool = Field(description="whether the order must ask for release_alone")
    sha256: str
    href: str = Field(description="where the MIDI file is")


class StateTunesAnswer(Part):
    """All test tunes."""

    tunes: list[StateTuneAnswer]
