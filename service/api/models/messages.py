"""Messages to hooks, as they are posted."""

from pydantic import Field

from layout.documents.reading import Part
from service.api.models.records import DocumentTold


class EventData(Part):
    """What an event tells beside; what does not apply to its type is left out, and after a deletion all is."""

    revision: int = Field(
        default=1, description="of the plan: planned, attention, ready, released, superseded, reports"
    )
    state: str = Field(default="", description="of order.planned: what it led to")
    reason: str | None = Field(default=None, description="of attention, failed and cancelled: why")
    reference: str | None = Field(default=None, description="of order.received: the sender's own")
    movement: DocumentTold | None = Field(default=None, description="of order.received; not where files are repeated")
    repeat_of: str = Field(default="", description="of order.received: the order whose files are made again")
    despite_findings: str | None = Field(default=None, description="of order.released: why despite what stands")
    recalled: bool = Field(default=False, description="of order.cancelled: whether released files were called back")
    count: int | None = Field(default=None, description="of reports: how many discs")
    note: str | None = Field(default=None, description="of reports and verdicts")
    measures: dict[str, float] = Field(default={}, description="of order.measured: numbers by what was measured")


class MessageData(Part):
    """What a message tells: the event as /v1/events tells it, and what tells its order apart."""

    seq: int
    order: str
    type: str
    at: str
    by: str | None
    data: EventData | None = Field(description="the event's own data; null where it would not fit into 20 kB")
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
