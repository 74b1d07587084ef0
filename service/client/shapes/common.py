"""What is sent and told: common. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, NotRequired, TypedDict


class DocumentName(TypedDict):
    """A movement or cutter that is kept, by its id."""

    id: str
    revision: NotRequired[int | None]


FileRecord = dict[str, Any]


class OrderBody(TypedDict):
    """The part `order`: what is ordered beside the tune."""

    movement: NotRequired["DocumentName | str | None"]
    cutter: NotRequired["DocumentName | str | None"]
    settings: NotRequired[dict[str, Any]]
    quantity: NotRequired[int]
    reference: NotRequired[str | None]
    tune_name: NotRequired[str | None]
    most_lost_share: NotRequired[float]
    release_alone: NotRequired[bool]
    quote: NotRequired[str | None]
    hook: NotRequired[str | None]
    repeat_of: NotRequired[str | None]
