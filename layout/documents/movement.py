"""The movement document: the playing mechanism a disc is made for.

Lengths are millimetres, times seconds, angles degrees; every field carries its unit.
"""

import math
from collections import Counter
from collections.abc import Mapping
from itertools import pairwise
from typing import Annotated, Literal, Self

from pydantic import Discriminator, Field, PrivateAttr, Tag, field_validator, model_validator

from layout.documents.pitch import key_of
from layout.documents.reading import (
    Identifier,
    Json,
    NotNegative,
    Number,
    Part,
    Positive,
    Stated,
    Title,
    check_document,
    read_json,
)
from layout.errors import DocumentError, Problem

FULL_TURN_DEG = 360.0
MOST_TRACKS = 400  # tracks; far above any comb, keeps a document from being made slow
MOST_TEETH = 800  # teeth; two combs of MOST_TRACKS
MOST_FEATURES = 400  # holes of one feature row; a drive row of a large disc has under 200


class Feature(Part):
    """A row of equal holes, slots or rim notches that drive, stop or locate the disc."""

    purpose: Literal["drive", "stop", "location"]
    shape: Literal["hole", "slot", "notch"]
    radius_mm: Positive
    first_at_deg: Number = 0.0
    count: Annotated[int, Field(ge=1, le=MOST_FEATURES)] = 1
    width_mm: Positive
    length_mm: Positive


class DiscBlank(Part):
    """The sheet the disc is made of, and what is cut in it beside the tune."""

    outer_diameter_mm: Positive
    thickness_mm: Positive
    material: Title
    centre_hole_mm: Positive
    flatness_mm: NotNegative = 0.0
    run_out_mm: NotNegative = 0.0
    features: tuple[Feature, ...] = ()


class KeepOut(Part):
    """A ring of the disc where nothing may be cut, and why."""

    from_radius_mm: NotNegative
    to_radius_mm: Positive
    why: Title


class StarWheel(Part):
    """A star wheel known by its sizes; its arcs are computed. Only a point's tip touches."""

    points: Annotated[int, Field(ge=3, le=60)]
    tip_radius_mm: Positive
    root_radius_mm: Positive
    axis_depth_mm: Positive
    thickness_mm: Positive
    release_angle_deg: Number


class MeasuredStarWheel(Part):
    """A star wheel known by what was measured: both arcs for all tracks, or none and each track states its own."""

    engagement_arc_mm: Positive | None = None
    release_arc_mm: Number | None = None
    thickness_mm: Positive


class Projection(Part):
    """What turns a star wheel: standing metal, or a slot the point falls into."""

    kind: Literal["standing", "slot"]
    width_mm: Positive
    depth_mm: Positive | None = None
    depth_plus_minus_mm: NotNegative = 0.0
    length_mm: Positive | None = None
    forming: Literal["any", "fold", "lance"] = "any"

    @model_validator(mode="after")
    def _fields_of_its_kind(self) -> Self:
        if self.kind == "standing" and self.depth_mm is None:
            raise ValueError("a standing projection needs depth_mm")
        if self.kind == "slot":
            if self.length_mm is None or self.length_mm < self.width_mm:
                raise ValueError("a slot needs length_mm, along the travel, not below width_mm")
            if self.forming != "any":
                raise ValueError("forming belongs to standing projections; leave it out for a slot")
        return self


class TrainStage(Part):
    """One turning part of the gear train, with its turns per turn of the disc."""

    inertia_kg_m2: Positive
    ratio: Positive


class Drive(Part):
    """What turns the disc. Every field is optional; what is not stated is not checked."""

    torque_limit_nmm: Positive | None = None
    surplus_torque_nmm: Positive | None = None
    disc_inertia_kg_m2: Positive | None = None
    train: tuple[TrainStage, ...] = ()


class Track(Part):
    """A circle on the disc served by one star wheel; track 1 is the innermost."""

    track: Annotated[int, Field(ge=1)]
    radius_mm: Positive
    engagement_arc_mm: Positive | None = None
    release_arc_mm: Number | None = None


class Tooth(Part):
    """One tuned tooth of the comb and the track that plucks it."""

    tooth: Annotated[int, Field(ge=1)]
    track: Annotated[int, Field(ge=1)]
    pitch: str
    cents: Number = 0.0
    damped: bool = True
    usable: bool = True
    stiffness_n_per_mm: Positive | None = None
    lift_mm: Positive | None = None

    @field_validator("pitch")
    @classmethod
    def _is_a_pitch(cls, pitch: str) -> str:
        key_of(pitch)
        return pitch


def _star_wheel_kind(value: Json) -> str:
    keys = value if isinstance(value, Mapping) else getattr(value, "__dict__", {})
    return "measured" if not ({"points", "tip_radius_mm", "axis_depth_mm"} & set(keys)) else "computed"


_UNION_TAGS = frozenset({"computed", "measured"})


