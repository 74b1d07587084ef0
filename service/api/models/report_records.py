"""What report.json and making.json hold, as answers tell them."""

from typing import Literal

from pydantic import Field, RootModel

from layout.documents.reading import Part
from service.api.models.records import DiscAnswer, LayoutRecord, OfADisc


class TallyTold(Part):
    """What is kept of some notes, and what that cost."""

    note_count: int
    kept_count: int
    asked_weight: int
    kept_weight: int
    kept_share: float | None = Field(description="null where there is nothing to share")
    octave_count: int
    nudged_count: int
    largest_nudge_ms: float
    mean_nudge_ms: float
    covered_count: int
    left_out: dict[str, int] = Field(description="how many by reason")


class BarLossTold(Part):
    """What a bar loses."""

    bar: int
    start_s: float
    note_count: int
    lost_count: int
    asked_weight: int
    lost_weight: int
    lost_share: float


class TriedTold(Part):
    """A transposition and speed that was tried."""

    semitones: int
    speed_factor: float
    kept: int | None = Field(description="of its best arrangement; null where only the bound was found")
    bound: int


class TransposedTold(Part):
    """A transposition that was searched, whatever the speed."""

    semitones: int
    kept: int | None = Field(description="the most that an arrangement found keeps; null where none was made")
    bound: int = Field(description="no arrangement keeps more at this transposition")


class LoadedTold(Part):
    """A track that loads the drive, with its pitch."""

    track: int
    pitch: str


class LoadTold(Part):
    """The greatest load of the drive."""

    peak_nmm: float
    limit_nmm: float | None
    share_of_limit: float | None
    at_s: float
    chord: list[LoadedTold]


class StartTold(Part):
    """How the disc comes to its speed."""

    inertia_kg_m2: float
    time_constant_s: float
    to_speed_s: float
    to_speed_deg: float
    to_speed_at_fastest_deg: float | None
    before_music_deg: float
    at_least: bool


class OverTheTurnTold(Part):
    """The torque over the turn, as two rows of numbers."""

    at_s: list[float]
    torque_nmm: list[float]


class TorqueTold(Part):
    """The torque that the disc takes."""

    peak_nmm: float
    limit_nmm: float | None
    at_s: float
    chord: list[LoadedTold]
    mean_nmm: float
    over_the_turn: OverTheTurnTold


class WindingTold(Part):
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


class RevolutionTold(Part):
    """How long a revolution takes."""

    stated_s: float
    by_brake_and_train_s: float | None


class ClearingTold(Part):
    """How many tracks need a turn to clear."""

    track_count: int


class DriveTold(Part):
    """What the drive makes of the disc; what is not known is null."""

    start: StartTold | None
    torque: TorqueTold | None
    winding: WindingTold | None
    revolution: RevolutionTold
    clearing_turn: ClearingTold
    not_stated: list[str] = Field(description="fields of the movement that are needed to know more")


class LineLeftTold(Part):
    """The metal left along a line through the centre."""

    left_mm: float
    share: float
    angle_deg: float
    least_share: float | None


class RingLeftTold(Part):
    """The metal left along a ring."""

    left_mm: float
    share: float
    radius_mm: float
    least_share: float | None


class NetSectionTold(Part):
    """The metal that the openings leave."""

    from_mm: float
    to_mm: float
    line: LineLeftTold
    ring: RingLeftTold


class DepthTold(Part):
    """How deep a projection stands, and how flat the disc must be."""

    depth_mm: float
    plus_minus_mm: float
    flatness_mm: float
    least_mm: float
    most_mm: float
    flatness_limit_mm: float | None
    ended_by: str | None


class TrackTold(Part):
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


class ReportRecord(OfADisc):
    """report.json: what a disc keeps of its tune and what that cost. Fields may come, none is renamed."""

    format: Literal["discwright-report/1"]
    projection_count: int
    extra_pluck_count: int
    total: TallyTold
    highest: TallyTold
    lowest: TallyTold
    inner: TallyTold
    melody: TallyTold | None
    not_asked: dict[str, int] = Field(description="how many notes by reason")
    worst_bars: list[BarLossTold]
    tried: list[TriedTold]
    transpositions: list[TransposedTold]
    load: LoadTold | None
    no_load_because: str | None
    drive: DriveTold
    net_section: NetSectionTold | None
    depth: DepthTold | None
    tracks: list[TrackTold]


class ToolWorkTold(Part):
    """What a press tool does."""

    tool: str
    hit_count: int
    hit_force_n: float | None
    press_force_n: float | None


class PriceLineTold(Part):
    """A line of the price; its numbers are decimal text."""

    name: str
    quantity: str
    per: str
    rate: str
    amount: str


class MakingRecord(Part):
    """making.json: what making a disc takes; what cannot be told is null. Fields may come, none is renamed."""

    format: Literal["discwright-making/1"]
    fingerprint: str
    engine_version: str
    disc: DiscAnswer
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
    tools: list[ToolWorkTold]
    fold_to_deg: float | None
    blank_mass_kg: float | None
    disc_mass_kg: float | None
    time_s: float | None
    time_parts: dict[str, float | None] = Field(description="seconds, by what takes them")
    currency: str | None
    currency_decimals: int | None
    price_lines: list[PriceLineTold]
    total: str | None
    not_stated: list[str]
    not_counted: list[str]


class FileRecord(RootModel[LayoutRecord | ReportRecord | MakingRecord]):
    """A file that is JSON; its member `format` says which."""
