"""The best transposition: by weight kept, hopeless ones skipped by an upper bound."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from layout.arrange.asked import NO_TRACK, Asked, Choose, Chosen, Clash
from layout.arrange.board import ROUNDING_RAD
from layout.arrange.comb import Comb
from layout.arrange.plucks import Wanted
from layout.arrange.rulings import Forced, Rulings, ruling_error
from layout.documents.pitch import KEY_COUNT, pitch_of
from layout.documents.settings import Transpose
from layout.errors import Problem
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import FULL_TURN_RAD, Turning


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rules:
    """What plucks must keep to: the comb, the turning, the rules of nearness, and the rulings."""

    comb: Comb
    turning: Turning
    spacing: Spacing
    rulings: Rulings


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Transposed:
    """The transposition chosen.

    Attributes:
        semitones: Added to every pitch.
        asked: The plucks at this transposition.
        chosen: Their tracks.
        kept: Weight kept.
        bound: No choice at any transposition searched keeps more weight.
    """

    semitones: int
    asked: Asked
    chosen: Chosen
    kept: int
    bound: int


def best_transposed(wanted: Wanted, rules: Rules, transpose: Transpose, choose: Choose) -> Transposed:
    """The transposition that keeps the most weight; of equal ones the smallest, then the lower.

    The one with the highest bound is tried first, and those whose bound cannot win are not tried.

    Raises:
        RulingError: No transposition searched satisfies every ruling.
    """
    bounds = {semitones: _bound(wanted, semitones, rules) for semitones in _searched(transpose)}
    best: Transposed | None = None
    bound = 0
    refused: dict[int, list[Problem]] = {}
    for semitones in sorted(bounds, key=lambda one: _rank(bounds[one], one), reverse=True):
        if best is not None and _rank(bounds[semitones], semitones) < _rank(best.kept, best.semitones):
            continue
        found = _try(wanted, semitones, rules, choose)
        if not isinstance(found, Transposed):
            refused[semitones] = found
            continue
        bound = max(bound, min(found.bound, bounds[semitones]))
        if best is None or _rank(found.kept, semitones) > _rank(best.kept, best.semitones):
            best = found
    if best is None:
        raise ruling_error(_told(refused, transpose))
    return Transposed(
        semitones=best.semitones,
        asked=best.asked,
        chosen=best.chosen,
        kept=best.kept,
        bound=max(bound, best.kept),
    )


def _searched(transpose: Transpose) -> list[int]:
    if transpose.semitones is not None:
        return [transpose.semitones]
    return list(range(-transpose.range, transpose.range + 1))


def _rank(weight: int, semitones: int) -> tuple[int, int, int]:
    return weight, -abs(semitones), -semitones


def _bound(wanted: Wanted, semitones: int, rules: Rules) -> int:
    """The weight of the plucks on the comb; of each pitch no more than its tracks can hold.

    On a stretch of angle a track holds floor(stretch/least) + 1 edges.
    """
    total = 0
    for pitch in np.unique(wanted.pitch).tolist():
        tracks = rules.comb.tracks_of_key.get(pitch + semitones, ())
        if tracks:
            here = wanted.pitch == pitch
            stretch_rad = FULL_TURN_RAD * float(np.ptp(wanted.asked_s[here])) / rules.turning.revolution_s
            least_rad = rules.spacing.least_rad[list(tracks)] - ROUNDING_RAD
            room = int(np.sum(np.floor(stretch_rad / least_rad) + 1))
            total += int(np.sort(wanted.weight[here])[::-1][:room].sum())
    return total


def _try(wanted: Wanted, semitones: int, rules: Rules, choose: Choose) -> Transposed | list[Problem]:
    forced = _forced_plucks(wanted, rules.rulings)
    problems = [
        Problem(pointer=one.pointer, message=message)
        for pluck, one in forced.items()
        if (message := _off_the_comb(one, int(wanted.pitch[pluck]) + semitones, rules.comb)) is not None
    ]
    if problems:
        return problems
    asked = wanted.transposed(semitones, rules.comb.tracks_of_key)
    chosen = choose(asked, rules.turning, rules.spacing)
    if isinstance(chosen, Clash):
        return [_clash_problem(chosen, forced, rules)]
    kept = int(asked.weight[chosen.track_index != NO_TRACK].sum())
    return Transposed(semitones=semitones, asked=asked, chosen=chosen, kept=kept, bound=chosen.bound)


def _forced_plucks(wanted: Wanted, rulings: Rulings) -> dict[int, Forced]:
    found = {pluck: rulings.of_pluck(wanted.notes[pluck]) for pluck in np.flatnonzero(wanted.must_sound).tolist()}
    return {pluck: one for pluck, one in found.items() if one is not None}


def _off_the_comb(forced: Forced, key: int, comb: Comb) -> str | None:
    tracks = comb.tracks_of_key.get(key, ())
    name = pitch_of(key) if 0 <= key < KEY_COUNT else f"key {key}"
    if not tracks:
        return f"note {forced.note} would be {name}, which no usable tooth of the comb has"
    if forced.track is not None and forced.track not in tracks:
        theirs = ", ".join(str(track + 1) for track in tracks)
        has = pitch_of(comb.key_of_track[forced.track])
        return (
            f"note {forced.note} would be {name}, but track {forced.track + 1} has {has}; {name} is on track {theirs}"
        )
    return None


def _clash_problem(clash: Clash, forced: Mapping[int, Forced], rules: Rules) -> Problem:
    one, conflict = forced[clash.pluck], clash.conflict
    per_rad_s = rules.turning.revolution_s / FULL_TURN_RAD
    apart = f"{conflict.apart_rad * per_rad_s:.3f} s apart"
    if conflict.other == clash.pluck:
        return Problem(
            pointer=one.pointer,
            message=f"{one} cannot sound: track {conflict.track_index + 1} needs more than a turn between plucks",
        )
    other = forced[conflict.other]
    later, earlier = sorted((one, other), key=lambda found: found.ruling, reverse=True)
    if conflict.track_index != conflict.other_track_index:
        why = f"tracks {conflict.track_index + 1} and {conflict.other_track_index + 1} would leave too little web"
    else:
        need_s = float(rules.spacing.least_rad[conflict.track_index]) * per_rad_s
        why = f"on track {conflict.track_index + 1} they are {apart} and need {need_s:.3f} s ({conflict.reason})"
    return Problem(
        pointer=later.pointer, message=f"{later} and {earlier} cannot both sound: {why}; drop one of the two"
    )


def _told(refused: Mapping[int, list[Problem]], transpose: Transpose) -> list[Problem]:
    """The problems of the transposition nearest to as written, with the transposition named."""
    nearest = max(refused, key=lambda semitones: _rank(0, semitones))
    where = f"transposed by {nearest:+d}"
    if transpose.semitones is None:
        where = f"no transposition within ±{transpose.range} semitones satisfies all rulings; {where}"
    return [Problem(pointer=one.pointer, message=f"{where}: {one.message}") for one in refused[nearest]]
