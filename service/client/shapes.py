"""What is sent and told. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, NotRequired, TypedDict


class AboutAnswer(TypedDict):
    """What the service is, and where things are."""

    service: str
    engine_version: str
    links: dict[str, str]


class CancelBody(TypedDict):
    """Why an order is cancelled."""

    reason: NotRequired[str | None]
    recalled: NotRequired[bool]


class CutterLine(TypedDict):
    """A cutter, in short."""

    id: str
    title: str
    kind: str
    drawn_from: str
    kerf_mm: float
    min_web_mm: float
    is_default: bool
    revision: int
    kept_by: str


class CuttersAnswer(TypedDict):
    """The cutters there are."""

    cutters: list["CutterLine"]


class DeliveriesAnswer(TypedDict):
    """Messages to a hook, the newest first; the header Link leads to the next page."""

    deliveries: list["DeliveryAnswer"]


class DeliveryAnswer(TypedDict):
    """A message to a hook, and what came of it."""

    id: str
    hook: str
    event: int | None
    message: dict[str, Any]
    state: str
    tries: int
    next_try_at: str | None
    last_status: int | None
    last_error: str | None
    created_at: str
    finished_at: str | None


class DiscAnswer(TypedDict):
    """Which disc of its set a layout is."""

    number: int
    of: int


class DocumentName(TypedDict):
    """A movement or cutter that is kept, by its id."""

    id: str
    revision: NotRequired[int | None]


class EventAnswer(TypedDict):
    """What happened to an order."""

    seq: int
    order: str
    type: str
    at: str
    by: str | None
    data: dict[str, Any]


EventType = str


class EventTypeAnswer(TypedDict):
    """A type of message."""

    type: str
    meaning: str


class EventTypesAnswer(TypedDict):
    """Every type of message there is. More may come."""

    event_types: list["EventTypeAnswer"]


class EventsAnswer(TypedDict):
    """Events, the oldest first."""

    events: list["EventAnswer"]
    last: int


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


FileRecord = dict[str, Any]


class HealthAnswer(TypedDict):
    """That the service answers."""

    status: str
    engine_version: str


class HookAnswer(TypedDict):
    """A hook."""

    id: str
    url: str
    types: list[str] | None
    for_all_orders: bool
    is_test: bool
    created_at: str
    disabled_at: str | None
    disabled_because: str | None
    quiet_until: str | None
    old_secrets_until: str | None


class HookBody(TypedDict):
    """A hook that is asked for."""

    url: str
    types: NotRequired["list[EventType] | None"]
    for_all_orders: NotRequired[bool]


class HookPatch(TypedDict):
    """What changes of a hook; what is left out stays as it is."""

    url: NotRequired[str]
    types: NotRequired["list[EventType] | None"]
    for_all_orders: NotRequired[bool]


class HooksAnswer(TypedDict):
    """The hooks there are, the oldest first."""

    hooks: list["HookAnswer"]


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


class LimitAnswer(TypedDict):
    """A limit."""

    name: str
    value: float
    unit: str
    reason: str


class LimitsAnswer(TypedDict):
    """Every limit that a request can run into."""

    limits: list["LimitAnswer"]


MadeAnswer = "LayoutAnswer | LayoutsAnswer"


class MovementLine(TypedDict):
    """A movement, in short."""

    id: str
    title: str
    revision: int
    turns: str
    revolution_s: float
    free_turn_s: float
    track_count: int
    outer_diameter_mm: float
    thickness_mm: float
    material: str
    projection: str
    kept_by: str


class MovementsAnswer(TypedDict):
    """The movements there are."""

    movements: list["MovementLine"]


class NewHookAnswer(TypedDict):
    """A hook with a new secret."""

    id: str
    url: str
    types: list[str] | None
    for_all_orders: bool
    is_test: bool
    created_at: str
    disabled_at: str | None
    disabled_because: str | None
    quiet_until: str | None
    old_secrets_until: str | None
    secret: str


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


class OrdersAnswer(TypedDict):
    """Orders; the header Link leads to the next page."""

    orders: list["OrderAnswer"]


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


class PairBody(TypedDict):
    """One tune of the archive for one movement."""

    tune: str
    movement: "DocumentName | str"
    reference: NotRequired[str | None]


class PlanAnswer(TypedDict):
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
    files: list["FileAnswer"]


class Price(TypedDict):
    """An amount of money."""

    amount: str
    currency: str


class ProblemKindAnswer(TypedDict):
    """A kind of error."""

    type: str
    title: str
    status: int
    what_to_do: str
    try_again: bool


class ProblemKindsAnswer(TypedDict):
    """Every kind of error there is. More may come."""

    problems: list["ProblemKindAnswer"]


class ProofAnswer(TypedDict):
    """What a proof shows."""

    reference: str | None
    title: str
    movement: dict[str, Any]
    revision: int
    waits_for_decision: bool
    discs: list["ProofDiscAnswer"]


class ProofDiscAnswer(TypedDict):
    """A disc as a proof shows it."""

    number: int
    of: int
    asked_count: int
    kept_count: int
    files: dict[str, str]


class ProofLinkAnswer(TypedDict):
    """A link to a proof."""

    href: str
    revision: int


class QuoteAnswer(TypedDict):
    """A price, good until a moment for an order of the same input and quantity that names it."""

    id: str
    quantity: int
    price: "Price"
    discs: list["QuotedDisc"]
    created_at: str
    valid_until: str
    links: dict[str, str]


class QuoteLine(TypedDict):
    """A line of a price, for one disc: amount = quantity × rate, rounded to the currency's smallest coin."""

    name: str
    quantity: str
    per: str
    rate: str
    amount: str


class QuotedDisc(TypedDict):
    """The price of one disc of a set."""

    number: int
    good_to_cut: bool
    lines: list["QuoteLine"]
    once: str
    each: str
    amount: str
    not_counted: list[str]


class ReadyAnswer(TypedDict):
    """That the service can serve."""

    status: str
    parts: dict[str, str]


class ReleaseBody(TypedDict):
    """Who releases an order, and why despite what stands."""

    by: str
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


class RevisionAnswer(TypedDict):
    """A revision of a document."""

    revision: int
    sha256: str
    kept_by: str
    saved_at: str | None
    saved_by: str | None
    withdrawn_at: str | None
    href: str


class RevisionsAnswer(TypedDict):
    """The revisions of a document, the newest first."""

    revisions: list["RevisionAnswer"]


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

    movements: NotRequired[list["DocumentName | str"]]
    pairs: NotRequired[list["PairBody"]]
    cutter: NotRequired["DocumentName | str | None"]
    settings: NotRequired[dict[str, Any]]
    quantity: NotRequired[int]
    reference: NotRequired[str | None]
    most_lost_share: NotRequired[float]
    release_alone: NotRequired[bool]
    hook: NotRequired[str | None]


class RunsAnswer(TypedDict):
    """A page of runs, the newest first; the header Link leads to the next."""

    runs: list["RunAnswer"]


class SavedAnswer(TypedDict):
    """A document as it was saved."""

    id: str
    revision: int
    sha256: str
    entity_tag: str
    links: dict[str, str]


Scope = str


class SecretBody(TypedDict):
    """How a secret is replaced."""

    old_valid_hours: NotRequired[int]


SheetPlanAnswer = dict[str, Any]


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


TrialPieceAnswer = dict[str, Any]


class VerdictAnswer(TypedDict):
    """What a customer said."""

    verdict: str
    revision: int


class VerdictBody(TypedDict):
    """Whether a customer accepts the disc as it was shown."""

    verdict: str
    by: str
    note: NotRequired[str | None]
