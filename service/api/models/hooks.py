"""Hooks, as requests ask for them and answers tell them."""

from typing import Annotated, Any, Literal

from pydantic import Field, StrictBool, field_validator
from pydantic.json_schema import SkipJsonSchema

from layout.documents.reading import Part
from service.api.models.messages import Message, TestMessage
from service.limits import HOOK_LIMITS
from service.orders.states import EventType

MOST_DELIVERIES_LISTED = 200  # deliveries of one page: up to 4 MB of JSON
MOST_OLD_HOURS = 168  # hours; a week, which a receiver that is set by hand may need
DELIVERY_ID = r"^msg_[0-9a-f]{32}$"

Url = Annotated[str, Field(min_length=1, max_length=HOOK_LIMITS.url_characters)]
Types = Annotated[list[EventType], Field(min_length=1, max_length=100)]


class HookBody(Part):
    """A hook that is asked for."""

    url: Url = Field(description="where messages are posted; https", examples=["https://shop.example/told"])
    types: Types | None = Field(
        default=None,
        description="types of messages it wants; null for all, also those that are new",
        examples=[["order.ready", "order.attention", "order.failed"]],
    )
    for_all_orders: StrictBool = Field(
        default=True, description="whether it is told of all orders, or of those alone that name it"
    )


class HookPatch(Part):
    """What changes of a hook; what is left out stays as it is."""

    url: Url | SkipJsonSchema[None] = Field(default=None, description="where messages are posted")
    types: Types | None = Field(default=None, description="types of messages it wants; null for all")
    for_all_orders: StrictBool | SkipJsonSchema[None] = Field(
        default=None, description="whether it is told of all orders, or of those alone that name it"
    )

    @field_validator("url", "for_all_orders", mode="before")
    @classmethod
    def _not_null(cls, value: Any) -> Any:
        if value is None:
            raise ValueError("null says nothing here; leave the field out to keep it as it is")
        return value


class SecretBody(Part):
    """How a secret is replaced."""

    old_valid_hours: Annotated[int, Field(ge=0, le=MOST_OLD_HOURS, strict=True)] = Field(
        default=24,
        description="hours that messages are signed with the old secret as well; 0 drops it, and those before it, "
        "at once",
    )


class DeliveriesQuery(Part):
    """Which deliveries are listed."""

    state: Literal["waiting", "delivered", "failed"] | None = Field(default=None, description="in this state")
    after: Annotated[str, Field(pattern=DELIVERY_ID)] | None = Field(
        default=None, description="where the page begins: from the header Link of the page before"
    )
    limit: Annotated[int, Field(ge=1, le=MOST_DELIVERIES_LISTED)] = Field(
        default=50, description="how many deliveries at most"
    )


class HookAnswer(Part):
    """A hook."""

    id: str = Field(examples=["hook_0644fa2bd7a0003f1c5be7e27ab1d2c4"])
    url: str
    types: list[str] | None = Field(description="types of messages it wants; null: all")
    for_all_orders: bool
    is_test: bool = Field(description="made with a key for tests: told of test orders alone")
    created_at: str = Field(examples=["2026-12-02T10:00:00.000000Z"])
    disabled_at: str | None = Field(description="since when it gets no messages; null: it does")
    disabled_because: str | None
    quiet_until: str | None = Field(description="until when it gets no messages, as it asked; null: it does")
    old_secrets_until: str | None = Field(description="until when an old secret signs as well; null: none does")


class NewHookAnswer(HookAnswer):
    """A hook with a new secret."""

    secret: str = Field(
        description="what its messages are signed with; told this once",
        examples=["whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw"],
    )


class HooksAnswer(Part):
    """The hooks there are, the oldest first."""

    hooks: list[HookAnswer]


class DeliveryAnswer(Part):
    """A message to a hook, and what came of it."""

    id: str = Field(description="the webhook-id of every try", examples=["msg_0644fa2bd7a0003f1c5be7e27ab1d2c4"])
    hook: str
    event: int | None = Field(description="the number of the event it tells of; null: a test")
    message: Message | TestMessage = Field(description="what is told, as it is posted")
    state: str = Field(description="waiting, delivered or failed")
    tries: int = Field(description="made since it was written, or asked for again")
    next_try_at: str | None = Field(description="null: there is none")
    last_status: int | None = Field(description="the HTTP status of the last answer; null: there was none")
    last_error: str | None
    created_at: str
    finished_at: str | None


class DeliveriesAnswer(Part):
    """Messages to a hook, the newest first; the header Link leads to the next page."""

    deliveries: list[DeliveryAnswer]


class EventTypeAnswer(Part):
    """A type of message."""

    type: str
    meaning: str


class EventTypesAnswer(Part):
    """Every type of message there is. More may come."""

    event_types: list[EventTypeAnswer]
