"""What is sent and told: runs. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, NotRequired, TypedDict

from service.client.shapes.common import DocumentName


class ItemAnswer(TypedDict):
    """A pair, and what became of it."""

    number: int
    tune: str
    movement: str
    order: str | None
    state: str
    reason: str | None


class ItemsAnswer(TypedDict):
    """Pairs in the order asked; the header Link leads to the next page."""

    items: list["ItemAnswer"]


class PairBody(TypedDict):
    """One tune of the archive for one movement."""

    tune: str
    movement: "str | DocumentName"
    reference: NotRequired[str | None]


class RunAnswer(TypedDict):
    """A run, and how far it is."""

    id: str
    reference: str | None
    order_count: int
    counts: dict[str, int]
    is_finished: bool
    created_at: str
    links: dict[str, str]


class RunBody(TypedDict):
    """The part `run`: what is ordered of the tunes in the part `archive`."""

    movements: NotRequired[list["str | DocumentName"]]
    pairs: NotRequired[list["PairBody"]]
    cutter: NotRequired["str | DocumentName | None"]
    settings: NotRequired[dict[str, Any]]
    quantity: NotRequired[int]
    reference: NotRequired[str | None]
    most_lost_share: NotRequired[float]
    release_alone: NotRequired[bool]
    hook: NotRequired[str | None]


class RunsAnswer(TypedDict):
    """A page of runs, the newest first; the header Link leads to the next."""

    runs: list["RunAnswer"]
