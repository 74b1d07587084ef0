"""What is sent and told: keys. Written by generate.py from the API document; not to be changed by hand."""

from typing import NotRequired, TypeAlias, TypedDict


class KeyAnswer(TypedDict):
    """A key."""

    id: str
    owner: "OwnerAnswer"
    title: str
    scopes: list["Scope"]
    is_test: bool
    created_at: str
    last_used_at: str | None
    revoked_at: str | None


class KeyBody(TypedDict):
    """A key that is asked for."""

    title: str
    scopes: list["Scope"]
    is_test: NotRequired[bool]
    owner: NotRequired[str | None]


class KeysAnswer(TypedDict):
    """Keys, the oldest first; the header Link leads to the next page."""

    keys: list["KeyAnswer"]


class NewKeyAnswer(TypedDict):
    """A key just made."""

    id: str
    owner: "OwnerAnswer"
    title: str
    scopes: list["Scope"]
    is_test: bool
    created_at: str
    last_used_at: str | None
    revoked_at: str | None
    secret: str


class OwnKeyAnswer(TypedDict):
    """The key that asks."""

    id: str
    owner: "OwnerAnswer"
    title: str
    scopes: list["Scope"]
    is_test: bool
    created_at: str
    last_used_at: str | None
    revoked_at: str | None
    csrf_token: str | None


class OwnerAnswer(TypedDict):
    """An owner."""

    id: str
    title: str
    is_shop: bool


Scope: TypeAlias = str
