"""Checks along the turn: repeats on each track, dampers, the music's part of the turn and the rest sector."""

import math
from dataclasses import dataclass

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import (
    GRAIN_MM,
    GRAIN_RAD,
    MOST_FINDINGS,
    Condition,
    judged,
    not_surely_held,
    told_worth,
    unsure_advice,
)
from layout.check.worth import of_tracks, radius_pointer, reaches_unsure_mm
from layout.documents.movement import StarWheel
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray
from layout.mechanics.turning import FULL_TURN_RAD
from layout.place.disc import Disc

APART = "Leave one of the two out, or put it on another track of the same pitch."


def star_wheels_keep_up(disc: Disc) -> list[Finding]:
    """An error for two working edges of one track nearer than its engagement arc, over the turn's end too."""
    near = _neighbours(disc)
    reach_mm = (disc.turning.radius_mm * np.cos(disc.turning.row_rad))[near.track]
    over_mm = near.apart_rad * reach_mm - disc.turning.engagement_arc_mm[near.track]
    told = not_surely_held(over_mm, _arcs_unsure_mm(disc, near.apart_rad, near.track))
    findings: list[Finding] = []
    for one, two, index, apart_rad in near.of(told):
        track_mm = float(disc.turning.radius_mm[index] * math.cos(disc.turning.row_rad[index]))
        findings += judged(_step_apart(disc, index, (one, two), apart_rad * track_mm), disc.movement)
    return findings[:MOST_FINDINGS]


def _step_apart(disc: Disc, index: int, pair: tuple[int, int], travel_mm: float) -> Condition:
    limit_mm = float(disc.turning.engagement_arc_mm[index])
    around_mm = FULL_TURN_RAD * float(disc.turning.radius_mm[index] * math.cos(disc.turning.row_rad[index]))
    per_mm_s = disc.turning.revolution_s / around_mm
    return Condition(
        code=Code.REPEAT_TOO_SOON,
        says=(
            f"Two plucks on track {index + 1} are {travel_mm:.3f} mm ({travel_mm * per_mm_s:.3f} s) apart; its star "
            f"wheel needs {limit_mm:.3f} mm ({limit_mm * per_mm_s:.3f} s) to make its step"
        ),
        so="the second is lost, or the first released too early",
        measured=travel_mm,
        limit=limit_mm,
        unit="mm",
        margin=travel_mm - limit_mm + GRAIN_MM,
        rests_on=(),
        also_unsure=_arc_unsure_mm(disc, index, travel_mm * FULL_TURN_RAD / around_mm),
        at=_at(disc, pair),
        remedy=APART,
    )


def _arc_unsure_mm(disc: Disc, index: int, apart_rad: float) -> float:
    """How far the travel between two plucks may be off from the arc a step takes, for an angle between them.

    The arc by its own worth; where it is computed, 2R·sin(π/n), by 2·sin(π/n) times that of R. The travel by the
    angle between the plucks times the worth of the track's radius.
    """
    movement, worth = disc.movement, disc.movement.plus_minus
    wheel, travel_mm = movement.star_wheel, apart_rad * worth(radius_pointer(index))
    if movement.tracks[index].engagement_arc_mm is not None:
        return travel_mm + worth(f"/tracks/{index}/engagement_arc_mm")
    if isinstance(wheel, StarWheel):
        return travel_mm + 2 * math.sin(math.pi / wheel.points) * worth("/star_wheel/tip_radius_mm")
    return travel_mm + worth("/star_wheel/engagement_arc_mm")


def _arcs_unsure_mm(disc: Disc, apart_rad: FloatArray, track: IntArray) -> FloatArray:
    """Shape (n,). `_arc_unsure_mm` of many pairs of plucks."""
    if not disc.movement.stated:
        return np.zeros(len(track))
    arc_mm = np.array([_arc_unsure_mm(disc, index, 0.0) for index in range(len(disc.movement.tracks))])
    return np.asarray(apart_rad * of_tracks(disc, "radius_mm")[track] + arc_mm[track])


