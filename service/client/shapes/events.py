"""What is sent and told: events. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypedDict

from service.client.shapes.common import EventData


class EventAnswer(TypedDict):
    """What happened to an order."""

    seq: int
    order: str
    type: str
    at: str
    by: str | None
    data: "EventData"


class EventsAnswer(TypedDict):
    """Events, the oldest first."""

    events: list["EventAnswer"]
    last: int
