"""What is sent and told: orders. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, NotRequired, TypeAlias, TypedDict

from service.client.shapes.common import Price
from service.client.shapes.records import CutterTold, DocumentTold, WorthTold


class CancelBody(TypedDict):
    """Why an order is cancelled."""

    reason: NotRequired[str | None]
    recalled: NotRequired[bool]


class CutterInput(TypedDict):
    """The cutter that a plan was made with."""

    id: str
    sha256: str


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


class FindingCounts(TypedDict):
    """How many findings there are of each level."""

    error: int
    warning: int
    advice: int


class MovementInput(TypedDict):
    """The movement that a plan was made with."""

    id: str
    revision: int
    sha256: str


class OrderAnswer(TypedDict):
    """An order."""

    id: str
    state: str
    reason: str | None
    reference: str | None
    quantity: int
    is_test: bool
    movement: "DocumentTold"
    cutter: "CutterTold"
    tune: "TuneTold"
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
    inputs: "PlanInputs"
    title: str
    discs: list["PlannedDisc"]
    good_to_cut: bool
    lost_share: float
    made_at: str
    released_at: str | None
    released_by: str | None
    despite_findings: str | None
    superseded_at: str | None
    files: list["FileAnswer"]


class PlanInputs(TypedDict):
    """What a plan was made from; all is left out once the order is deleted."""

    tune_sha256: NotRequired[str]
    movement: NotRequired["MovementInput | None"]
    cutter: NotRequired["CutterInput | None"]
    settings_sha256: NotRequired[str]
    despite_findings: NotRequired[str | None]
    repeat_of: NotRequired["RepeatedPlan | None"]


class PlannedDisc(TypedDict):
    """A disc of a plan."""

    number: int
    of: int
    fingerprint: str
    layout_sha256: str
    good_to_cut: bool
    findings: "FindingCounts"
    worth: "WorthTold"
    asked_count: int
    kept_count: int
    time_s: float | None
    price: "Price | None"


class ProofLinkAnswer(TypedDict):
    """A link to a proof."""

    href: str
    revision: int


class ReleaseBody(TypedDict):
    """Who releases an order, which plan of it was seen, and why despite what stands."""

    by: str
    plan: str
    despite_findings: NotRequired[str | None]


class RepeatedPlan(TypedDict):
    """The plan whose files were made again."""

    order: str
    revision: int


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


State: TypeAlias = str


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


class TuneTold(TypedDict):
    """The tune of an order."""

    name: str | None
    sha256: str
