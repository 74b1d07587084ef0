"""What layout.json holds, as answers tell it, and what the other records of a disc share with it."""

from typing import Literal

from pydantic import Field

from layout.documents.reading import Part


class DocumentTold(Part):
    """A movement, by its id and revision."""

    id: str = Field(examples=["fernhollow-31"])
    revision: int


class CutterTold(Part):
    """A cutter, by its id."""

    id: str = Field(examples=["fibre-laser"])


class DiscAnswer(Part):
    """Which disc of its set it is."""

    number: int = Field(description="from 1")
    of: int


class WorthTold(Part):
    """How much of the tune's weight is kept, and how much could be."""

    kept: int
    bound: int = Field(description="no disc keeps more than this")
    proved: bool = Field(description="whether it is proved that no disc keeps more")
    stopped: str | None = Field(description="what ended the search too early: time, or a count; null where nothing did")


class PlaceTold(Part):
    """Where on the disc, or on which; what does not apply is left out."""

    tracks: list[int] = Field(default=[], description="from 1")
    projections: list[int] = Field(default=[], description="their places in the list of projections, from 0")
    radius_mm: float = Field(default=0.0, description="from the centre")
    angle_deg: float = Field(default=0.0, description="seen from the label side")
    sounds_s: float = Field(default=0.0, description="the moment of the music")
    disc: str = Field(default="", description="the id of a disc that found no place on a sheet")


class FindingTold(Part):
    """One thing that is wrong, or near to wrong."""

    code: str = Field(description="what; more may come", examples=["web_too_thin"])
    level: str = Field(description="error, warning or advice; an error keeps the cutting files back")
    message: str
    measured: float | None = Field(description="the number found; null where nothing is measured")
    limit: float | None = Field(description="what it is held against; null where there is nothing")
    unit: str
    at: PlaceTold
    remedy: str = Field(description="what a person can do about it")


class OfADisc(Part):
    """What layout.json and report.json begin with."""

    title: str
    fingerprint: str
    disc: DiscAnswer
    good_to_cut: bool
    movement: DocumentTold
    cutter: CutterTold
    engine_version: str
    transposed_semitones: int
    speed_factor: float
    from_s: float = Field(description="where in the tune the disc begins")
    worth: WorthTold


class ReadTold(Part):
    """What was read of the MIDI file."""

    midi_format: int
    sequence: int
    sequence_count: int
    note_count: int
    percussion_count: int
    warnings: list[str]


class BarTold(Part):
    """A bar, and when it starts."""

    bar: int
    start_s: float


class NoteTold(Part):
    """A note of the tune, as it was read."""

    note: int = Field(description="its number, from 0")
    onset_s: float
    duration_s: float
    pitch: str
    velocity: int
    channel: int
    weight: int = Field(description="0: not asked for")
    voice: str | None = Field(description="highest, lowest or inner; null: not asked for")
    melody: bool


class ProjectionTold(Part):
    """A projection of the disc."""

    track: int
    teeth: list[int]
    pitch: str
    radius_mm: float
    angle_deg: float = Field(description="of its working edge, seen from the label side")
    asked_s: float
    sounds_s: float
    octave_semitones: int = Field(description="by how much it plays another octave than asked")
    notes: list[int] = Field(description="the notes that it plays")
    again_of: int = Field(default=0, description="the note that is plucked again; left out where it is no extra pluck")


class LeftOutTold(Part):
    """A note that the disc does not play."""

    note: int
    reason: str


class LayoutRecord(OfADisc):
    """layout.json: the record of a disc. Fields may come, none is renamed."""

    format: Literal["discwright-layout/1"]
    despite_findings: str | None = Field(description="why it is cut although an error stands")
    read: ReadTold
    revolution_s: float
    turns: str
    drawn_from: str
    bars: list[BarTold]
    notes: list[NoteTold]
    projections: list[ProjectionTold]
    left_out: list[LeftOutTold]
    findings: list[FindingTold]
