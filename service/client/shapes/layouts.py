"""What is sent and told: layouts. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypeAlias, TypedDict

from service.client.shapes.records import DiscAnswer, LayoutRecord


class LayoutAnswer(TypedDict):
    """A layout."""

    fingerprint: str
    title: str
    disc: "DiscAnswer"
    good_to_cut: bool
    links: dict[str, str]
    layout: "LayoutRecord"


class LayoutsAnswer(TypedDict):
    """The layouts of a tune that is cut into several discs."""

    discs: list["LayoutAnswer"]


MadeAnswer: TypeAlias = "LayoutAnswer | LayoutsAnswer"
