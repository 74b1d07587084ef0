"""What reporting gives: an arrangement counted out, by voice, bar and track.

*Asked notes* are those with a weight above 0: notes outside the passage, ruled out or past the turn
are not asked for, and are counted apart. Each asked note is of one voice: the *top line* (highest
at its onset), the *bass* (lowest, and not highest) or *inner* (neither).
"""

from dataclasses import dataclass

from layout.arrange.arrangement import LeftOutReason, Transposed, Tried, Worth
from layout.mechanics.depth import DepthBand
from layout.mechanics.net_section import MetalLeft
from layout.mechanics.starting import Starting
from layout.mechanics.tolerances import PlaceError
from layout.mechanics.torque import TurnTorque
from layout.mechanics.winding import WindingRun


@dataclass(frozen=True, slots=True, kw_only=True)
class Tally:
    """What became of the asked notes of one voice, or of all. All counts are of notes.

    Attributes:
        note_count: Asked.
        kept_count: Played, those covered included.
        asked_weight: Weight of the notes asked.
        kept_weight: Weight of the notes kept, each whole. What a note is worth less as it is placed
            (moved by an octave, on a ringing tooth) is told by the arrangement's worth alone.
        octave_count: Kept, but moved by octaves.
        nudged_count: Kept, but sounding more than a microsecond off the moment asked for.
        largest_nudge_ms: Greatest size of those nudges; 0.0 where there are none.
        mean_nudge_ms: Their mean size; 0.0 where there are none.
        covered_count: Kept by a pluck that plays another note too: all but the first of its notes.
        left_out: How many are not played, by reason, in the order of the reasons' names.
    """

    note_count: int
    kept_count: int
    asked_weight: int
    kept_weight: int
    octave_count: int
    nudged_count: int
    largest_nudge_ms: float
    mean_nudge_ms: float
    covered_count: int
    left_out: tuple[tuple[LeftOutReason, int], ...]

    @property
    def kept_share(self) -> float | None:
        """Share of the weight that is kept; None where nothing is asked."""
        return self.kept_weight / self.asked_weight if self.asked_weight else None


@dataclass(frozen=True, slots=True, kw_only=True)
class BarLoss:
    """A bar that loses notes.

    Attributes:
        bar: Its number, from 1.
        start_s: Where it starts in the tune's own time.
        note_count: Notes asked.
        lost_count: Of them left out.
        asked_weight: Weight of the notes asked; above 0.
        lost_weight: Of those left out; above 0.
    """

    bar: int
    start_s: float
    note_count: int
    lost_count: int
    asked_weight: int
    lost_weight: int

    @property
    def lost_share(self) -> float:
        """Share of the bar's weight that is lost, above 0, at most 1."""
        return self.lost_weight / self.asked_weight


@dataclass(frozen=True, slots=True, kw_only=True)
class TrackTiming:
    """How far off its moment a track may sound, by what cutter and movement state, and by nudges.

    Attributes:
        track: Number, from 1.
        radius_mm: Of the track.
        pluck_count: Its plucks, extra ones included.
        error: Each part of the error, and what states it.
        largest_nudge_ms: Greatest size of a nudge on the track; 0.0 where there is none.
    """

    track: int
    radius_mm: float
    pluck_count: int
    error: PlaceError
    largest_nudge_ms: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Loaded:
    """A track that is plucked at the moment of the greatest load.

    Attributes:
        track: Number, from 1.
        pitch: What sounds.
    """

    track: int
    pitch: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PeakLoad:
    """The moment at which the teeth load the disc most.

    Attributes:
        peak_nmm: Torque of the teeth lifted.
        limit_nmm: The drive's limit; None where the movement states none.
        at_s: From the start of the music on the disc.
        chord: Whose teeth are lifted, in the order of the plucks.
    """

    peak_nmm: float
    limit_nmm: float | None
    at_s: float
    chord: tuple[Loaded, ...]

    @property
    def share_of_limit(self) -> float | None:
        """The peak over the limit, above 1 where it is too much; None where there is no limit."""
        return None if self.limit_nmm is None else self.peak_nmm / self.limit_nmm


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Driving:
    """What drives the disc, and how it turns. Each part is None where what it needs is not stated.

    Attributes:
        starting: From rest to speed at the stated turn.
        starting_fastest: The same at the fastest turn.
        torque: Of the teeth over a whole turn; None for no plucks too.
        peak_chord: Whose teeth are lifted at its peak; () where there is none.
        winding: One winding run down with this disc.
        upper_bound: Whether the winding leaves something aside that is not stated, so that turns and torques are
            at most, and losses of speed at least, what is told.
        braked_revolution_s: Seconds a turn by air brake and train.
        clearing_count: Tracks used: on each the first note may be early or lost where its star wheel stands
            part-turned after a change of disc, so that a turn to clear them does good; 0 for no plucks.
        not_stated: Names of the fields of the movement that would be needed for the rest.
    """

    starting: Starting | None
    starting_fastest: Starting | None
    torque: TurnTorque | None
    peak_chord: tuple[Loaded, ...]
    winding: WindingRun | None
    upper_bound: bool
    braked_revolution_s: float | None
    clearing_count: int
    not_stated: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Report:
    """What a disc keeps of its tune, and what that cost.

    Attributes:
        total: All asked notes.
        highest: Those of the top line.
        lowest: Those of the bass.
        inner: The others.
        melody: Those of the lead channel; None where no lead channel sets the melody apart from the top line.
        not_asked: How many notes were not asked for, by reason, in the order of the reasons' names.
        projection_count: Plucks of the disc, extra ones included.
        extra_pluck_count: Plucks that repeat or double a note played already.
        worth: The weight kept, against the most that could be kept.
        tried: The best transpositions and speeds, best first, at most five.
        transpositions: Every transposition searched that is not known to be impossible, the lowest first.
        worst_bars: At most five bars that lose the most weight, the greatest loss first, then by bar.
        tracks: The timing of every track used, the innermost first.
        metal_left: The least metal the openings leave; None where there are none.
        load: The greatest load; None where there is none to tell.
        no_load_because: Why there is none; None where there is one.
        drive: What drives the disc, and how it turns.
        depth: How deep the projections stand, and what flatness does to it; None for slots.
    """

    total: Tally
    highest: Tally
    lowest: Tally
    inner: Tally
    melody: Tally | None
    not_asked: tuple[tuple[LeftOutReason, int], ...]
    projection_count: int
    extra_pluck_count: int
    worth: Worth
    tried: tuple[Tried, ...]
    transpositions: tuple[Transposed, ...]
    worst_bars: tuple[BarLoss, ...]
    tracks: tuple[TrackTiming, ...]
    metal_left: MetalLeft | None
    load: PeakLoad | None
    no_load_because: str | None
    drive: Driving
    depth: DepthBand | None
