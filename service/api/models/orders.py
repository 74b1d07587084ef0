"""Orders, as requests ask for them and answers tell them."""

import re
from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BeforeValidator, Discriminator, Field, StrictBool, Tag, TypeAdapter

from layout.documents import Settings
from layout.documents.reading import Part
from service.api.models.documents import Described
from service.api.models.messages import EventData
from service.api.models.quotes import Price
from service.api.models.records import CutterTold, DiscAnswer, DocumentTold, WorthTold
from service.orders.states import State

MOST_PAGE = 200  # orders of one page: about 600 kB of JSON
MOST_COPIES = 10_000  # of each disc of an order: a workshop's whole year, and a slip of the hand is told
MOST_LINE_CHARACTERS = 200  # of a name, a reference or a reason: one line that fits on a work sheet and in a list
MOST_WAIT_S = 30  # s; proxies give up after 60
ORDER_ID = r"^order_[0-9a-f]{32}$"
PLAN_TAG = r"^[1-9][0-9]{0,9}-[0-9a-f]{64}$"
MOST_REVISION = 2_147_483_647  # what the column holds
MOST_SEQ = 9_223_372_036_854_775_807  # so

RFC_3339 = re.compile(r"\d{4}-\d\d-\d\d[Tt ]\d\d:\d\d:\d\d(\.\d+)?([Zz]|[+-]\d\d:\d\d)?")  # the zone is asked for below


def _one_line(text: str) -> str:
    if not text.isprintable():
        raise ValueError("it must be one line of printable characters")
    return text


def _rfc_3339(text: object) -> datetime:
    if not isinstance(text, str) or RFC_3339.fullmatch(text) is None:
        raise ValueError("it must be a moment such as 2026-12-02T10:00:00Z (RFC 3339)")
    return TypeAdapter(datetime).validate_strings(text)


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
    str,
    AfterValidator(_one_line),
    Field(min_length=1, max_length=MOST_LINE_CHARACTERS, json_schema_extra={**PRINTABLE}),
]
Reason = OneLine
Instant = Annotated[datetime, BeforeValidator(_rfc_3339), AfterValidator(_with_zone)]


class DocumentName(Part):
    """A movement or cutter that is kept, by its id."""

    id: Annotated[str, Field(min_length=1, max_length=64)]
    revision: Annotated[int, Field(ge=1, le=MOST_REVISION)] | None = Field(
        default=None, description="which revision; the newest if null"
    )


# Words that tell the two ways to name a document apart; they stand in places of faults, and in no document.
BY_ID, WITH_REVISION = "named by its id", "named with its revision"
NAMING_TAGS = frozenset({BY_ID, WITH_REVISION})


def _way_of_naming(value: object) -> str:
    return WITH_REVISION if isinstance(value, Mapping | DocumentName) else BY_ID


Named = Annotated[
    Annotated[str, Tag(BY_ID)] | Annotated[DocumentName, Tag(WITH_REVISION)], Discriminator(_way_of_naming)
]


# Read by `read_settings`, as the part of that name is.
SettingsBrought = Annotated[dict[str, Any], Described(Settings)]


class OrderBody(Part):
    """The part `order`: what is ordered beside the tune."""

    movement: Named | None = Field(
        default=None, description="which movement; null where the part movement brings one", examples=["fernhollow-31"]
    )
    cutter: Named | None = Field(default=None, description="which cutter; null for the default")
    settings: SettingsBrought = Field(default_factory=dict, description="a settings document")
    quantity: Annotated[int, Field(ge=1, le=MOST_COPIES)] = Field(default=1, description="copies of each disc")
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
    plan: Annotated[str, Field(pattern=PLAN_TAG)] = Field(
        description="the tag of the plan that the person has seen, as the order tells it; no other is released"
    )
    despite_findings: Reason | None = Field(
        default=None, description="why it shall be cut although a person had to decide", examples=["a test cut"]
    )


class ReplanBody(Part):
    """What is asked for anew; what is left out stays as it was."""

    movement_revision: Annotated[int, Field(ge=1, le=MOST_REVISION)] | None = Field(
        default=None, description="a revision of the order's movement"
    )
    settings: SettingsBrought | None = Field(default=None, description="a settings document in place of the old one")
    most_lost_share: Annotated[float, Field(ge=0, le=1)] | None = None


class CancelBody(Part):
    """Why an order is cancelled."""

    reason: OneLine | None = None
    recalled: StrictBool = Field(default=False, description="the shop has called back the released files")


class ReportBody(Part):
    """What the shop says of a released order."""

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


class MovementInput(DocumentTold):
    """The movement that a plan was made with."""

    sha256: str = Field(description="of its text")


class CutterInput(CutterTold):
    """The cutter that a plan was made with."""

    sha256: str = Field(description="of its text")


class RepeatedPlan(Part):
    """The plan whose files were made again."""

    order: str
    revision: int


class PlanInputs(Part):
    """What a plan was made from; all is left out once the order is deleted."""

    tune_sha256: str = ""
    movement: MovementInput | None = None
    cutter: CutterInput | None = None
    settings_sha256: str = ""
    despite_findings: str | None = None
    repeat_of: RepeatedPlan | None = Field(default=None, description="left out where the plan was made for this order")


class FindingCounts(Part):
    """How many findings there are of each level."""

    error: int
    warning: int
    advice: int


class PlannedDisc(DiscAnswer):
    """A disc of a plan."""

    fingerprint: str
    layout_sha256: str = Field(description="of all that was laid out and found, whatever reason it is cut for")
    good_to_cut: bool
    findings: FindingCounts
    worth: WorthTold
    asked_count: int = Field(description="notes that the tune asks for")
    kept_count: int = Field(description="notes that the disc plays")
    time_s: float | None = Field(description="to make it; null where the documents do not say")
    price: Price | None


class TuneTold(Part):
    """The tune of an order."""

    name: str | None
    sha256: str = Field(description='"" once it is deleted')


class PlanAnswer(Part):
    """A plan: what was made for an order."""

    revision: int
    tag: str | None = Field(
        description="names this plan, by its revision and its files: a release says it; null where they were deleted"
    )
    engine_version: str
    inputs: PlanInputs
    title: str
    discs: list[PlannedDisc]
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
    movement: DocumentTold
    cutter: CutterTold
    tune: TuneTold
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
    data: EventData


class EventsAnswer(Part):
    """Events, the oldest first."""

    events: list[EventAnswer]
    last: int = Field(description="the number to ask on after")