class Movement(Part):
    """A movement, resolved: plain numbers, every track listed, every rule between fields kept.

    Teeth of one track have one pitch: a projection sounds all of them at once.
    """

    format: Literal["discwright-movement/1"]
    id: Identifier
    revision: Annotated[int, Field(ge=1)] = 1
    title: Title
    turns: Literal["clockwise", "anticlockwise"]
    revolution_s: Positive
    fastest_revolution_s: Positive
    before_music_deg: Positive
    after_music_deg: Positive
    gantry_offset_mm: Number = 0.0
    disc: DiscBlank
    keep_out: tuple[KeepOut, ...] = ()
    star_wheel: Annotated[
        Annotated[StarWheel, Tag("computed")] | Annotated[MeasuredStarWheel, Tag("measured")],
        Discriminator(_star_wheel_kind),
    ]
    projection: Projection
    damper_arc_mm: NotNegative = 0.0
    damper_recovery_s: NotNegative = 0.0
    drive: Drive | None = None
    tracks: Annotated[tuple[Track, ...], Field(min_length=1, max_length=MOST_TRACKS)]
    teeth: Annotated[tuple[Tooth, ...], Field(min_length=1, max_length=MOST_TEETH)]
    _stated: dict[str, Stated] = PrivateAttr(default_factory=dict)

    @property
    def stated(self) -> Mapping[str, Stated]:
        """What the document states of its numbers' worth, by the JSON pointer of the number."""
        return self._stated

    def plus_minus(self, pointer: str) -> float:
        """How far the number at a JSON pointer may be off, in its own unit; 0 where not stated."""
        stated = self._stated.get(pointer)
        return 0.0 if stated is None else stated.plus_minus

    @model_validator(mode="after")
    def _turning_agrees(self) -> Self:
        if self.fastest_revolution_s > self.revolution_s:
            raise ValueError(
                f"fastest_revolution_s ({self.fastest_revolution_s:g}) is the shortest turn the movement makes; "
                f"it cannot be above revolution_s ({self.revolution_s:g})"
            )
        if self.before_music_deg + self.after_music_deg >= FULL_TURN_DEG:
            raise ValueError("before_music_deg and after_music_deg leave no part of the turn for music")
        return self

    @model_validator(mode="after")
    def _tracks_agree(self) -> Self:
        if [track.track for track in self.tracks] != list(range(1, len(self.tracks) + 1)):
            raise ValueError("tracks must be numbered 1, 2, 3 … from the innermost")
        radii = [track.radius_mm for track in self.tracks]
        for number, (inner, outer) in enumerate(pairwise(radii), start=1):
            if outer <= inner:
                raise ValueError(f"track {number + 1} ({outer:g} mm) must lie outside track {number} ({inner:g} mm)")
        if radii[0] <= abs(self.gantry_offset_mm):
            raise ValueError(
                f"track 1 ({radii[0]:g} mm) does not reach the row of star wheels "
                f"(gantry_offset_mm {self.gantry_offset_mm:g})"
            )
        return self

    @model_validator(mode="after")
    def _arcs_are_known(self) -> Self:
        common = isinstance(self.star_wheel, StarWheel) or (
            self.star_wheel.engagement_arc_mm is not None and self.star_wheel.release_arc_mm is not None
        )
        for track in self.tracks:
            both = (track.engagement_arc_mm is None) == (track.release_arc_mm is None)
            if not both or (not common and track.engagement_arc_mm is None):
                raise ValueError(f"track {track.track}: state both engagement_arc_mm and release_arc_mm")
        if self.projection.kind == "slot" and isinstance(self.star_wheel, StarWheel):
            raise ValueError("slots need measured arcs: give star_wheel engagement_arc_mm and release_arc_mm")
        return self

    @model_validator(mode="after")
    def _release_happens_on_every_track(self) -> Self:
        wheel = self.star_wheel
        for track in self.tracks:
            if track.release_arc_mm is not None:
                release_mm = track.release_arc_mm
            elif isinstance(wheel, StarWheel):
                release_mm = wheel.tip_radius_mm * math.sin(math.radians(wheel.release_angle_deg))
            else:
                release_mm = wheel.release_arc_mm or 0.0
            if abs(self.gantry_offset_mm) + abs(release_mm) >= track.radius_mm:
                raise ValueError(
                    f"track {track.track} ({track.radius_mm:g} mm) is too small for a release "
                    f"{release_mm:g} mm past the row"
                )
        return self

    @model_validator(mode="after")
    def _comb_agrees(self) -> Self:
        for number, count in Counter(tooth.tooth for tooth in self.teeth).items():
            if count > 1:
                raise ValueError(f"tooth {number} is listed {count} times; number every tooth once")
        pitches: dict[int, int] = {}
        for tooth in self.teeth:
            if tooth.track > len(self.tracks):
                raise ValueError(f"tooth {tooth.tooth}: there is no track {tooth.track}")
            key = key_of(tooth.pitch)
            if pitches.setdefault(tooth.track, key) != key:
                raise ValueError(f"tooth {tooth.tooth}: track {tooth.track} already has a tooth of another pitch")
        return self

    @model_validator(mode="after")
    def _disc_agrees(self) -> Self:
        if self.disc.centre_hole_mm >= self.disc.outer_diameter_mm:
            raise ValueError("centre_hole_mm must be below outer_diameter_mm")
        for ring in self.keep_out:
            if ring.to_radius_mm <= ring.from_radius_mm:
                raise ValueError(f"keep-out {ring.why!r}: to_radius_mm must be above from_radius_mm")
        for feature in self.disc.features:
            _check_feature(feature, self.disc)
        _check_notches_stay_apart(self.disc.features)
        return self


