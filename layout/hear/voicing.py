"""What each tooth of a comb sounds like, and teeth made up for pitches a comb lacks."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.documents.pitch import key_of
from layout.documents.tooth import Tooth
from layout.hear.defaults import DEFAULTS
from layout.hear.hearing import Voice
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.tooth_bending import bar_roots, decay_s, frequency_hz, lift_shares, partial_ratios


@dataclass(frozen=True, slots=True, kw_only=True)
class TunedTooth:
    """A tooth with every number that its sound needs."""

    key: int
    off_cents: float
    quality_factor: float
    end_mass_ratio: float
    lift_mm: float
    stiffness_n_per_mm: float


def tuned_tooth(tooth: Tooth, movement: Movement) -> TunedTooth:
    """A tooth, with the movement's quality or the defaults for what it does not state."""
    quality = tooth.quality or movement.tooth_quality or DEFAULTS.quality_factor
    return TunedTooth(
        key=key_of(tooth.pitch),
        off_cents=tooth.cents,
        quality_factor=quality,
        end_mass_ratio=DEFAULTS.end_mass_ratio if tooth.end_mass_ratio is None else tooth.end_mass_ratio,
        lift_mm=tooth.lift_mm or DEFAULTS.lift_mm,
        stiffness_n_per_mm=tooth.stiffness_n_per_mm or DEFAULTS.stiffness_n_per_mm,
    )


def between(teeth: Sequence[TunedTooth], key: int) -> TunedTooth:
    """A tooth made up for a pitch, in tune: its numbers lie between its neighbours', past the ends as the end's.

    Args:
        teeth: Of the comb, in any order; none gives a tooth of the defaults.
        key: The pitch.
    """
    row = sorted(teeth, key=lambda tooth: (tooth.key, tooth.off_cents))
    keys = [tooth.key for tooth in row]

    def at(name: str) -> float:
        stated = [float(getattr(tooth, name)) for tooth in row]
        return float(np.interp(key, keys, stated)) if row else float(getattr(DEFAULTS, name))

    return TunedTooth(
        key=key,
        off_cents=0.0,
        quality_factor=at("quality_factor"),
        end_mass_ratio=at("end_mass_ratio"),
        lift_mm=at("lift_mm"),
        stiffness_n_per_mm=at("stiffness_n_per_mm"),
    )


def voice_of(tooth: TunedTooth) -> Voice:
    """The sound of a tooth let go from its lift, as the speed of its tip.

    A partial's speed is its share of the lift times its frequency. Between teeth, the first partial's is
    as the root of the energy the tooth is lifted with, ½·k·q². Partials that nobody hears are left out: all, for
    a tooth above hearing.
    """
    roots = bar_roots(tooth.end_mass_ratio, DEFAULTS.most_partials_count)
    ratios = partial_ratios(roots)
    heard_hz = frequency_hz(tooth.key, tooth.off_cents) * ratios
    heard = heard_hz <= DEFAULTS.heard_to_hz
    speeds = lift_shares(roots, tooth.end_mass_ratio) * ratios
    loudness = tooth.lift_mm * math.sqrt(tooth.stiffness_n_per_mm)
    return Voice(
        frequency_hz=frozen_floats(heard_hz[heard]),
        decay_s=frozen_floats(decay_s(hz, tooth.quality_factor) for hz in heard_hz[heard].tolist()),
        level_ratio=frozen_floats(loudness * (speeds / speeds[0])[heard]),
    )
