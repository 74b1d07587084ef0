"""Keys, as requests ask for them and answers tell them."""

from typing import Annotated

from pydantic import AfterValidator, Field, StrictBool

from layout.documents.reading import Part
from service.access.keys import KEY_ID
from service.access.owners import checked_title
from service.access.scopes import Scope

MOST_KEYS_LISTED = 500

Title = Annotated[str, AfterValidator(checked_title), Field(description="1 to 200 characters on one line")]


class KeyBody(Part):
    """A key that is asked for."""

    title: Title = Field(description="what the key is called, such as where it is used", examples=["the web shop"])
    scopes: Annotated[list[Scope], Field(min_length=1, max_length=len(Scope))] = Field(
        description="what it may do; at most what the key asking may do", examples=[["read", "order"]]
    )
    is_test: StrictBool = Field(default=False, description="whether its orders never reach the shop")
    owner: Title | None = Field(
        default=None,
        description="whose it is, by title, made where there is none; by default the owner of the key asking",
        examples=["Bellgrove"],
    )


class KeysQuery(Part):
    """Which keys are listed."""

    after: Annotated[str, Field(pattern=f"^{KEY_ID.pattern}$")] | None = Field(
        default=None, description="the id of a key; only keys made after it"
    )
    limit: Annotated[int, Field(ge=1, le=MOST_KEYS_LISTED)] = Field(default=100, description="how many keys at most")


class OwnerAnswer(Part):
    """An owner."""

    id: str = Field(examples=["owner_0644fa2bd7a000f3b1c3f7e27ab1d2c4"])
    title: str = Field(examples=["Bellgrove"])
    is_shop: bool = Field(description="whether it is the shop itself, which sees the orders of all owners")


class KeyAnswer(Part):
    """A key."""

    id: str = Field(examples=["key_0644fa2bd7a0003f1c5be7e27ab1d2c4"])
    owner: OwnerAnswer
    title: str
    scopes: list[Scope]
    is_test: bool
    created_at: str = Field(examples=["2026-12-02T10:00:00.000000Z"])
    last_used_at: str | None = Field(description="to a minute; null: never")
    revoked_at: str | None = Field(description="since when it opens nothing; null: it is in force")


class NewKeyAnswer(KeyAnswer):
    """A key just made."""

    secret: str = Field(description="what requests are made with; told this once and kept nowhere")


class OwnKeyAnswer(KeyAnswer):
    """The key that asks."""

    csrf_token: str | None = Field(description="what a browser's writes bring as X-CSRF-Token; null for a program")


class KeysAnswer(Part):
    """Keys, the oldest first; the header Link leads to the next page."""

    keys: list[KeyAnswer]
