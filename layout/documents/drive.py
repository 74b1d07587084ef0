"""Parts of a movement's drive: the spring, the train from barrel to disc, and the air brake."""

from typing import Annotated, Self

from pydantic import Field, model_validator

from layout.documents.reading import At, Length, NotNegative, Part, Positive, Within

MOST_TURNS = 100.0  # turns; a barrel has a handful
MOST_STAGES = 12  # stages of a train; clockwork has up to six
MOST_PARTS = 32  # turning parts of a train, each stated with its inertia
# Far outside any clockwork, and near enough that products of twelve stages stay numbers.
LEAST_STAGE, MOST_STAGE = 1e-3, 1e3  # turns per turn; clockwork has 1/12 to 12
MOST_TRAIN = 1e6  # turns of a part per turn of the disc; a brake makes some thousand
LEAST_TURNS = 0.01  # turns; a spring wound less drives nothing
LEAST_EFFICIENCY = 0.01  # a train that loses more stands still
LEAST_MODULUS, MOST_MODULUS = (
    1e3,
    1e6,
)  # N/mm²; plastics to diamond, steel has 2e5
LEAST_SPRING_MM, MOST_SPRING_MM = 1.0, 1e6  # mm of strip; a large barrel holds some metres

StageRatio = Annotated[Positive, Within(ge=LEAST_STAGE, le=MOST_STAGE)]


class Spring(Part):
    """A flat spiral spring in a barrel: M = E·b·h³·φ/(12·L).

    `wound_turns` is how far it is wound from its free shape when full; `usable_turns` is how many
    of those the barrel gives before the stop, or before the spring is let down no further.
    """

    elastic_modulus_n_per_mm2: Annotated[Positive, Within(ge=LEAST_MODULUS, le=MOST_MODULUS)]
    width_mm: Length
    thickness_mm: Length
    length_mm: Annotated[Positive, Within(ge=LEAST_SPRING_MM, le=MOST_SPRING_MM)]
    wound_turns: Annotated[Positive, Within(ge=LEAST_TURNS, le=MOST_TURNS)]
    usable_turns: Annotated[Positive, Within(ge=LEAST_TURNS, le=MOST_TURNS)]

    @model_validator(mode="after")
    def _usable_are_wound(self) -> Self:
        if self.usable_turns > self.wound_turns:
            raise At("/usable_turns", "usable_turns cannot be above wound_turns")
        return self


class Winding(Part):
    """From the spring to the disc, and on to the air brake.

    `barrel_to_disc` are the stages from barrel to disc, each in turns of the driven per turn of the
    driving wheel; `disc_to_brake` those from the disc on to the air brake. `efficiency` is that of the
    train from barrel to disc; where it is left out, what is told is an upper bound.
    """

    spring: Spring
    barrel_to_disc: Annotated[tuple[StageRatio, ...], Field(min_length=1, max_length=MOST_STAGES)]
    disc_to_brake: Annotated[tuple[StageRatio, ...], Field(max_length=MOST_STAGES)] = ()
    brake_turns_per_s: Positive | None = None
    efficiency: Annotated[float, Within(ge=LEAST_EFFICIENCY, le=1)] | None = None
    friction_nmm: NotNegative | None = None


class TrainStage(Part):
    """One turning part of the gear train, with its turns per turn of the disc."""

    inertia_kg_m2: Positive
    ratio: Annotated[Positive, Within(le=MOST_TRAIN)]


class Drive(Part):
    """What turns the disc. Every field is optional; what is not stated is not checked."""

    torque_limit_nmm: Positive | None = None
    surplus_torque_nmm: Positive | None = None
    disc_inertia_kg_m2: Positive | None = None
    train: Annotated[tuple[TrainStage, ...], Field(max_length=MOST_PARTS)] = ()
    winding: Winding | None = None
