"""What is sent and told: common. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, NotRequired, TypeAlias, TypedDict

from service.client.shapes.records import CutterTold, DiscAnswer, DocumentTold, LayoutRecord, WorthTold


class BarLossTold(TypedDict):
    """What a bar loses."""

    bar: int
    start_s: float
    note_count: int
    lost_count: int
    asked_weight: int
    lost_weight: int
    lost_share: float


class ClearingTold(TypedDict):
    """How many tracks need a turn to clear."""

    track_count: int


class DepthTold(TypedDict):
    """How deep a projection stands, and how flat the disc must be."""

    depth_mm: float
    plus_minus_mm: float
    flatness_mm: float
    least_mm: float
    most_mm: float
    flatness_limit_mm: float | None
    ended_by: str | None


class DocumentName(TypedDict):
    """A movement or cutter that is kept, by its id."""

    id: str
    revision: NotRequired[int | None]


class DriveTold(TypedDict):
    """What the drive makes of the disc; what is not known is null."""

    start: "StartTold | None"
    torque: "TorqueTold | None"
    winding: "WindingTold | None"
    revolution: "RevolutionTold"
    clearing_turn: "ClearingTold"
    not_stated: list[str]


class EventData(TypedDict):
    """What an event tells beside; what does not apply to its type is left out, and after a deletion all is."""

    revision: NotRequired[int]
    state: NotRequired[str]
    reason: NotRequired[str | None]
    reference: NotRequired[str | None]
    movement: NotRequired["DocumentTold | None"]
    repeat_of: NotRequired[str]
    despite_findings: NotRequired[str | None]
    recalled: NotRequired[bool]
    count: NotRequired[int | None]
    note: NotRequired[str | None]
    measures: NotRequired[dict[str, float]]


FileRecord: TypeAlias = "LayoutRecord | ReportRecord | MakingRecord"


class LineLeftTold(TypedDict):
    """The metal left along a line through the centre."""

    left_mm: float
    share: float
    angle_deg: float
    least_share: float | None


class LoadTold(TypedDict):
    """The greatest load of the drive."""

    peak_nmm: float
    limit_nmm: float | None
    share_of_limit: float | None
    at_s: float
    chord: list["LoadedTold"]


class LoadedTold(TypedDict):
    """A track that loads the drive, with its pitch."""

    track: int
    pitch: str


class MakingRecord(TypedDict):
    """making.json: what making a disc takes; what cannot be told is null. Fields may come, none is renamed."""

    format: str
    fingerprint: str
    engine_version: str
    disc: "DiscAnswer"
    order_number: str | None
    cut_length_mm: float | None
    mark_length_mm: float | None
    rapid_length_mm: float | None
    pierce_count: int | None
    hit_count: int | None
    hit_force_n: float | None
    stripping_force_n: float | None
    press_force_n: float | None
    tool_change_count: int | None
    tools: list["ToolWorkTold"]
    fold_to_deg: float | None
    blank_mass_kg: float | None
    disc_mass_kg: float | None
    time_s: float | None
    time_parts: dict[str, float | None]
    currency: str | None
    currency_decimals: int | None
    price_lines: list["PriceLineTold"]
    total: str | None
    not_stated: list[str]
    not_counted: list[str]


class NetSectionTold(TypedDict):
    """The metal that the openings leave."""

    from_mm: float
    to_mm: float
    line: "LineLeftTold"
    ring: "RingLeftTold"


class OrderBody(TypedDict):
    """The part `order`: what is ordered beside the tune."""

    movement: NotRequired["str | DocumentName | None"]
    cutter: NotRequired["str | DocumentName | None"]
    settings: NotRequired[dict[str, Any]]
    quantity: NotRequired[int]
    reference: NotRequired[str | None]
    tune_name: NotRequired[str | None]
    most_lost_share: NotRequired[float]
    release_alone: NotRequired[bool]
    quote: NotRequired[str | None]
    hook: NotRequired[str | None]
    repeat_of: NotRequired[str | None]


class OverTheTurnTold(TypedDict):
    """The torque over the turn, as two rows of numbers."""

    at_s: list[float]
    torque_nmm: list[float]


class Price(TypedDict):
    """An amount of money."""

    amount: str
    currency: str


class PriceLineTold(TypedDict):
    """A line of the price; its numbers are decimal text."""

    name: str
    quantity: str
    per: str
    rate: str
    amount: str


class ReportRecord(TypedDict):
    """report.json: what a disc keeps of its tune and what that cost. Fields may come, none is renamed."""

    title: str
    fingerprint: str
    disc: "DiscAnswer"
    good_to_cut: bool
    movement: "DocumentTold"
    cutter: "CutterTold"
    engine_version: str
    transposed_semitones: int
    speed_factor: float
    from_s: float
    worth: "WorthTold"
    format: str
    projection_count: int
    extra_pluck_count: int
    total: "TallyTold"
    highest: "TallyTold"
    lowest: "TallyTold"
    inner: "TallyTold"
    melody: "TallyTold | None"
    not_asked: dict[str, int]
    worst_bars: list["BarLossTold"]
    tried: list["TriedTold"]
    transpositions: list["TransposedTold"]
    load: "LoadTold | None"
    no_load_because: str | None
    drive: "DriveTold"
    net_section: "NetSectionTold | None"
    depth: "DepthTold | None"
    tracks: list["TrackTold"]


class RevolutionTold(TypedDict):
    """How long a revolution takes."""

    stated_s: float
    by_brake_and_train_s: float | None


class RingLeftTold(TypedDict):
    """The metal left along a ring."""

    left_mm: float
    share: float
    radius_mm: float
    least_share: float | None


class StartTold(TypedDict):
    """How the disc comes to its speed."""

    inertia_kg_m2: float
    time_constant_s: float
    to_speed_s: float
    to_speed_deg: float
    to_speed_at_fastest_deg: float | None
    before_music_deg: float
    at_least: bool


class TallyTold(TypedDict):
    """What is kept of some notes, and what that cost."""

    note_count: int
    kept_count: int
    asked_weight: int
    kept_weight: int
    kept_share: float | None
    octave_count: int
    nudged_count: int
    largest_nudge_ms: float
    mean_nudge_ms: float
    covered_count: int
    left_out: dict[str, int]


class ToolWorkTold(TypedDict):
    """What a press tool does."""

    tool: str
    hit_count: int
    hit_force_n: float | None
    press_force_n: float | None


class TorqueTold(TypedDict):
    """The torque that the disc takes."""

    peak_nmm: float
    limit_nmm: float | None
    at_s: float
    chord: list["LoadedTold"]
    mean_nmm: float
    over_the_turn: "OverTheTurnTold"


class TrackTold(TypedDict):
    """A track, and how far its plucks may be off."""

    track: int
    radius_mm: float
    pluck_count: int
    position_mm: float | None
    placed_by: str | None
    no_class_because: str | None
    position_ms: float | None
    angle_ms: float | None
    play_ms: float | None
    depth_ms: float | None
    together_ms: float | None
    root_square_ms: float | None
    engagement_mm: float | None
    largest_nudge_ms: float


class TransposedTold(TypedDict):
    """A transposition that was searched, whatever the speed."""

    semitones: int
    kept: int | None
    bound: int


class TriedTold(TypedDict):
    """A transposition and speed that was tried."""

    semitones: int
    speed_factor: float
    kept: int | None
    bound: int


class WindingTold(TypedDict):
    """How far one winding carries."""

    full_nmm: float
    spent_nmm: float
    needed_nmm: float
    turns: float
    ended_by: str
    upper_bound: bool
    last_turn_slows_share: float | None
    winding_slows_share: float | None
    first_revolution_s: float | None
    last_revolution_s: float | None
