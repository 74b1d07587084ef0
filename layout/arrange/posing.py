"""Posing: from the plucks a tune asks for to the problem of one transposition on one comb."""

from dataclasses import dataclass

import numpy as np

from layout.arrange.comb import Comb
from layout.arrange.plucks import NO_TRACK, Wanted
from layout.arrange.problem import NO_PLUCK, NS_PER_S, Beside, Drive, Lift, Problem
from layout.arrange.weights import FADED_S
from layout.documents.movement import Movement
from layout.documents.settings import Settings
from layout.mechanics.arrays import BoolArray, IntArray, counted_out, frozen_ints
from layout.mechanics.drive import lifts_of
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import FULL_TURN_RAD, Turning

OCTAVE = 12  # semitones
LOAD_GRAINS = 1000  # a newton millimetre; loads are whole thousandths, rounded up

# Edges may be this much nearer than their least angle: a repeat asked exactly at its least time is
# in order, whatever rounding makes of it. At 210 mm it is 0.2 nm; far below any cutter.
ROUNDING_RAD = 1e-9

FIT_GRAINS = 1000  # fits are thousandths, as the factors of a weight are


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rules:
    """What every transposition keeps to: comb and turning in whole numbers, and the settings' fits.

    Attributes:
        comb: Which tracks sound a key.
        least_ns: Shape (tracks,). From one pluck of a track to the next.
        besides: Tracks that may come too near to each other.
        turn_ns: One turn.
        free_ns: The last moment of the music on the disc.
        drive: The load limit; None where there is none or it is not to be kept.
        octaves: Which plucks may be moved by an octave.
        octave_fit: What part of its weight such a pluck keeps, in thousandths.
        ringing_cost: What part of its weight a pluck loses on a tooth that rings, in thousandths.
        ringing_bass_cost: What part it loses on an undamped tooth under a foreign harmony.
        undamped: Shape (tracks,). Tracks none of whose usable teeth has a damper.
    """

    comb: Comb
    least_ns: IntArray
    besides: tuple[Beside, ...]
    turn_ns: int
    free_ns: int
    drive: Drive | None
    octaves: str
    octave_fit: int
    ringing_cost: int
    ringing_bass_cost: int
    undamped: BoolArray


def rules_of(movement: Movement, comb: Comb, turning: Turning, spacing: Spacing, settings: Settings) -> Rules:
    """The rules of a movement and the settings, in whole numbers."""
    per_rad = turning.revolution_s * NS_PER_S / FULL_TURN_RAD
    least_ns = np.ceil((spacing.least_rad - ROUNDING_RAD) * per_rad).astype(np.int64)
    damped = movement.damped_tracks
    undamped = np.array([track.track not in damped for track in movement.tracks])
    return Rules(
        comb=comb,
        least_ns=frozen_ints(least_ns),
        besides=_besides(turning, spacing, per_rad),
        turn_ns=round(turning.revolution_s * NS_PER_S),
        free_ns=round(turning.free_turn_s * NS_PER_S),
        drive=_drive(movement, turning) if settings.load_limit == "keep" else None,
        octaves=settings.octave_moves,
        octave_fit=round(settings.octave_fit * FIT_GRAINS),
        ringing_cost=round(settings.writing.ringing_tooth_cost * FIT_GRAINS),
        ringing_bass_cost=round(settings.writing.ringing_bass_cost * FIT_GRAINS),
        undamped=undamped,
    )