def dampers_recover(disc: Disc) -> list[Finding]:
    """An error for two plucks of a damped tooth nearer than its recovery, at the movement's fastest turn."""
    movement, worth = disc.movement, disc.movement.plus_minus
    near = _neighbours(disc)
    turns = near.apart_rad / FULL_TURN_RAD
    unsure_s = worth("/damper_recovery_s") + turns * worth("/fastest_revolution_s")
    is_damped = np.isin(np.arange(len(movement.tracks)) + 1, list(movement.damped_tracks))
    soon = is_damped[near.track] & (turns * movement.fastest_revolution_s < movement.damper_recovery_s + unsure_s)
    findings: list[Finding] = []
    for (one, two, _, apart_rad), off_s in zip(near.of(soon), unsure_s[soon].tolist(), strict=True):
        apart_s = apart_rad / FULL_TURN_RAD * movement.fastest_revolution_s
        findings += judged(_damped_apart(disc, (one, two), apart_s, off_s), movement)
    return findings[:MOST_FINDINGS]


def _damped_apart(disc: Disc, pair: tuple[int, int], apart_s: float, unsure_s: float) -> Condition:
    movement, track = disc.movement, int(disc.track_index[pair[0]]) + 1
    return Condition(
        code=Code.DAMPER_NOT_RECOVERED,
        says=(
            f"Two plucks on track {track} are {apart_s:.3f} s apart at the fastest turn; its damper needs "
            f"{movement.damper_recovery_s:.3f} s"
        ),
        so="the tooth is met while it still sounds, and buzzes",
        measured=apart_s,
        limit=movement.damper_recovery_s,
        unit="s",
        margin=apart_s - movement.damper_recovery_s + GRAIN_RAD * movement.fastest_revolution_s / FULL_TURN_RAD,
        rests_on=(),
        also_unsure=unsure_s,
        at=_at(disc, pair),
        remedy=APART,
    )


def plucks_lie_in_the_music(disc: Disc) -> list[Finding]:
    """An error for a pluck before the music starts or after the last moment of its part of the turn."""
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad, disc.track_index)
    end_s = disc.turning.free_turn_s
    grain_s = GRAIN_RAD * disc.turning.revolution_s
    outside = np.flatnonzero((sounds_s < -grain_s) | (sounds_s > end_s + grain_s))
    return [
        Finding(
            code=Code.PLUCK_OUTSIDE_MUSIC,
            level=Level.ERROR,
            message=(
                f"A pluck on track {int(disc.track_index[index]) + 1} sounds at {sounds_s[index]:.3f} s; "
                f"music may sound from 0 to {end_s:.3f} s."
            ),
            measured=float(sounds_s[index]),
            limit=0.0 if sounds_s[index] < 0 else end_s,
            unit="s",
            at=_at(disc, (int(index),)),
            remedy="Move the pluck into the music's part of the turn, or leave it out.",
        )
        for index in outside[:MOST_FINDINGS]
    ]


def rest_is_clear(disc: Disc) -> list[Finding]:
    """An error for a projection that stands on its star wheel while the disc is at rest.

    Judged by arc on every track, from where a working edge may first touch a point to where the
    end of its standing body has left it. Where all are clear, but one by less than its numbers are worth, one advice.
    """
    arcs_mm = _at_rest(disc)
    clear_mm = np.maximum(arcs_mm[1] - arcs_mm[0], arcs_mm[0] - arcs_mm[2])
    unsure_mm = reaches_unsure_mm(disc)
    sure_mm = clear_mm - unsure_mm[disc.track_index]
    hit = np.flatnonzero(clear_mm < -GRAIN_MM)
    if len(hit) or not len(sure_mm) or sure_mm.min() >= 0:
        return [
            _stands_at_rest(disc, int(index), arcs_mm, float(unsure_mm[disc.track_index[index]]))
            for index in hit[:MOST_FINDINGS]
        ]
    nearest = int(np.argmin(sure_mm))
    return [unsure_advice(_stands_at_rest(disc, nearest, arcs_mm, float(unsure_mm[disc.track_index[nearest]])))]


