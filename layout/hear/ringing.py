"""From plucks to rings: what each tooth sounds, and until when."""

import math
from collections import defaultdict
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.documents.pitch import key_of
from layout.documents.tooth import Tooth
from layout.hear.defaults import DEFAULTS
from layout.hear.hearing import Ring, Voice
from layout.hear.performance import Performance
from layout.hear.timeline import Timeline
from layout.hear.voicing import TunedTooth, between, tuned_tooth, voice_of
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.turning import FULL_TURN_RAD, Turning

_ONE_MOMENT_DECIMALS = 6  # of a second: notes of one pitch nearer than a microsecond are one


@dataclass(frozen=True, slots=True, kw_only=True)
class Rung:
    """Rings in the order of their beginnings, and the voices they are of."""

    voices: tuple[Voice, ...]
    rings: tuple[Ring, ...]


class _Teeth:
    """Voices made once for each tooth that sounds."""

    def __init__(self) -> None:
        self.voices: list[Voice] = []
        self._places: dict[TunedTooth, int] = {}

    def place(self, tooth: TunedTooth) -> int:
        if tooth not in self._places:
            self._places[tooth] = len(self.voices)
            self.voices.append(voice_of(tooth))
        return self._places[tooth]


def rung_by_disc(performance: Performance, movement: Movement, turning: Turning, timeline: Timeline) -> Rung:
    """What the disc plays.

    A damped tooth is silenced where its damper touches the wheel's point, any tooth where the point takes hold of
    it: its lift before the release, where the lift is stated, else as the release comes. Plucks after the winding
    has ended are not played.

    Args:
        performance: Its plucks.
        movement: Its comb.
        turning: The movement's turning.
        timeline: How the disc turns.
    """
    plucks = performance.plucks
    arm_mm = turning.radius_mm * np.cos(turning.row_rad)
    released_rad = _turned_rad(plucks.sounds_s, turning)
    damper_rad = (plucks.sounds_s - plucks.silent_from_s) / turning.revolution_s * FULL_TURN_RAD
    teeth, rings = _Teeth(), []
    for track, on_track in _by_value(plucks.track_index, released_rad).items():
        ends_rad = released_rad[on_track]
        for tooth in _plucked(movement, track):
            lifted_rad = (tooth.lift_mm or 0.0) / float(arm_mm[track])
            taken_rad = np.maximum(damper_rad[on_track] if tooth.damped else 0.0, lifted_rad)
            fade_s = DEFAULTS.damper_fade_s if tooth.damped else DEFAULTS.hold_fade_s
            voice = teeth.place(tuned_tooth(tooth, movement))
            sounding = _Sounding(voice=voice, track=track + 1, key=key_of(tooth.pitch), fade_s=fade_s)
            rings += _rings(sounding, ends_rad, np.maximum(ends_rad - taken_rad, 0.0), timeline)
    return Rung(voices=tuple(teeth.voices), rings=tuple(sorted(rings, key=_order)))


def rung_as_written(performance: Performance, movement: Movement, turning: Turning, timeline: Timeline) -> Rung:
    """Every note asked for at its own moment, as if no star wheel and no damper had to be waited for.

    Each sounds on the innermost track of its pitch, on all its teeth, or on a tooth made up between its neighbours
    where the comb has none; it is silenced as the next note of its pitch begins.

    Args:
        performance: Its notes.
        movement: The comb.
        turning: The movement's turning.
        timeline: How the disc turns.
    """
    comb = [tuned_tooth(tooth, movement) for tooth in movement.teeth if tooth.usable]
    tracks: dict[int, int] = {}
    for tooth in sorted(movement.teeth, key=lambda tooth: tooth.track):
        if tooth.usable:
            tracks.setdefault(key_of(tooth.pitch), tooth.track)
    teeth, rings = _Teeth(), []
    written_s = np.round(performance.written_s, _ONE_MOMENT_DECIMALS)
    for key, of_key in _by_value(performance.written_key, written_s).items():
        moments_rad = _turned_rad(np.unique(written_s[of_key]), turning)
        track = tracks.get(key, 0)
        sounds = [tuned_tooth(tooth, movement) for tooth in _plucked(movement, track - 1)] if track else []
        for tuned in sounds or [between(comb, key)]:
            sounding = _Sounding(voice=teeth.place(tuned), track=track, key=key, fade_s=DEFAULTS.hold_fade_s)
            rings += _rings(sounding, moments_rad, moments_rad, timeline)
    return Rung(voices=tuple(teeth.voices), rings=tuple(sorted(rings, key=_order)))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Sounding:
    """What the rings of one tooth have in common."""

    voice: int
    track: int
    key: int
    fade_s: float


def _rings(sounding: _Sounding, ends_rad: FloatArray, taken_rad: FloatArray, timeline: Timeline) -> list[Ring]:
    """The rings of one tooth: from each release until it is taken hold of for the next, or for ever.

    Args:
        sounding: The tooth.
        ends_rad: Shape (n,). Where it is released, rising.
        taken_rad: Shape (n,). Where it is taken hold of before each release.
        timeline: How the disc turns; what lies after it stops is not played.
    """
    played = ends_rad <= timeline.stops_rad
    released_s = timeline.moment_s(ends_rad[played])
    taken_s = timeline.moment_s(np.minimum(taken_rad, ends_rad)[played])
    # Silent by the release at the latest; a tooth taken hold of again before it was let go never rings on.
    held_s = np.maximum(np.minimum(taken_s, released_s - sounding.fade_s)[1:], released_s[:-1])
    return [
        Ring(
            voice=sounding.voice,
            track=sounding.track,
            key=sounding.key,
            starts_s=starts_s,
            held_s=until_s,
            fade_s=sounding.fade_s,
        )
        for starts_s, until_s in zip(released_s.tolist(), [*held_s.tolist(), math.inf], strict=False)
    ]


def _plucked(movement: Movement, track_index: int) -> list[Tooth]:
    return [tooth for tooth in movement.teeth if tooth.usable and tooth.track == track_index + 1]


def _turned_rad(sounds_s: FloatArray, turning: Turning) -> FloatArray:
    """How far the disc has turned from rest at these moments of the music; what comes before rest, a turn later."""
    turned = turning.start_rad + np.asarray(sounds_s) / turning.revolution_s * FULL_TURN_RAD
    return np.where(turned < 0, turned + FULL_TURN_RAD, turned)


def _by_value(values: IntArray, order: FloatArray) -> dict[int, IntArray]:
    """The places of each value, in their order."""
    places: dict[int, list[int]] = defaultdict(list)
    for place in np.argsort(order, kind="stable").tolist():
        places[int(values[place])].append(place)
    return {value: np.array(places[value], dtype=np.int64) for value in sorted(places)}


def _order(ring: Ring) -> tuple[float, int, int]:
    return ring.starts_s, ring.track, ring.voice
