"""The movement document: the playing mechanism a disc is made for.

Lengths are millimetres, times seconds, angles degrees; every field carries its unit.
"""

import math
from collections import Counter
from collections.abc import Mapping
from itertools import pairwise
from typing import Annotated, Any, Literal, Self

from pydantic import ConfigDict, Discriminator, Field, PrivateAttr, Tag, model_validator

from layout.documents.conditions import STATED, beside, where
from layout.documents.drive import Drive
from layout.documents.feature import MOST_ROWS, Feature, check_features
from layout.documents.pitch import key_of
from layout.documents.reading import (
    FULL_TURN_DEG,
    Angle,
    At,
    Identifier,
    Json,
    Length,
    LengthOrZero,
    Offset,
    Part,
    Positive,
    PositiveAngle,
    Stated,
    Time,
    TimeOrZero,
    Title,
    check_document,
    moved,
    read_json,
)
from layout.documents.tooth import Quality, Tooth, unstated
from layout.errors import DocumentError, Problem

MOST_TRACKS = 200  # tracks; far above any comb, keeps a document from being made slow
MOST_TEETH = 400  # teeth; two combs of MOST_TRACKS


class DiscBlank(Part):
    """The sheet the disc is made of, and what is cut in it beside the tune.

    `centre_hole_play_mm` is how much wider the hole is than the spindle; `rolled_along_deg` the
    direction in which the sheet was rolled, seen from the label side.
    """

    outer_diameter_mm: Length
    thickness_mm: Length
    material: Title
    centre_hole_mm: Length
    flatness_mm: LengthOrZero = 0.0
    run_out_mm: LengthOrZero = 0.0
    centre_hole_play_mm: LengthOrZero | None = None
    density_kg_m3: Positive | None = None
    shear_strength_n_per_mm2: Positive | None = None
    rolled_along_deg: Angle | None = None
    features: Annotated[tuple[Feature, ...], Field(max_length=MOST_ROWS)] = ()


class KeepOut(Part):
    """A ring of the disc where nothing may be cut, and why."""

    from_radius_mm: LengthOrZero
    to_radius_mm: Length
    why: Title


class StarWheel(Part):
    """A star wheel known by its sizes; its arcs are computed. Only a point's tip touches."""

    points: Annotated[int, Field(ge=3, le=60)]
    tip_radius_mm: Length
    root_radius_mm: Length
    axis_depth_mm: Length
    thickness_mm: Length
    release_angle_deg: Angle


class MeasuredStarWheel(Part):
    """A star wheel known by what was measured: both arcs for all tracks, or none and each track states its own."""

    engagement_arc_mm: Length | None = None
    release_arc_mm: Offset | None = None
    thickness_mm: Length


class Projection(Part):
    """What turns a star wheel: standing metal, or a slot the point falls into."""

    model_config = ConfigDict(
        json_schema_extra={
            "allOf": [
                where("kind", "standing", {"depth_mm": STATED}),
                where("kind", "slot", {"length_mm": STATED, "forming": {"const": "any"}}),
            ]
        }
    )

    kind: Literal["standing", "slot"]
    width_mm: Length
    depth_mm: Length | None = None
    depth_plus_minus_mm: LengthOrZero = 0.0
    length_mm: Length | None = None
    forming: Literal["any", "fold", "lance"] = "any"

    @model_validator(mode="after")
    def _fields_of_its_kind(self) -> Self:
        if self.kind == "standing" and self.depth_mm is None:
            raise At("/depth_mm", "a standing projection needs depth_mm")
        if self.kind == "slot":
            if self.length_mm is None or self.length_mm < self.width_mm:
                raise At("/length_mm", "a slot needs length_mm, along the travel, not below width_mm")
            if self.forming != "any":
                raise At("/forming", "forming belongs to standing projections; leave it out for a slot")
        return self


class Track(Part):
    """A circle on the disc served by one star wheel; track 1 is the innermost."""

    model_config = ConfigDict(
        json_schema_extra={
            "allOf": [
                beside("engagement_arc_mm", {"release_arc_mm": STATED}),
                beside("release_arc_mm", {"engagement_arc_mm": STATED}),
            ]
        }
    )

    track: Annotated[int, Field(ge=1)]
    radius_mm: Length
    engagement_arc_mm: Length | None = None
    release_arc_mm: Offset | None = None


class TrackRange(Part):
    """Equally spaced tracks, as a person may write them."""

    first_radius_mm: Positive
    last_radius_mm: Positive
    count: Annotated[int, Field(ge=1, le=MOST_TRACKS)]


def _or_equally_spaced(schema: dict[str, Any]) -> None:
    listed = dict(schema)
    schema.clear()
    schema["anyOf"] = [listed, TrackRange.model_json_schema()]


def _star_wheel_kind(value: Json) -> str:
    keys = value if isinstance(value, Mapping) else getattr(value, "__dict__", {})
    return "measured" if not ({"points", "tip_radius_mm", "axis_depth_mm"} & set(keys)) else "computed"


_UNION_TAGS = frozenset({"computed", "measured"})


