"""What is sent and told: layouts. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, TypedDict


class DiscAnswer(TypedDict):
    """Which disc of its set a layout is."""

    number: int
    of: int


class LayoutAnswer(TypedDict):
    """A layout."""

    fingerprint: str
    title: str
    disc: "DiscAnswer"
    good_to_cut: bool
    links: dict[str, str]
    layout: dict[str, Any]


class LayoutsAnswer(TypedDict):
    """The layouts of a tune that is cut into several discs."""

    discs: list["LayoutAnswer"]


MadeAnswer = "LayoutAnswer | LayoutsAnswer"
