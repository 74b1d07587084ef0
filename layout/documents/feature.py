"""Rows of holes, slots and notches of a disc's blank, and where they may lie."""

import math
from typing import Annotated, Literal

from pydantic import Field

from layout.documents.reading import FULL_TURN_DEG, Angle, At, Length, Part

MOST_FEATURES = 400  # holes of all feature rows; a drive row of a large disc has under 200
MOST_ROWS = 32  # feature rows, and keep-out rings, and stages of a train; a disc has a few of each


class Feature(Part):
    """A row of equal holes, slots or rim notches that drive, stop or locate the disc."""

    purpose: Literal["drive", "stop", "location"]
    shape: Literal["hole", "slot", "notch"]
    radius_mm: Length
    first_at_deg: Angle = 0.0
    count: Annotated[int, Field(ge=1, le=MOST_FEATURES)] = 1
    width_mm: Length
    length_mm: Length

    @property
    def angles_deg(self) -> tuple[float, ...]:
        """Where the features of the row lie, evenly spread round the disc from first_at_deg."""
        return tuple(self.first_at_deg + FULL_TURN_DEG * place / self.count for place in range(self.count))


def check_features(features: tuple[Feature, ...], *, rim_mm: float, hole_mm: float) -> None:
    """Raise At, with the place in a movement document, where features do not fit between hole and rim, or meet.

    Args:
        features: The rows.
        rim_mm: Radius of the blank.
        hole_mm: Radius of its centre hole.
    """
    if sum(feature.count for feature in features) > MOST_FEATURES:
        raise At("/disc/features", f"the disc's features are more than {MOST_FEATURES} holes, slots and notches")
    for place, feature in enumerate(features):
        _check_feature(feature, rim_mm, hole_mm, f"/disc/features/{place}")
    _check_notches_stay_apart(features)


def _check_feature(feature: Feature, rim_mm: float, hole_mm: float, at: str) -> None:
    half_mm = feature.width_mm / 2
    if feature.shape == "notch":
        if not feature.radius_mm - half_mm < rim_mm < feature.radius_mm + half_mm:
            raise At(f"{at}/radius_mm", f"a notch must cross the rim at {rim_mm:g} mm; move its radius_mm or widen it")
        if feature.radius_mm - half_mm <= hole_mm:
            raise At(
                f"{at}/width_mm",
                f"a notch at {feature.radius_mm:g} mm, {feature.width_mm:g} wide, reaches the centre hole",
            )
    elif feature.radius_mm + half_mm >= rim_mm or feature.radius_mm - half_mm <= hole_mm:
        raise At(
            f"{at}/radius_mm", f"the {feature.purpose} {feature.shape} at {feature.radius_mm:g} mm leaves the disc"
        )
    if feature.shape == "hole" and feature.length_mm != feature.width_mm:
        raise At(f"{at}/length_mm", "a hole is round: give it the same width_mm and length_mm, or shape slot")
    if feature.count * feature.length_mm >= 2 * math.pi * feature.radius_mm:
        raise At(
            f"{at}/count", f"{feature.count} of {feature.length_mm:g} mm do not fit round {feature.radius_mm:g} mm"
        )


def _check_notches_stay_apart(features: tuple[Feature, ...]) -> None:
    """The rim is one simple outline only where no two notches meet; each lies in a sector of its own."""
    sectors = []
    for feature in features:
        if feature.shape == "notch":
            half_deg = math.degrees(math.atan2(feature.length_mm / 2, feature.radius_mm - feature.width_mm / 2))
            step_deg = FULL_TURN_DEG / feature.count
            sectors += [((feature.first_at_deg + n * step_deg) % FULL_TURN_DEG, half_deg) for n in range(feature.count)]
    sectors.sort()
    for place, (at_deg, half_deg) in enumerate(sectors):
        next_deg, next_half_deg = sectors[(place + 1) % len(sectors)]
        wrap_deg = FULL_TURN_DEG if place + 1 == len(sectors) else 0.0
        if next_deg + wrap_deg - at_deg <= half_deg + next_half_deg:
            raise At(
                "/disc/features", f"the notches at {at_deg:g} and {next_deg:g} degrees meet; make them one, or move one"
            )