def _check_feature(feature: Feature, disc: DiscBlank) -> None:
    rim_mm = disc.outer_diameter_mm / 2
    half_mm = feature.width_mm / 2
    if feature.shape == "notch":
        if not feature.radius_mm - half_mm < rim_mm < feature.radius_mm + half_mm:
            raise ValueError(f"a notch must cross the rim at {rim_mm:g} mm; move its radius_mm or widen it")
        if feature.radius_mm - half_mm <= disc.centre_hole_mm / 2:
            raise ValueError(f"a notch at {feature.radius_mm:g} mm, {feature.width_mm:g} wide, reaches the centre hole")
    elif feature.radius_mm + half_mm >= rim_mm or feature.radius_mm - half_mm <= disc.centre_hole_mm / 2:
        raise ValueError(f"the {feature.purpose} {feature.shape} at {feature.radius_mm:g} mm leaves the disc")
    if feature.shape == "hole" and feature.length_mm != feature.width_mm:
        raise ValueError("a hole is round: give it the same width_mm and length_mm, or shape slot")
    if feature.count * feature.length_mm >= 2 * math.pi * feature.radius_mm:
        raise ValueError(f"{feature.count} of {feature.length_mm:g} mm do not fit round {feature.radius_mm:g} mm")


def _check_notches_stay_apart(features: tuple[Feature, ...]) -> None:
    """The rim is one simple outline only where no two notches meet; each lies in a sector of its own."""
    sectors = []
    for feature in features:
        if feature.shape == "notch":
            half_deg = math.degrees(math.atan2(feature.length_mm / 2, feature.radius_mm - feature.width_mm / 2))
            step_deg = FULL_TURN_DEG / feature.count
            sectors += [((feature.first_at_deg + n * step_deg) % FULL_TURN_DEG, half_deg) for n in range(feature.count)]
    sectors.sort()
    for place, (at_deg, half_deg) in enumerate(sectors):
        next_deg, next_half_deg = sectors[(place + 1) % len(sectors)]
        wrap_deg = FULL_TURN_DEG if place + 1 == len(sectors) else 0.0
        if next_deg + wrap_deg - at_deg <= half_deg + next_half_deg:
            raise ValueError(f"the notches at {at_deg:g} and {next_deg:g} degrees meet; make them one, or move one")


def read_movement(text: str | bytes) -> Movement:
    """A movement document, resolved: stated numbers made plain, track ranges listed out.

    Args:
        text: JSON, as a person writes it. `tracks` is a list of tracks, or
            `{"first_radius_mm", "last_radius_mm", "count"}` for equally spaced ones.

    Raises:
        DocumentError: Not JSON, or not a valid movement; names every fault found.
    """
    plain, stated = read_json(text, document="movement")
    if isinstance(plain, dict) and isinstance(plain.get("tracks"), dict):
        plain = {**plain, "tracks": _listed_tracks(plain["tracks"])}
    movement = check_document(Movement, plain, document="movement", union_tags=_UNION_TAGS)
    movement._stated.update({pointer: _checked_worth(pointer, value) for pointer, value in stated.items()})
    return movement


def _checked_worth(pointer: str, value: Json) -> Stated:
    try:
        return check_document(Stated, value, document="movement")
    except DocumentError as error:
        raise _moved(error, pointer) from error


def _moved(error: DocumentError, pointer: str) -> DocumentError:
    """The error of a part, with its places as they are in the whole document."""
    problems = tuple(Problem(pointer=f"{pointer}{p.pointer}", message=p.message) for p in error.problems)
    return DocumentError(document=error.document, problems=problems)


def _listed_tracks(spread: Json) -> list[Json]:
    class TrackRange(Part):
        first_radius_mm: Positive
        last_radius_mm: Positive
        count: Annotated[int, Field(ge=1, le=MOST_TRACKS)]

    try:
        row = check_document(TrackRange, spread, document="movement")
    except DocumentError as error:
        raise _moved(error, "/tracks") from error
    step_mm = (row.last_radius_mm - row.first_radius_mm) / max(row.count - 1, 1)
    # Rounded to a nanometre: 36 + 7 * 2.62 would otherwise print as 54.339999999999996.
    return [
        {"track": place + 1, "radius_mm": round(row.first_radius_mm + place * step_mm, 6)} for place in range(row.count)
    ]
