"""What is sent and told: hooks. Written by generate.py from the API document; not to be changed by hand."""

from typing import NotRequired, TypeAlias, TypedDict

from service.client.shapes.common import EventData


class DeliveriesAnswer(TypedDict):
    """Messages to a hook, the newest first; the header Link leads to the next page."""

    deliveries: list["DeliveryAnswer"]


class DeliveryAnswer(TypedDict):
    """A message to a hook, and what came of it."""

    id: str
    hook: str
    event: int | None
    message: "Message | TestMessage"
    state: str
    tries: int
    next_try_at: str | None
    last_status: int | None
    last_error: str | None
    created_at: str
    finished_at: str | None


EventType: TypeAlias = str


class EventTypeAnswer(TypedDict):
    """A type of message."""

    type: str
    meaning: str


class EventTypesAnswer(TypedDict):
    """Every type of message there is. More may come."""

    event_types: list["EventTypeAnswer"]


class HookAnswer(TypedDict):
    """A hook."""

    id: str
    url: str
    types: list[str] | None
    for_all_orders: bool
    is_test: bool
    created_at: str
    disabled_at: str | None
    disabled_because: str | None
    quiet_until: str | None
    old_secrets_until: str | None


class HookBody(TypedDict):
    """A hook that is asked for."""

    url: str
    types: NotRequired["list[EventType] | None"]
    for_all_orders: NotRequired[bool]


class HookPatch(TypedDict):
    """What changes of a hook; what is left out stays as it is."""

    url: NotRequired[str]
    types: NotRequired["list[EventType] | None"]
    for_all_orders: NotRequired[bool]


class HooksAnswer(TypedDict):
    """The hooks there are, the oldest first."""

    hooks: list["HookAnswer"]


class Message(TypedDict):
    """A message of an event."""

    type: str
    timestamp: str
    data: "MessageData"


class MessageData(TypedDict):
    """What a message tells: the event as /v1/events tells it, and what tells its order apart."""

    seq: int
    order: str
    type: str
    at: str
    by: str | None
    data: "EventData | None"
    data_left_out: NotRequired[bool]
    reference: str | None
    state: str
    is_test: bool


class NewHookAnswer(TypedDict):
    """A hook with a new secret."""

    id: str
    url: str
    types: list[str] | None
    for_all_orders: bool
    is_test: bool
    created_at: str
    disabled_at: str | None
    disabled_because: str | None
    quiet_until: str | None
    old_secrets_until: str | None
    secret: str


class SecretBody(TypedDict):
    """How a secret is replaced."""

    old_valid_hours: NotRequired[int]


class TestMessage(TypedDict):
    """A message that tells nothing but that messages arrive."""

    type: str
    timestamp: str
    data: "TestMessageData"


class TestMessageData(TypedDict):
    """Which hook is tried."""

    hook: str
