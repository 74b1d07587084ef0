"""Rulings that no way searched satisfies, told: which ones, and what stands between them."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from layout.arrange.clashes import clashing
from layout.arrange.comb import Comb
from layout.arrange.loads import loads_at, overloads
from layout.arrange.plucks import Wanted
from layout.arrange.posing import LOAD_GRAINS
from layout.arrange.problem import NS_PER_S
from layout.arrange.problem import Problem as Posed
from layout.arrange.reasons import Conflict, Standing
from layout.arrange.rulings import Forced, Rulings, ruling_error
from layout.arrange.solving import Impossible
from layout.documents.pitch import KEY_COUNT, pitch_of
from layout.documents.settings import Transpose
from layout.errors import Problem, RulingError
from layout.mechanics.spacing import Spacing

MOST_TOGETHER = 12  # notes that clash together and are each named; of more it is told how many they are


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Refused:
    """One way that plays not all that must sound: the plucks, the problem, and what shows it."""

    semitones: int
    wanted: Wanted
    problem: Posed
    impossible: Impossible


def refusal(refused: Refused, rulings: Rulings, comb: Comb, spacing: Spacing, transpose: Transpose) -> RulingError:
    """The error that tells why this way, the nearest to as written of all that were searched, cannot be."""
    where = f"transposed by {refused.semitones:+d}"
    if transpose.semitones is None:
        where = f"no transposition within ±{transpose.range} semitones satisfies all rulings; {where}"
    forced = {
        pluck: one
        for pluck in np.flatnonzero(refused.wanted.must_sound).tolist()
        if (one := rulings.of_pluck(refused.wanted.notes[pluck])) is not None
    }
    told = _off_the_comb(refused, forced, comb)
    if not told:
        plucks = clashing(refused.problem, refused.impossible.plucks)
        told = [_clash(refused.problem, [forced[pluck] for pluck in plucks], plucks, spacing)]
    return ruling_error([Problem(pointer=one.pointer, message=f"{where}: {one.message}") for one in told])


def undecided(forced_count: int, not_known: int, impossible: int) -> RulingError:
    """The error where it was not found out in reasonable time whether the rulings can be followed.

    Args:
        forced_count: How many notes must sound.
        not_known: Transpositions, each at every speed, that may follow all rulings.
        impossible: Those that are known not to.
    """
    message = (
        f"whether all {forced_count} notes that must sound fit on the disc was not found out within the work that a "
        f"search may take ({impossible} of {not_known + impossible} transpositions and speeds searched were found "
        "impossible, the others are not known); make fewer notes must-sound, or fix the transposition and the speed"
    )
    return RulingError(document="settings", problems=(Problem(pointer="/rulings", message=message),))


def _off_the_comb(refused: Refused, forced: Mapping[int, Forced], comb: Comb) -> list[Problem]:
    """Every forced pluck that has no spot."""
    found = []
    has_spots = np.diff(refused.problem.first_spot) > 0
    for pluck, one in forced.items():
        if has_spots[pluck]:
            continue
        key = int(refused.wanted.pitch[pluck]) + refused.semitones
        tracks = comb.tracks_of_key.get(key, ())
        name = pitch_of(key) if 0 <= key < KEY_COUNT else f"key {key}"
        message = f"note {one.note} would be {name}, which no usable tooth of the comb has"
        if one.track is not None and tracks:
            theirs = ", ".join(str(track + 1) for track in tracks)
            has = pitch_of(comb.key_of_track[one.track])
            message = (
                f"note {one.note} would be {name}, but track {one.track + 1} has {has}; {name} is on track {theirs}"
            )
        found.append(Problem(pointer=one.pointer, message=message))
    return found


def _clash(posed: Posed, forced: Sequence[Forced], plucks: Sequence[int], spacing: Spacing) -> Problem:
    """What keeps forced plucks, as few as clash, from sounding together."""
    ranked = sorted(forced, key=lambda one: one.ruling, reverse=True)
    last = ranked[0]
    if len(ranked) > MOST_TOGETHER:
        message = f"{last} and {len(ranked) - 1} other notes that must sound have no room together; drop some of them"
        return Problem(pointer=last.pointer, message=message)
    why = _why(posed, plucks, spacing)
    if len(ranked) == 1:
        return Problem(pointer=last.pointer, message=f"{last} cannot sound: {why}")
    together = "both" if len(ranked) == 2 else "all"  # noqa: PLR2004 - two are both
    names = f"{', '.join(str(one) for one in ranked[:-1])} and {ranked[-1]}"
    of_them = "the two" if together == "both" else "them"
    return Problem(pointer=last.pointer, message=f"{names} cannot {together} sound: {why}; drop one of {of_them}")


def _why(posed: Posed, plucks: Sequence[int], spacing: Spacing) -> str:
    """The nearest conflict between spots of the plucks, in words."""
    spots = [spot for pluck in plucks for spot in range(int(posed.first_spot[pluck]), int(posed.first_spot[pluck + 1]))]
    conflicts = [
        Standing(posed, [other], spacing, [spot]).conflict(spot)
        for spot in spots
        for other in spots
        if posed.pluck[other] < posed.pluck[spot]
    ]
    if not conflicts:
        track = int(posed.track[spots[0]])
        if posed.drive is not None and overloads(posed, np.array(spots[:1])):
            return f"its teeth alone on track {track + 1} load the disc beyond what the drive carries"
        return f"track {track + 1} needs more than a turn between plucks"
    nearest = min(conflicts, key=lambda conflict: conflict.apart_ns)
    if _is_in_the_way(posed, nearest, spacing):
        return _near(posed, nearest, spacing)
    if posed.drive is not None:
        return _heavy(posed, spots)
    return _near(posed, nearest, spacing)


def _is_in_the_way(posed: Posed, conflict: Conflict, spacing: Spacing) -> bool:
    least_ns = float(spacing.least_rad[conflict.track_index]) * posed.turn_ns / (2 * np.pi)
    return conflict.reason == "web" or (conflict.reason != "drive-torque" and conflict.apart_ns < least_ns)


def _near(posed: Posed, conflict: Conflict, spacing: Spacing) -> str:
    if conflict.track_index != conflict.other_track_index:
        return f"tracks {conflict.track_index + 1} and {conflict.other_track_index + 1} would leave too little web"
    need_s = float(spacing.least_rad[conflict.track_index]) * posed.turn_ns / (2 * np.pi * NS_PER_S)
    apart_s = conflict.apart_ns / NS_PER_S
    return (
        f"on track {conflict.track_index + 1} they are {apart_s:.3f} s apart and need {need_s:.3f} s "
        f"({conflict.reason})"
    )


def _heavy(posed: Posed, spots: Sequence[int]) -> str:
    if posed.drive is None:
        raise ValueError("no load limit is kept")
    first = [spot for spot in spots if spot == posed.first_spot[posed.pluck[spot]]]
    heaviest = max(sum(loads_at(posed, posed.drive, np.array(first), int(at_ns))[1]) for at_ns in posed.asked_ns[first])
    return (
        f"together they load the disc with {heaviest / LOAD_GRAINS:.0f} N·mm, and the drive carries "
        f"{posed.drive.limit / LOAD_GRAINS:.0f} N·mm"
    )
