"""The star wheel's formulas against a small simulation of the contact, step by step."""

import math

import pytest

from layout.documents.movement import Movement, StarWheel
from layout.mechanics.star_wheel import axle_slide_mm, contact_mm, leaving_angle_rad
from tests.layout.examples import SHIPPED, movement_with

WHEELS = [
    StarWheel(
        points=points,
        tip_radius_mm=radius,
        root_radius_mm=radius / 3,
        axis_depth_mm=radius + gap,
        thickness_mm=0.5,
        release_angle_deg=12,
    )
    for points, radius, gap in [(5, 5.0, 0.3), (6, 3.2, 0.55), (6, 3.5, 0.58), (8, 5.0, 0.2), (10, 6.0, 0.1)]
]


def depth_for(wheel: StarWheel, share: float) -> float:
    """A depth whose leaving angle lies at this share between half a step and a whole one."""
    leaving = (math.pi / wheel.points) * (1 + share)
    return wheel.axis_depth_mm - wheel.tip_radius_mm * math.cos(leaving)


def arcs_of(wheel: StarWheel) -> tuple[float, float]:
    return movement_with({"star_wheel": wheel.model_dump()}).arcs_mm(0)


class Contact:
    """A wheel pushed by a face that moves by tiny steps; it knows tips, a face and nothing else.

    The wheel stays where it was left (a tooth's spring holds it). A tip is touched while it is above
    the face's free edge, and is then pushed to lie on the face.
    """

    def __init__(self, wheel: StarWheel, depth_mm: float) -> None:
        self.wheel, self.free_edge_mm = wheel, wheel.axis_depth_mm - depth_mm
        self.turned_rad = 0.0

    def tips(self) -> list[tuple[float, float]]:
        step = 2 * math.pi / self.wheel.points
        angles = [self.turned_rad + place * step for place in range(self.wheel.points)]
        radius = self.wheel.tip_radius_mm
        return [(radius * math.sin(angle), radius * math.cos(angle)) for angle in angles]

    def pass_face(self, step_mm: float = 0.0005) -> tuple[float, float]:
        """One face goes by; where it first and last touched a tip."""
        face_mm = -2 * self.wheel.tip_radius_mm
        touched = []
        while face_mm < 2 * self.wheel.tip_radius_mm:
            ahead = [(x, z) for x, z in self.tips() if z > self.free_edge_mm and face_mm - 10 * step_mm < x <= face_mm]
            if ahead:
                tip_rad = math.asin(max(ahead)[0] / self.wheel.tip_radius_mm)
                if (
                    self.wheel.tip_radius_mm * math.cos(math.asin(face_mm / self.wheel.tip_radius_mm))
                    > self.free_edge_mm
                ):
                    self.turned_rad += math.asin(face_mm / self.wheel.tip_radius_mm) - tip_rad
                    touched.append(face_mm)
            face_mm += step_mm
        return touched[0], touched[-1]


@pytest.mark.parametrize("share", [0.15, 0.4, 0.8])
@pytest.mark.parametrize("wheel", WHEELS, ids=lambda wheel: f"{wheel.points}x{wheel.tip_radius_mm}")
def test_a_simulated_face_meets_and_leaves_its_tip_where_the_formula_says(wheel: StarWheel, share: float) -> None:
    depth_mm = depth_for(wheel, share)
    contact = Contact(wheel, depth_mm)
    contact.pass_face()  # the first pass may start anywhere; after it the wheel runs steadily
    turned_rad = contact.turned_rad

    met_mm, left_mm = contact.pass_face()

    expected = contact_mm(wheel, depth_mm)
    assert (met_mm, left_mm) == pytest.approx(expected, abs=0.003)
    # one exact step a pass
    assert contact.turned_rad - turned_rad == pytest.approx(2 * math.pi / wheel.points, abs=0.002)


@pytest.mark.parametrize("wheel", WHEELS, ids=lambda wheel: f"{wheel.points}x{wheel.tip_radius_mm}")
def test_no_depth_needs_more_travel_than_the_engagement_arc(wheel: StarWheel) -> None:
    # x2 - x1 = 2R sin(pi/n) cos(alpha_e - pi/n) is greatest at alpha_e = pi/n, where it is the chord.
    travels = []
    for share in (0.0001, 0.2, 0.5, 0.9):
        met_mm, left_mm = contact_mm(wheel, depth_for(wheel, share))
        travels.append(left_mm - met_mm)

    chord_mm = arcs_of(wheel)[0]
    assert max(travels) <= chord_mm
    assert travels[0] == pytest.approx(chord_mm, abs=1e-6)
    assert travels == sorted(travels, reverse=True)


# Chords 2 r sin(pi/n) worked out by hand: n6 r5 is the radius itself.
@pytest.mark.parametrize(
    ("points", "radius_mm", "chord_mm"), [(5, 5, 5.878), (6, 5, 5.0), (6, 3.2, 3.2), (8, 6, 4.592), (12, 6, 3.106)]
)
def test_the_chord_between_tips(points: int, radius_mm: float, chord_mm: float) -> None:
    wheel = WHEELS[0].model_copy(update={"points": points, "tip_radius_mm": radius_mm})

    assert arcs_of(wheel)[0] == pytest.approx(chord_mm, abs=5e-4)


# R sin beta: 3.2 sin 14 deg = 0.774, 3.5 sin 12 deg = 0.728
@pytest.mark.parametrize(("movement", "arc_mm"), [(SHIPPED[0], 0.774), (SHIPPED[1], 0.728)])
def test_the_release_arc_of_the_shipped_movements(movement: Movement, arc_mm: float) -> None:
    assert movement.arcs_mm(0)[1] == pytest.approx(arc_mm, abs=5e-4)


def test_a_face_that_does_not_reach_the_tips_has_no_leaving_angle() -> None:
    wheel = WHEELS[1]

    with pytest.raises(ValueError, match=r"depth 0.5 mm: \(H - p\)/R is 1.01562"):
        leaving_angle_rad(wheel, 0.5)


def test_the_slide_along_the_axle_on_a_row_through_the_centre() -> None:
    # d = 0, r = 50: sqrt(2500 - 9) - 50 = -0.09008 at y = 3
    assert axle_slide_mm(50.0, 0.0, (-1.0, 3.0)) == pytest.approx(0.0900812, abs=1e-6)


def test_the_slide_along_the_axle_counts_the_place_nearest_the_centre() -> None:
    # d = 4, r = 50: at y = 0 the projection is at 50, on the row at sqrt(2484) = 49.8397
    assert axle_slide_mm(50.0, 4.0, (-1.0, 5.0)) == pytest.approx(50 - math.sqrt(2484), abs=1e-9)


def test_a_projection_on_a_track_smaller_than_the_reach_slides_to_the_middle_of_the_disc_at_most() -> None:
    # y = 3 is off a circle of 2 mm; from 2 mm out it slides to 0.
    assert axle_slide_mm(2.0, 0.0, (-1.0, 3.0)) == 2.0


def test_the_plain_movement_uses_a_six_point_wheel() -> None:
    assert isinstance(movement_with().star_wheel, StarWheel)
