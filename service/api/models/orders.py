"""Orders, as requests ask for them and answers tell them."""

import re
from datetime import UTC, datetime
from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BeforeValidator, Field, StrictBool

from layout.documents.reading import Part
from service.orders.states import State

MOST_PAGE = 200  # orders of one page: about 600 kB of JSON
MOST_WAIT_S = 30  # s; proxies give up after 60
ORDER_ID = r"^order_[0-9a-f]{32}$"
MOST_REVISION = 2_147_483_647  # what the column holds
MOST_SEQ = 9_223_372_036_854_775_807  # so

RFC_3339 = re.compile(r"\d{4}-\d\d-\d\d[Tt ]\d\d:\d\d:\d\d(\.\d+)?([Zz]|[+-]\d\d:\d\d)?")  # the zone is asked for below


PLAN_TAG = r"^[1-9][0-9]{0,9}-[0-9a-f]{64}$"
def _one_line(text: str) -> str:
    if not text.isprintable():
        raise ValueError("it must be one line of printable characters")
    return text


def _rfc_3339(text: object) -> object:
    if isinstance(text, str) and RFC_3339.fullmatch(text) is None:
        raise ValueError("it must be a moment such as 2026-12-02T10:00:00Z (RFC 3339)")
    return text


def _with_zone(moment: datetime) -> datetime:
    if moment.tzinfo is None:
        raise ValueError("it must name its time zone, such as 2026-12-02T10:00:00Z")
    try:
        return moment.astimezone(UTC)
    except OverflowError as fault:
        raise ValueError("it must be a moment of the years 1 to 9999, also in UTC") from fault


# A schema can forbid control characters; that others cannot be printed either is checked, and told in the detail.
PRINTABLE = {"pattern": "^[^\\u0000-\\u001f\\u007f-\\u009f]*$"}
OneLine = Annotated[
    str, AfterValidator(_one_line), Field(min_length=1, max_length=200, json_schema_extra={**PRINTABLE})
]
Reason = OneLine
Instant = Annotated[datetime, BeforeValidator(_rfc_3339), AfterValidator(_with_zone)]


class DocumentName(Part):
    """A movement or cutter that is kept, by its id."""

    id: Annotated[str, Field(min_length=1, max_length=64)]
    revision: Annotated[int, Field(ge=1, le=MOST_REVISION)] | None = Field(
        default=None, description="which revision; the newest if null"
    )


class OrderBody(Part):
    """The part `order`: what is ordered beside the tune."""

    movement: DocumentName | str | None = Field(
        default=None, description="which movement; null where the part movement brings one", examples=["fernhollow-31"]
    )
    cutter: DocumentName | str | None = Field(default=None, description="which cutter; null for the default")
    settings: dict[str, Any] = Field(default_factory=dict, description="a settings document")
    quantity: Annotated[int, Field(ge=1, le=10_000)] = Field(default=1, description="copies of each disc")
    reference: OneLine | None = Field(default=None, description="the sender's own, such as an order number")
    tune_name: OneLine | None = Field(default=None, description="what the tune's file is called")
    most_lost_share: Annotated[float, Field(ge=0, le=1)] = Field(
        default=0.05, description="a person must decide where more of the tune's weight is lost than this share"
    )
    release_alone: StrictBool = Field(
        default=False,
        description="released without a person where nothing stands; needs the scope release",
    )
    quote: Annotated[str, Field(max_length=48)] | None = Field(default=None, description="the id of a quote")
    hook: Annotated[str, Field(max_length=48)] | None = Field(
        default=None, description="the id of a hook that is told of this order"
    )
    repeat_of: Annotated[str, Field(pattern=ORDER_ID)] | None = Field(
        default=None, description="a released order whose files are wanted again, byte for byte; nothing is planned"
    )