class Movement(Part):
    """A movement, resolved: plain numbers, every track listed, every rule between fields kept.

    Teeth of one track have one pitch: a projection sounds all of them at once. `tooth_quality` is the Q of every
    tooth that states none of its own.
    """

    format: Literal["discwright-movement/1"]
    id: Identifier
    revision: Annotated[int, Field(ge=1)] = 1
    title: Title
    turns: Literal["clockwise", "anticlockwise"]
    revolution_s: Time
    fastest_revolution_s: Time
    before_music_deg: PositiveAngle
    after_music_deg: PositiveAngle
    gantry_offset_mm: Offset = 0.0
    disc: DiscBlank
    keep_out: Annotated[tuple[KeepOut, ...], Field(max_length=MOST_ROWS)] = ()
    star_wheel: Annotated[
        Annotated[StarWheel, Tag("computed")] | Annotated[MeasuredStarWheel, Tag("measured")],
        Discriminator(_star_wheel_kind),
    ]
    projection: Projection
    damper_arc_mm: LengthOrZero = 0.0
    damper_recovery_s: TimeOrZero = 0.0
    drive: Drive | None = None
    tooth_quality: Quality | None = Field(default=None, exclude_if=unstated)
    tracks: Annotated[
        tuple[Track, ...], Field(min_length=1, max_length=MOST_TRACKS, json_schema_extra=_or_equally_spaced)
    ]
    teeth: Annotated[tuple[Tooth, ...], Field(min_length=1, max_length=MOST_TEETH)]
    _stated: dict[str, Stated] = PrivateAttr(default_factory=dict)

    @property
    def stated(self) -> Mapping[str, Stated]:
        """What the document states of its numbers' worth, by the JSON pointer of the number."""
        return self._stated

    @property
    def damped_tracks(self) -> frozenset[int]:
        """The numbers of the tracks that pluck a usable tooth with a damper."""
        return frozenset(tooth.track for tooth in self.teeth if tooth.damped and tooth.usable)

    def arcs_mm(self, track_index: int) -> tuple[float, float]:
        """Engagement and release arc of a track, by its place from 0: measured ones win over the wheel's own.

        A computed wheel's are the chord between two tips, 2R·sin(π/n), and R·sin β_r.
        """
        track, wheel = self.tracks[track_index], self.star_wheel
        if track.engagement_arc_mm is not None and track.release_arc_mm is not None:
            return track.engagement_arc_mm, track.release_arc_mm
        if isinstance(wheel, StarWheel):
            chord_mm = 2 * wheel.tip_radius_mm * math.sin(math.pi / wheel.points)
            return chord_mm, wheel.tip_radius_mm * math.sin(math.radians(wheel.release_angle_deg))
        return wheel.engagement_arc_mm or 0.0, wheel.release_arc_mm or 0.0

    def plus_minus(self, pointer: str) -> float:
        """How far the number at a JSON pointer may be off, in its own unit; 0 where not stated."""
        stated = self._stated.get(pointer)
        return 0.0 if stated is None else stated.plus_minus

    @model_validator(mode="after")
    def _turning_agrees(self) -> Self:
        if self.fastest_revolution_s > self.revolution_s:
            raise At(
                "/fastest_revolution_s",
                f"fastest_revolution_s ({self.fastest_revolution_s:g}) is the shortest turn the movement makes; "
                f"it cannot be above revolution_s ({self.revolution_s:g})",
            )
        if self.before_music_deg + self.after_music_deg >= FULL_TURN_DEG:
            raise At("/after_music_deg", "before_music_deg and after_music_deg leave no part of the turn for music")
        return self

    @model_validator(mode="after")
    def _tracks_agree(self) -> Self:
        for place, track in enumerate(self.tracks):
            if track.track != place + 1:
                raise At(f"/tracks/{place}/track", "tracks must be numbered 1, 2, 3 … from the innermost")
        radii = [track.radius_mm for track in self.tracks]
        for number, (inner, outer) in enumerate(pairwise(radii), start=1):
            if outer <= inner:
                raise At(
                    f"/tracks/{number}/radius_mm",
                    f"track {number + 1} ({outer:g} mm) must lie outside track {number} ({inner:g} mm)",
                )
        if radii[0] <= abs(self.gantry_offset_mm):
            raise At(
                "/tracks/0/radius_mm",
                f"track 1 ({radii[0]:g} mm) does not reach the row of star wheels "
                f"(gantry_offset_mm {self.gantry_offset_mm:g})",
            )
        return self

    @model_validator(mode="after")
    def _arcs_are_known(self) -> Self:
        common = isinstance(self.star_wheel, StarWheel) or (
            self.star_wheel.engagement_arc_mm is not None and self.star_wheel.release_arc_mm is not None
        )
        for place, track in enumerate(self.tracks):
            both = (track.engagement_arc_mm is None) == (track.release_arc_mm is None)
            if not both or (not common and track.engagement_arc_mm is None):
                raise At(f"/tracks/{place}", f"track {track.track}: state both engagement_arc_mm and release_arc_mm")
        if self.projection.kind == "slot" and isinstance(self.star_wheel, StarWheel):
            raise At("/star_wheel", "slots need measured arcs: give star_wheel engagement_arc_mm and release_arc_mm")
        return self

    @model_validator(mode="after")
    def _release_happens_on_every_track(self) -> Self:
        for index, track in enumerate(self.tracks):
            _, release_mm = self.arcs_mm(index)
            if abs(self.gantry_offset_mm) + abs(release_mm) >= track.radius_mm:
                raise At(
                    f"/tracks/{index}/radius_mm",
                    f"track {track.track} ({track.radius_mm:g} mm) is too small for a release "
                    f"{release_mm:g} mm past the row",
                )
        return self

    @model_validator(mode="after")
    def _comb_agrees(self) -> Self:
        for number, count in Counter(tooth.tooth for tooth in self.teeth).items():
            if count > 1:
                last = max(place for place, tooth in enumerate(self.teeth) if tooth.tooth == number)
                raise At(f"/teeth/{last}/tooth", f"tooth {number} is listed {count} times; number every tooth once")
        pitches: dict[int, int] = {}
        for place, tooth in enumerate(self.teeth):
            if tooth.track > len(self.tracks):
                raise At(f"/teeth/{place}/track", f"tooth {tooth.tooth}: there is no track {tooth.track}")
            key = key_of(tooth.pitch)
            if pitches.setdefault(tooth.track, key) != key:
                raise At(
                    f"/teeth/{place}/pitch",
                    f"tooth {tooth.tooth}: track {tooth.track} already has a tooth of another pitch",
                )
        return self

    @model_validator(mode="after")
    def _disc_agrees(self) -> Self:
        if self.disc.centre_hole_mm >= self.disc.outer_diameter_mm:
            raise At("/disc/centre_hole_mm", "centre_hole_mm must be below outer_diameter_mm")
        for place, ring in enumerate(self.keep_out):
            if ring.to_radius_mm <= ring.from_radius_mm:
                raise At(
                    f"/keep_out/{place}/to_radius_mm",
                    f"keep-out {ring.why!r}: to_radius_mm must be above from_radius_mm",
                )
        check_features(self.disc.features, rim_mm=self.disc.outer_diameter_mm / 2, hole_mm=self.disc.centre_hole_mm / 2)
        return self


