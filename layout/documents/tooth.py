"""A tooth of a movement's comb."""

from typing import Annotated

from pydantic import Field, field_validator

from layout.documents.pitch import PITCH_PATTERN, key_of
from layout.documents.reading import Length, NotNegative, Offset, Part, Positive, Within

MOST_CENTS = 1200.0  # cents; an octave, by which no comb is out of tune
MOST_END_MASS = 100.0  # masses of the tooth itself; a bass tooth weighted with lead carries a few
LEAST_QUALITY, MOST_QUALITY = 1.0, 1e6  # what is gone within a swing, to quartz in a vacuum; teeth have hundreds


def unstated(value: float | None) -> bool:
    """Whether a number is not stated; such a one is left out of a dump, so that layouts keep their fingerprints."""
    return value is None


EndMass = Annotated[NotNegative, Within(le=MOST_END_MASS)]
Quality = Annotated[Positive, Within(ge=LEAST_QUALITY, le=MOST_QUALITY)]


class Tooth(Part):
    """One tuned tooth of the comb and the track that plucks it.

    `pitch` and `cents` are what it sounds, a mass at its tip included; `end_mass_ratio` is that mass over the
    tooth's own, `quality` the Q of its sound: a partial of frequency f falls to 1/e in Q/(π·f).
    """

    tooth: Annotated[int, Field(ge=1)]
    track: Annotated[int, Field(ge=1)]
    pitch: Annotated[str, Field(json_schema_extra={"pattern": PITCH_PATTERN, "examples": ["C4", "F#5", "Bb3"]})]
    cents: Annotated[Offset, Within(ge=-MOST_CENTS, le=MOST_CENTS)] = 0.0
    damped: bool = True
    usable: bool = True
    stiffness_n_per_mm: Length | None = None
    lift_mm: Length | None = None
    end_mass_ratio: EndMass | None = Field(default=None, exclude_if=unstated)
    quality: Quality | None = Field(default=None, exclude_if=unstated)

    @field_validator("pitch")
    @classmethod
    def _is_a_pitch(cls, pitch: str) -> str:
        key_of(pitch)
        return pitch