def pose(wanted: Wanted, semitones: int, rules: Rules) -> Problem:
    """The problem of playing these plucks, semitones higher.

    A pluck the comb has no tooth for has no spots. No plucks give a problem of none.
    """
    pluck, track, fit, spread = _spots(wanted, semitones, rules)
    asked_ns = np.rint(wanted.asked_s * NS_PER_S).astype(np.int64)
    nudge_ns = wanted.nudge_ns
    earliest_ns = np.minimum(np.maximum(asked_ns - nudge_ns, 0), asked_ns)
    latest_ns = np.maximum(np.minimum(asked_ns + nudge_ns, rules.free_ns), asked_ns)
    moment_ns = np.clip(asked_ns + wanted.shift_ns, earliest_ns, latest_ns)[pluck]
    fit = np.where(
        rules.undamped[track] & wanted.foreign[pluck], fit * (FIT_GRAINS - rules.ringing_bass_cost), fit * FIT_GRAINS
    )
    worth = np.maximum(wanted.weight[pluck] * fit // FIT_GRAINS**2, 1)
    ringing_ns = round(FADED_S * NS_PER_S) if rules.ringing_cost else 0
    several = np.bincount(pluck, minlength=len(asked_ns)) > 1
    rest_ns = np.where(several, np.maximum(wanted.rest_ns, wanted.alternates_ns), wanted.rest_ns)
    first_spot = np.searchsorted(pluck, np.arange(len(asked_ns) + 1))
    return Problem(
        must_sound=wanted.must_sound,
        parent=wanted.parent,
        first_spot=frozen_ints(first_spot),
        pluck=frozen_ints(pluck),
        track=frozen_ints(track),
        worth=frozen_ints(worth),
        asked_ns=frozen_ints(moment_ns),
        earliest_ns=frozen_ints(earliest_ns[pluck]),
        latest_ns=frozen_ints(latest_ns[pluck]),
        least_ns=frozen_ints(np.maximum(rules.least_ns[track], rest_ns[pluck])),
        chord=frozen_ints(np.cumsum(np.diff(asked_ns, prepend=-1) > 0) - 1),
        spread=frozen_ints(spread),
        ringing_cost=frozen_ints(np.minimum(worth * rules.ringing_cost // FIT_GRAINS, worth - 1)),
        ringing_ns=frozen_ints(np.full(len(rules.least_ns), ringing_ns)),
        turn_ns=rules.turn_ns,
        besides=rules.besides,
        drive=rules.drive,
    )


def most_kept(wanted: Wanted, semitones: int, rules: Rules) -> int:
    """The weight of all plucks whose pitch the comb has, in any octave where moves or rulings may take them there."""
    keys = np.array(sorted(rules.comb.tracks_of_key), dtype=np.int64)
    pitch = wanted.pitch + semitones
    may_move = (wanted.on_track != NO_TRACK) | (rules.octaves != "none")
    sounds = _places(keys, pitch)[1]
    if may_move.any():
        sounds |= may_move & np.isin(pitch % OCTAVE, keys % OCTAVE)
    return int(wanted.weight[sounds].sum())


def _places(rising: IntArray, values: IntArray) -> tuple[IntArray, BoolArray]:
    """Of each value its place among rising ones, and whether it is one of them; the place of another says nothing."""
    if not len(rising):
        return np.zeros_like(values), np.zeros(len(values), dtype=np.bool_)
    places = np.minimum(np.searchsorted(rising, values), len(rising) - 1)
    return places, rising[places] == values


def _spots(wanted: Wanted, semitones: int, rules: Rules) -> tuple[IntArray, IntArray, IntArray, IntArray]:
    """Pluck, track, fit in thousandths and spread of every spot, by (pluck, octave, track)."""
    shifts = [0] if rules.octaves == "none" else [0, -OCTAVE, OCTAVE]
    may_move = wanted.outer if rules.octaves == "outer" else np.full(len(wanted.pitch), rules.octaves == "all")
    found = []
    table = _Table(rules.comb)
    free = wanted.on_track == NO_TRACK
    _, on_comb = _places(table.keys, wanted.pitch + semitones)
    for shift in shifts:
        # What has extra plucks stays in its octave where it can; extra plucks always do.
        moves = may_move & (wanted.parent == NO_PLUCK) & ~(wanted.fixed & on_comb)
        plucks = np.flatnonzero(free & ~_parted(wanted, semitones, rules) & (moves | (shift == 0)))
        of, tracks = table.tracks(plucks, wanted.pitch[plucks] + semitones + shift)
        found.append((of, tracks, np.full(len(of), FIT_GRAINS if shift == 0 else rules.octave_fit)))
    ruled = np.flatnonzero(~free)
    ruled_keys = np.array([rules.comb.key_of_track[int(one)] for one in wanted.on_track[ruled]], dtype=np.int64)
    moved = ruled_keys - (wanted.pitch[ruled] + semitones)
    # By hand a note may go to any octave of its pitch, whatever the settings let the others do.
    sounds = moved % OCTAVE == 0
    fits = np.where(moved == 0, FIT_GRAINS, rules.octave_fit)
    found.append((ruled[sounds], wanted.on_track[ruled][sounds], fits[sounds]))
    pluck, track, fit = (np.concatenate(part) for part in zip(*found, strict=True))
    order = np.lexsort((track, -fit, pluck))
    return pluck[order], track[order], fit[order], np.zeros(len(order), dtype=np.int64)


def _parted(wanted: Wanted, semitones: int, rules: Rules) -> BoolArray:
    """Extra plucks of plucks that a ruling puts into another octave: they are not played."""
    parted = np.zeros(len(wanted.pitch), dtype=np.bool_)
    for extra in np.flatnonzero(wanted.parent != NO_PLUCK).tolist():
        track = int(wanted.on_track[wanted.parent[extra]])
        parted[extra] = track != NO_TRACK and rules.comb.key_of_track[track] != wanted.pitch[extra] + semitones
    return parted


class _Table:
    """The tracks of every key, flat, so that many plucks are looked up at once."""

    def __init__(self, comb: Comb) -> None:
        self.keys = np.array(sorted(comb.tracks_of_key), dtype=np.int64)
        counts = [len(comb.tracks_of_key[key]) for key in self.keys.tolist()]
        self.flat = np.array([track for key in self.keys.tolist() for track in comb.tracks_of_key[key]], dtype=np.int64)
        self.start = np.concatenate([[0], np.cumsum(counts)]).astype(np.int64)

    def tracks(self, plucks: IntArray, keys: IntArray) -> tuple[IntArray, IntArray]:
        """Every (pluck, track) of these plucks with these keys."""
        at, known = _places(self.keys, keys)
        plucks, at = plucks[known], at[known]
        run, place = counted_out(self.start[at], self.start[at + 1] - self.start[at])
        return plucks[run], self.flat[place]


def _besides(turning: Turning, spacing: Spacing, per_rad: float) -> tuple[Beside, ...]:
    """The forbidden stretches, moved from working-edge angles to moments.

    Forbidden is from < α_outer − α_inner < to with α = s·φ + release, so with Δ the difference of
    the releases φ_outer − φ_inner lies between s·(from − Δ) and s·(to − Δ).
    """
    besides = []
    for pair in spacing.between:
        release_rad = float(turning.release_rad[pair.outer_index] - turning.release_rad[pair.inner_index])
        low, high = sorted(turning.direction * (end - release_rad) for end in (pair.from_rad, pair.to_rad))
        from_ns, to_ns = round((low + ROUNDING_RAD) * per_rad), round((high - ROUNDING_RAD) * per_rad)
        if from_ns < to_ns:
            besides.append(
                Beside(inner_index=pair.inner_index, outer_index=pair.outer_index, from_ns=from_ns, to_ns=to_ns)
            )
    return tuple(besides)


def _drive(movement: Movement, turning: Turning) -> Drive | None:
    lifts = lifts_of(movement, turning)
    if lifts is None or movement.drive is None or movement.drive.torque_limit_nmm is None:
        return None
    return Drive(
        lifts=tuple(
            tuple(
                Lift(load=int(np.ceil(lift.peak_nmm * LOAD_GRAINS)), window_ns=max(round(lift.window_s * NS_PER_S), 1))
                for lift in track
            )
            for track in lifts
        ),
        limit=int(np.floor(movement.drive.torque_limit_nmm * LOAD_GRAINS)),
    )
