"""What checking gives: findings, each with its number, its limit, its place and its remedy."""

from dataclasses import dataclass
from enum import StrEnum
from typing import Any


class Level(StrEnum):
    """How much a finding matters: an error keeps the cutting files back."""

    ERROR = "error"
    WARNING = "warning"
    ADVICE = "advice"


class Code(StrEnum):
    """What was found. The text goes to layout.json and the API as it is."""

    NOTHING_TO_PLAY = "nothing-to-play"
    MUSIC_TOO_LONG = "music-too-long"
    WEB_TOO_THIN = "web-too-thin"
    WEB_TO_RIM = "web-to-rim"
    WEB_TO_CENTRE_HOLE = "web-to-centre-hole"
    WEB_TO_FEATURE = "web-to-feature"
    IN_KEEP_OUT = "in-keep-out"
    TRACK_OFF_DISC = "track-off-disc"
    REPEAT_TOO_SOON = "repeat-too-soon"
    DAMPER_NOT_RECOVERED = "damper-not-recovered"
    REST_NOT_CLEAR = "rest-not-clear"
    PLUCK_OUTSIDE_MUSIC = "pluck-outside-music"
    STAR_HITS_DISC = "star-hits-disc"
    STAR_NOT_REACHED = "star-not-reached"
    STEP_TOO_SHORT = "step-too-short"
    STEP_TOO_LONG = "step-too-long"
    TIP_IN_BEND = "tip-in-bend"
    DEPTH_AT_ROOT = "depth-at-root"
    TOOTH_LEFT_HANGING = "tooth-left-hanging"
    NEIGHBOUR_FOULED = "neighbour-fouled"
    OWN_STAR_MISSED = "own-star-missed"
    CANNOT_FORM = "cannot-form"
    NO_TOOL = "no-tool"
    SLIT_TOO_NARROW = "slit-too-narrow"
    HOLE_TOO_SMALL = "hole-too-small"
    MARGIN_UNSURE = "margin-unsure"
    # as a real part: strength, forming, cutting
    LINE_CUT_THROUGH = "line-cut-through"
    RING_CUT_THROUGH = "ring-cut-through"
    SMALL_FOR_SHEET = "small-for-sheet"
    BEND_TOO_TIGHT = "bend-too-tight"
    FOLDS_ALONG_ROLLING = "folds-along-rolling"
    KERF_CLOSES = "kerf-closes"
    LEAD_HAS_NO_ROOM = "lead-has-no-room"
    BRIDGE_HAS_NO_ROOM = "bridge-has-no-room"
    BRIDGE_ON_FIT = "bridge-on-fit"
    HIT_OVER_OPENING = "hit-over-opening"
    FOOT_ON_FORMED = "foot-on-formed"
    PRESS_TOO_WEAK = "press-too-weak"
    LABEL_HIDDEN = "label-hidden"
    LABEL_MISSING = "label-missing"
    # timing and drive
    TIMING_TOO_COARSE = "timing-too-coarse"
    START_TOO_SHORT = "start-too-short"
    DRIVE_OVERLOADED = "drive-overloaded"
    TURN_DIFFERS = "turn-differs"
    TEMPO_SAGS = "tempo-sags"
    WINDING_TOO_SHORT = "winding-too-short"
    # read back from a drawing
    UNKNOWN_CUT = "unknown-cut"
    CUT_TWICE = "cut-twice"
    OFF_TRACK = "off-track"
    OUT_OF_SHAPE = "out-of-shape"
    BLANK_DIFFERS = "blank-differs"
    NOT_A_CUTTING_FILE = "not-a-cutting-file"
    MARKED_NOT_GOOD = "marked-not-good"
    OTHER_SIDE = "other-side"
    SIDE_NOT_SHOWN = "side-not-shown"
    # many discs on sheets
    DISC_NOT_PLACED = "disc-not-placed"


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where on the disc; what does not apply is left at its default.

    Attributes:
        tracks: Track numbers, from 1.
        projections: Indices into layout.json's projections.
        radius_mm: Distance from the centre.
        angle_deg: Angle on the disc seen from the label side.
        sounds_s: Moment of the music.
    """

    tracks: tuple[int, ...] = ()
    projections: tuple[int, ...] = ()
    radius_mm: float | None = None
    angle_deg: float | None = None
    sounds_s: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One thing that is wrong, or near to wrong, with a disc.

    Attributes:
        code: What.
        level: How much it matters.
        message: One sentence for a person, with numbers and units.
        measured: The number found, in `unit`; None where nothing is measured.
        limit: The number it is held against, in `unit`; None where there is none.
        unit: "mm", "s", "ms", "deg", "N", "N mm", "%", "turns" or "".
        at: Where.
        remedy: What a person can do about it.
    """

    code: Code
    level: Level
    message: str
    measured: float | None
    limit: float | None
    unit: str
    at: Place
    remedy: str


def stands(findings: tuple[Finding, ...]) -> bool:
    """Whether an error-level finding stands, so that the disc is not good to cut."""
    return any(finding.level is Level.ERROR for finding in findings)


def finding_told(finding: Finding) -> dict[str, Any]:
    """The finding as every JSON of ours writes it; "at" holds only what applies."""
    return {
        "code": finding.code.value,
        "level": finding.level.value,
        "message": finding.message,
        "measured": finding.measured,
        "limit": finding.limit,
        "unit": finding.unit,
        "at": _place_told(finding.at),
        "remedy": finding.remedy,
    }


def _place_told(at: Place) -> dict[str, Any]:
    numbers = {"radius_mm": at.radius_mm, "angle_deg": at.angle_deg, "sounds_s": at.sounds_s}
    indices = {"tracks": list(at.tracks), "projections": list(at.projections)}
    return {name: value for name, value in indices.items() if value} | {
        name: value for name, value in numbers.items() if value is not None
    }
