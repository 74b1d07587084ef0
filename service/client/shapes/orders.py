"""What is sent and told: orders. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, NotRequired, TypedDict


class CancelBody(TypedDict):
    """Why an order is cancelled."""

    reason: NotRequired[str | None]
    recalled: NotRequired[bool]


class FileAnswer(TypedDict):
    """A file of a plan."""

    disc: int
    name: str
    sha256: str
    byte_count: int
    media_type: str
    saved_as: str
    for_cutting: bool
    href: str | None


class OrderAnswer(TypedDict):
    """An order."""

    id: str
    state: str
    reason: str | None
    reference: str | None
    quantity: int
    is_test: bool
    movement: dict[str, Any]
    cutter: dict[str, Any]
    tune: dict[str, Any]
    most_lost_share: float
    release_alone: bool
    quote: str | None
    repeat_of: str | None
    run: str | None
    hook: str | None
    created_at: str
    updated_at: str
    finished_at: str | None
    erased_at: str | None
    plan: "PlanAnswer | None"
    superseded_revisions: list[int]
    links: dict[str, str]


class OrdersAnswer(TypedDict):
    """Orders; the header Link leads to the next page."""

    orders: list["OrderAnswer"]


class PlanAnswer(TypedDict):
    """A plan: what was made for an order."""

    revision: int
    tag: str | None
    engine_version: str
    inputs: dict[str, Any]
    title: str
    discs: list[dict[str, Any]]
    good_to_cut: bool
    lost_share: float
    made_at: str
    released_at: str | None
    released_by: str | None
    despite_findings: str | None
    superseded_at: str | None
    files: list["FileAnswer"]


class ProofLinkAnswer(TypedDict):
    """A link to a proof."""

    href: str
    revision: int


class ReleaseBody(TypedDict):
    """Who releases an order, which plan of it was seen, and why despite what stands."""

    by: str
    plan: str
    despite_findings: NotRequired[str | None]


class ReplanBody(TypedDict):
    """What is asked for anew; what is left out stays as it was."""

    movement_revision: NotRequired[int | None]
    settings: NotRequired[dict[str, Any] | None]
    most_lost_share: NotRequired[float | None]


class ReportBody(TypedDict):
    """What the shop says of a released order."""

    what: str
    count: NotRequired[int | None]
    note: NotRequired[str | None]
    measures: NotRequired[dict[str, float]]


State = str


class StateTuneAnswer(TypedDict):
    """A tune that leads an order of a test key to a state."""

    name: str
    leads_to: "State"
    meaning: str
    release_alone: bool
    sha256: str
    href: str


class StateTunesAnswer(TypedDict):
    """All test tunes."""

    tunes: list["StateTuneAnswer"]
