"""What is sent and told: records. Written by generate.py from the API document; not to be changed by hand."""

from typing import NotRequired, TypedDict


class BarTold(TypedDict):
    """A bar, and when it starts."""

    bar: int
    start_s: float


class CutterTold(TypedDict):
    """A cutter, by its id."""

    id: str


class DiscAnswer(TypedDict):
    """Which disc of its set it is."""

    number: int
    of: int


class DocumentTold(TypedDict):
    """A movement, by its id and revision."""

    id: str
    revision: int


class FindingTold(TypedDict):
    """One thing that is wrong, or near to wrong."""

    code: str
    level: str
    message: str
    measured: float | None
    limit: float | None
    unit: str
    at: "PlaceTold"
    remedy: str


class LayoutRecord(TypedDict):
    """layout.json: the record of a disc. Fields may come, none is renamed."""

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
    despite_findings: str | None
    read: "ReadTold"
    revolution_s: float
    turns: str
    drawn_from: str
    bars: list["BarTold"]
    notes: list["NoteTold"]
    projections: list["ProjectionTold"]
    left_out: list["LeftOutTold"]
    findings: list["FindingTold"]


class LeftOutTold(TypedDict):
    """A note that the disc does not play."""

    note: int
    reason: str


class NoteTold(TypedDict):
    """A note of the tune, as it was read."""

    note: int
    onset_s: float
    duration_s: float
    pitch: str
    velocity: int
    channel: int
    weight: int
    voice: str | None
    melody: bool


class PlaceTold(TypedDict):
    """Where on the disc, or on which; what does not apply is left out."""

    tracks: NotRequired[list[int]]
    projections: NotRequired[list[int]]
    radius_mm: NotRequired[float]
    angle_deg: NotRequired[float]
    sounds_s: NotRequired[float]
    disc: NotRequired[str]


class ProjectionTold(TypedDict):
    """A projection of the disc."""

    track: int
    teeth: list[int]
    pitch: str
    radius_mm: float
    angle_deg: float
    asked_s: float
    sounds_s: float
    octave_semitones: int
    notes: list[int]
    again_of: NotRequired[int]


class ReadTold(TypedDict):
    """What was read of the MIDI file."""

    midi_format: int
    sequence: int
    sequence_count: int
    note_count: int
    percussion_count: int
    warnings: list[str]


class WorthTold(TypedDict):
    """How much of the tune's weight is kept, and how much could be."""

    kept: int
    bound: int
    proved: bool
    stopped: str | None
