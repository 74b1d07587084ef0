"""What a hearing takes where a movement states nothing: one table, each value with its unit and what it rests on.

None of it decides which note sounds or when; where a movement states its own, that counts.
"""

from dataclasses import dataclass, field, fields
from typing import Any


@dataclass(frozen=True, slots=True, kw_only=True)
class Default:
    """A value of the table as it is shown to users."""

    name: str
    value: Any
    unit: str
    rests_on: str


def _default(value: Any, unit: str, rests_on: str) -> Any:
    return field(default=value, metadata={"unit": unit, "rests_on": rests_on})


@dataclass(frozen=True, slots=True, kw_only=True)
class Resonance:
    """A resonance of the case: it adds `gain_factor` of what it gets at its frequency, a quarter period late."""

    frequency_hz: float
    quality_factor: float
    gain_factor: float


@dataclass(frozen=True, slots=True, kw_only=True)
class HearingDefaults:
    """The table."""

    quality_factor: float = _default(
        700.0, "", "assumed, from memory: small clamped reeds have some 100 to 2,000; no measured comb was found"
    )
    end_mass_ratio: float = _default(0.0, "", "a plain tooth: what is not stated is not there")
    lift_mm: float = _default(0.4, "mm", "assumed: teeth that state none are as loud as each other")
    stiffness_n_per_mm: float = _default(1.0, "N/mm", "assumed, as the lift")
    most_partials_count: int = _default(8, "partials", "the ninth of a plain bar is 46 dB below the first")
    heard_to_hz: float = _default(20_000.0, "Hz", "common practice: the upper end of hearing")
    still_ratio: float = _default(2.0**-24, "", "of the loudest tooth: below half a step of 24 bits")
    damper_fade_s: float = _default(0.006, "s", "assumed, from memory: a damper stills a tooth within a few swings")
    hold_fade_s: float = _default(0.002, "s", "assumed: a point that takes hold of a tooth stills it at once")
    last_ring_s: float = _default(8.0, "s", "longest that the last notes ring after the turn and the tune are over")
    last_fade_s: float = _default(1.0, "s", "so that what rings longer ends without a click")
    body: tuple[Resonance, ...] = _default(
        (
            Resonance(frequency_hz=240.0, quality_factor=6.0, gain_factor=0.25),
            Resonance(frequency_hz=610.0, quality_factor=9.0, gain_factor=0.2),
            Resonance(frequency_hz=1750.0, quality_factor=12.0, gain_factor=0.15),
        ),
        "",
        "assumed: the air and the two faces of a small wooden case, lightly: within 1.5 dB anywhere",
    )
    body_taps_count: int = _default(512, "samples", "10.7 ms, in which the lowest resonance falls to a quarter")


DEFAULTS = HearingDefaults()


def defaults_told() -> tuple[Default, ...]:
    """Every default, in the order of the table."""
    return tuple(
        Default(
            name=part.name,
            value=getattr(DEFAULTS, part.name),
            unit=part.metadata["unit"],
            rests_on=part.metadata["rests_on"],
        )
        for part in fields(DEFAULTS)
    )