class OrdersQuery(Part):
    """Which orders are listed."""

    state: State | None = Field(default=None, description="in this state")
    reference: OneLine | None = Field(default=None, description="with this reference, exactly")
    updated_since: Instant | None = Field(default=None, description="changed at this moment or later (RFC 3339)")
    run: Annotated[str, Field(max_length=48)] | None = Field(default=None, description="of this run")
    test: bool = Field(default=False, description="orders of keys for tests, in place of the others")
    after: Annotated[str, Field(max_length=500)] | None = Field(
        default=None, description="where the page begins: from the header Link of the page before"
    )
    limit: Annotated[int, Field(ge=1, le=MOST_PAGE)] = Field(default=50, description="how many orders at most")


class EventsQuery(Part):
    """Which events are listed."""

    after: Annotated[int, Field(ge=0, le=MOST_SEQ)] = Field(default=0, description="events past this number alone")
    limit: Annotated[int, Field(ge=1, le=1000)] = Field(default=200, description="how many events at most")
    test: bool = Field(default=False, description="events of orders for tests, in place of the others")


class FileQuery(Part):
    """How a file of a plan is asked for."""

    superseded: Literal["yes"] | None = Field(
        default=None, description="yes: also where the plan is superseded and not to be cut any more"
    )


class ReleaseBody(Part):
    """Who releases an order, which plan of it was seen, and why despite what stands."""

    by: OneLine = Field(description="the person who decided", examples=["A. Maker"])
    despite_findings: Reason | None = Field(
        default=None, description="why it shall be cut although a person had to decide", examples=["a test cut"]
    )


class ReplanBody(Part):
    """What is asked for anew; what is left out stays as it was."""

    movement_revision: Annotated[int, Field(ge=1, le=MOST_REVISION)] | None = Field(
        default=None, description="a revision of the order's movement"
    )
    settings: dict[str, Any] | None = Field(default=None, description="a settings document in place of the old one")
    most_lost_share: Annotated[float, Field(ge=0, le=1)] | None = None


class CancelBody(Part):
    """Why an order is cancelled."""

    reason: OneLine | None = None
    recalled: StrictBool = Field(default=False, description="the shop has called back the released files")


class ReportBody(Part):
    """What the shop says of a released order."""
    plan: Annotated[str, Field(pattern=PLAN_TAG)] = Field(
        description="the tag of the plan that the person has seen, as the order tells it; no other is released"
    )

    what: Literal["taken", "cut", "scrapped", "measured"]
    count: Annotated[int, Field(ge=0, le=1_000_000)] | None = Field(default=None, description="how many discs")
    note: Annotated[str, Field(max_length=500)] | None = None
    measures: dict[Annotated[str, Field(max_length=60)], float] = Field(
        default_factory=dict, description="what was measured, named with its unit", examples=[{"tab_width_mm": 1.19}]
    )


class FileAnswer(Part):
    """A file of a plan."""

    disc: int
    name: str
    sha256: str
    byte_count: int
    media_type: str
    saved_as: str
    for_cutting: bool = Field(description="given only after release")
    href: str | None = Field(description="where it is; null while it is kept back")


class PlanAnswer(Part):
    """A plan: what was made for an order."""

    revision: int
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
    files: list[FileAnswer]


class OrderAnswer(Part):
    """An order."""

    id: str
    state: str = Field(description="more states may come; a client waits on those it does not know")
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
    plan: PlanAnswer | None
    superseded_revisions: list[int]
    links: dict[str, str]


class OrdersAnswer(Part):
    """Orders; the header Link leads to the next page."""

    orders: list[OrderAnswer]


class EventAnswer(Part):
    """What happened to an order."""

    seq: int
    order: str
    type: str
    at: str
    by: str | None
    data: dict[str, Any]


class EventsAnswer(Part):
    """Events, the oldest first."""

    events: list[EventAnswer]
    last: int = Field(description="the number to ask on after")
    tag: str | None = Field(
        description="names this plan, by its revision and its files: a release says it; null where they were deleted"
    )
