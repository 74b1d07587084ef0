"""Messages to hooks, as they are posted."""

from typing import Any

from pydantic import Field

from layout.documents.reading import Part


class MessageData(Part):
    """What a message tells: the event as /v1/events tells it, and what tells its order apart."""

    seq: int
    order: str
    type: str
    at: str
    by: str | None
    data: dict[str, Any] | None = Field(description="the event's own data; null where it would not fit into 20 kB")
    data_left_out: bool = Field(default=False, description="whether data was left out, to be read at /v1/events")
    reference: str | None
    state: str
    is_test: bool


class Message(Part):
    """A message of an event."""

    type: str = Field(examples=["order.ready"])
    timestamp: str = Field(description="when it happened", examples=["2026-12-02T10:00:00.000000Z"])
    data: MessageData


class TestMessageData(Part):
    """Which hook is tried."""

    hook: str


class TestMessage(Part):
    """A message that tells nothing but that messages arrive."""

    type: str = Field(examples=["hook.test"])
    timestamp: str
    data: TestMessageData