def _stands_at_rest(
    disc: Disc, index: int, arcs_mm: tuple[FloatArray, FloatArray, FloatArray], unsure_mm: float
) -> Finding:
    past_mm, before_mm, after_mm = (float(arc[index]) for arc in arcs_mm)
    clear_mm = max(before_mm - past_mm, past_mm - after_mm)
    return Finding(
        code=Code.REST_NOT_CLEAR,
        level=Level.ERROR,
        message=(
            f"At rest the working edge of a projection on track {int(disc.track_index[index]) + 1} stands "
            f"{past_mm:.3f} mm past the row; it may touch its star wheel from {before_mm:.3f} to {after_mm:.3f} mm."
            + told_worth(clear_mm, unsure_mm, "mm", fails=clear_mm < -GRAIN_MM)
        ),
        measured=clear_mm,
        limit=0.0,
        unit="mm",
        at=_at(disc, (index,)),
        remedy="Leave the note out, or give the movement a wider rest sector (before_music_deg, after_music_deg).",
    )


def _at_rest(disc: Disc) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Arcs past the star wheel at rest: of each working edge, and of both ends of its touch zone."""
    turning, row_mm = disc.turning, disc.movement.gantry_offset_mm
    ends = disc.touch_zones_mm + np.array([0.0, disc.pattern.body_behind_mm])
    sines = (row_mm - turning.direction * ends) / turning.radius_mm[:, None]
    zone_mm = turning.direction * (turning.row_rad[:, None] - np.arcsin(np.clip(sines, -1, 1)))
    zone_mm = zone_mm * turning.radius_mm[:, None]
    past_rad = turning.direction * (turning.row_rad[disc.track_index] - disc.edge_angle_rad)
    past_rad = np.mod(past_rad + math.pi, FULL_TURN_RAD) - math.pi
    return past_rad * disc.radius_mm, zone_mm[disc.track_index, 0], zone_mm[disc.track_index, 1]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Neighbours:
    """Projections that follow each other on their track, the last and the first over the turn's end too.

    Attributes:
        one: Shape (n,). Indices of projections, by track and angle; none of those alone on their track.
        two: Shape (n,). The next of each.
        track: Shape (n,). Their track, from 0.
        apart_rad: Shape (n,). The angle between both.
    """

    one: IntArray
    two: IntArray
    track: IntArray
    apart_rad: FloatArray

    def of(self, chosen: BoolArray) -> list[tuple[int, int, int, float]]:
        """Some of the pairs and their tracks; `chosen` has shape (n,). Nearly all are far apart and not worth words."""
        columns = (self.one[chosen], self.two[chosen], self.track[chosen], self.apart_rad[chosen])
        return list(zip(*(column.tolist() for column in columns), strict=True))


def _neighbours(disc: Disc) -> _Neighbours:
    ranked = np.lexsort((disc.edge_angle_rad, disc.track_index))
    track, angle_rad = disc.track_index[ranked], disc.edge_angle_rad[ranked]
    begins, ends = np.diff(track, prepend=-1) != 0, np.diff(track, append=-1) != 0
    first = np.maximum.accumulate(np.where(begins, np.arange(len(track)), 0))
    following = np.where(ends, first, np.arange(len(track)) + 1)
    apart_rad = angle_rad[following] + np.where(ends, FULL_TURN_RAD, 0.0) - angle_rad
    in_company = ~(begins & ends)
    return _Neighbours(
        one=ranked[in_company],
        two=ranked[following][in_company],
        track=track[in_company],
        apart_rad=apart_rad[in_company],
    )


def _at(disc: Disc, projections: tuple[int, ...]) -> Place:
    first = projections[0]
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad[[first]], disc.track_index[[first]])
    return Place(
        tracks=(int(disc.track_index[first]) + 1,),
        projections=projections,
        radius_mm=float(disc.radius_mm[first]),
        angle_deg=math.degrees(disc.edge_angle_rad[first]),
        sounds_s=float(sounds_s[0]),
    )