def read_movement(text: str | bytes) -> Movement:
    """A movement document, resolved: stated numbers made plain, track ranges listed out.

    Args:
        text: JSON, as a person writes it. `tracks` is a list of tracks, or
            `{"first_radius_mm", "last_radius_mm", "count"}` for equally spaced ones.

    Raises:
        DocumentError: Not JSON, or not a valid movement; names every fault found.
    """
    plain, stated = read_json(text, document="movement")
    is_spread = isinstance(plain, dict) and isinstance(plain.get("tracks"), dict)
    if is_spread:
        plain = {**plain, "tracks": _listed_tracks(plain["tracks"])}
        stated |= _worth_of_listed(stated, len(plain["tracks"]))
    try:
        movement = check_document(Movement, plain, document="movement", union_tags=_UNION_TAGS)
    except DocumentError as error:
        if not is_spread:
            raise
        raise _as_spread(error) from error
    movement._stated.update(stated)
    return movement


def values_of_movement(movement: Movement) -> dict[str, Json]:
    """A movement as plain JSON values, with the worth of its numbers: all that `movement_from_values` needs."""
    stated = {pointer: worth.model_dump(mode="json") for pointer, worth in movement.stated.items()}
    return {"movement": movement.model_dump(mode="json"), "stated": stated}


def movement_from_values(values: dict[str, Json]) -> Movement:
    """The movement that `values_of_movement` told."""
    movement = Movement.model_validate(values["movement"])
    movement._stated.update({pointer: Stated.model_validate(worth) for pointer, worth in values["stated"].items()})
    return movement


def _as_spread(error: DocumentError) -> DocumentError:
    """The error with its places as they are where tracks are spread: none of them stands by itself."""
    problems = tuple(
        Problem(pointer="/tracks" if p.pointer.startswith("/tracks/") else p.pointer, message=p.message)
        for p in error.problems
    )
    return DocumentError(document=error.document, problems=problems)


def _worth_of_listed(stated: Mapping[str, Stated], count: int) -> dict[str, Stated]:
    """Every listed radius is worth what the worse of the two radii it lies between is worth."""
    ends = [stated[f"/tracks/{end}_radius_mm"] for end in ("first", "last") if f"/tracks/{end}_radius_mm" in stated]
    worst = max(ends, key=lambda end: end.plus_minus, default=None)
    return {} if worst is None else {f"/tracks/{index}/radius_mm": worst for index in range(count)}


def _listed_tracks(spread: Json) -> list[Json]:
    try:
        row = check_document(TrackRange, spread, document="movement")
    except DocumentError as error:
        raise moved(error, "/tracks") from error
    step_mm = (row.last_radius_mm - row.first_radius_mm) / max(row.count - 1, 1)
    # Rounded to a nanometre: 36 + 7 * 2.62 would otherwise print as 54.339999999999996.
    return [
        {"track": place + 1, "radius_mm": round(row.first_radius_mm + place * step_mm, 6)} for place in range(row.count)
    ]
