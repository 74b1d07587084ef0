"""The blank: holes, slots and the rim with its notches, against sums by hand."""

import math

import numpy as np
import pytest
import shapely

from layout.cut import plan_cuts
from layout.cut.plan import Circles, Outlines
from layout.documents import Cutter, Movement
from layout.errors import DocumentError
from tests.layout.examples import LASER, cutter_with, disc_of, movement_with

HOLE = {"purpose": "drive", "shape": "hole", "radius_mm": 20, "first_at_deg": 90, "width_mm": 5, "length_mm": 5}
SLOT = {"purpose": "drive", "shape": "slot", "radius_mm": 30, "first_at_deg": 0, "width_mm": 4, "length_mm": 9}
NOTCH = {"purpose": "location", "shape": "notch", "radius_mm": 120, "first_at_deg": 0, "width_mm": 6, "length_mm": 8}
STAR_SIDE_LASER = cutter_with({"drawn_from": "star-side"})


def movement_of(*features: dict[str, object]) -> Movement:
    return movement_with({"disc/features": list(features)})  # disc 240 mm, centre hole 10 mm


def on_layer(movement: Movement, layer: str, cutter: Cutter = LASER) -> list[Outlines | Circles]:
    plan = plan_cuts(disc_of(movement, [], cutter), title="t", fingerprint="f", not_good=None)
    return [e for e in plan.disc.entities if e.layer == layer and isinstance(e, Outlines | Circles)]


def traced(outline: Outlines, pieces: int = 200) -> shapely.Polygon:
    """The outline as a polygon, its arcs traced from their bulges by complex numbers, independent of the program.

    Chord p to q, bulge b = tan(θ/4): the arc's centre is (p + q)/2 + i·(q − p)·(1 − b²)/(4b) (DXF reference).
    """
    points = outline.points_mm[0, :, 0] + 1j * outline.points_mm[0, :, 1]
    path = []
    for p, q, b in zip(points, np.roll(points, -1), outline.bulges, strict=True):
        if b == 0:
            path.append(p)
            continue
        centre = (p + q) / 2 + 1j * (q - p) * (1 - b * b) / (4 * b)
        turns = np.exp(4j * math.atan(b) * np.arange(pieces) / pieces)
        path += list(centre + (p - centre) * turns)
    return shapely.Polygon([(z.real, z.imag) for z in path])


def test_holes_stand_evenly_from_the_first_and_the_centre_hole_is_cut_after_them() -> None:
    features, centre = on_layer(movement_of({**HOLE, "count": 3}), "HOLES")

    # 90°, 210°, 330° on radius 20: (0, 20), (−17.3205, −10), (17.3205, −10).
    assert isinstance(features, Circles)
    assert isinstance(centre, Circles)
    assert features.centres_mm == pytest.approx(np.array([(0, 20), (-17.320508, -10), (17.320508, -10)]), abs=1e-6)
    assert features.radius_mm.tolist() == [2.5] * 3
    assert centre.centres_mm.tolist() == [[0.0, 0.0]]
    assert centre.radius_mm.tolist() == [5.0]


def test_inner_features_are_cut_before_outer_ones() -> None:
    first, second, _ = on_layer(movement_of(SLOT, HOLE), "HOLES")

    assert isinstance(first, Circles)
    assert isinstance(second, Outlines)


def test_a_hole_that_two_features_share_is_cut_once() -> None:
    shared = {**HOLE, "purpose": "location", "first_at_deg": 210}

    features, centre = on_layer(movement_of({**HOLE, "count": 3}, shared), "HOLES")

    assert len(features.centres_mm) == 3  # type: ignore[union-attr]
    assert len(centre.centres_mm) == 1  # type: ignore[union-attr]


def test_a_slot_lies_along_the_tangent_with_round_ends() -> None:
    slot, _ = on_layer(movement_of(SLOT), "HOLES")

    # 9 long along y, 4 wide along x, centred at (30, 0): straight sides at x = 28 and 32 from y = −2.5 to 2.5.
    assert isinstance(slot, Outlines)
    assert slot.points_mm[0].tolist() == [[32, 2.5], [28, 2.5], [28, -2.5], [32, -2.5]]
    assert slot.bulges.tolist() == [1, 0, 1, 0]  # tan(180°/4), semicircles
    assert traced(slot).bounds == pytest.approx((28, -4.5, 32, 4.5), abs=1e-3)
    assert traced(slot).area == pytest.approx(5 * 4 + math.pi * 2**2, rel=1e-4)


def test_a_slot_wider_across_than_along_has_its_round_ends_in_and_out() -> None:
    slot, _ = on_layer(movement_of({**SLOT, "first_at_deg": 90, "width_mm": 9, "length_mm": 4}), "HOLES")

    # At (0, 30): 9 along the radius, that is y, and 4 along x.
    assert isinstance(slot, Outlines)
    assert traced(slot).bounds == pytest.approx((-2, 25.5, 2, 34.5), abs=1e-3)


def test_a_slot_as_long_as_wide_is_a_circle() -> None:
    round_hole, _ = on_layer(movement_of({**SLOT, "length_mm": 4}), "HOLES")

    assert isinstance(round_hole, Circles)
    assert round_hole.radius_mm.tolist() == [2.0]


def test_a_rim_without_notches_is_one_circle() -> None:
    [rim] = on_layer(movement_of(), "RIM")

    assert isinstance(rim, Circles)
    assert rim.radius_mm.tolist() == [120.0]


def test_the_rim_runs_round_the_disc_and_into_its_notch() -> None:
    [rim] = on_layer(movement_of(NOTCH), "RIM")

    # A notch 8 along, 6 across, centred on the rim at 120: floor at x = 117, sides at y = ±4, which meet the
    # rim at x = √(120² − 4²) = 119.933315. Arc left: 2π − 2·asin(4/120) = 6.216506 in four pieces of 1.554127
    # (none above a quarter turn): bulge tan(1.554127/4) = 0.409339.
    assert isinstance(rim, Outlines)
    assert rim.closed
    assert rim.points_mm[0, :4] == pytest.approx(np.array([(119.933315, -4), (117, -4), (117, 4), (119.933315, 4)]))
    assert rim.bulges == pytest.approx([0, 0, 0, *[0.409339] * 4], abs=1e-6)
    assert np.hypot(*rim.points_mm[0, 3:].T) == pytest.approx(np.full(4, 120.0))


@pytest.mark.parametrize("cutter", [LASER, STAR_SIDE_LASER], ids=["label side", "star side"])
@pytest.mark.parametrize("features", [[NOTCH], [{**NOTCH, "count": 7}], [NOTCH, {**NOTCH, "first_at_deg": 100}]])
def test_a_notched_rim_is_simple_and_its_area_is_the_circle_less_the_notches(
    features: list[dict[str, float]], cutter: Cutter
) -> None:
    [rim] = on_layer(movement_of(*features), "RIM", cutter)

    # One notch takes the box from x = 117 to the rim: 2·∫₀⁴ (√(120² − y²) − 117) dy
    # = 4·√(120² − 16) + 120²·asin(4/120) − 2·4·117.
    notch_mm2 = 4 * math.sqrt(120**2 - 16) + 120**2 * math.asin(4 / 120) - 8 * 117
    count = sum(feature.get("count", 1) for feature in features)
    assert isinstance(rim, Outlines)
    polygon = traced(rim)
    assert polygon.is_valid
    assert polygon.exterior.is_ccw == (cutter is LASER)
    assert polygon.area == pytest.approx(math.pi * 120**2 - count * notch_mm2, rel=1e-5)
    assert np.hypot(*shapely.get_coordinates(polygon).T).max() == pytest.approx(120.0)


def test_a_notch_too_shallow_for_its_length_is_a_flat() -> None:
    # Floor at 119.5: a chord from y = −√(120² − 119.5²) = −10.943034 to 10.943034, inside the notch's 30 mm.
    [rim] = on_layer(movement_of({**NOTCH, "radius_mm": 120.5, "width_mm": 2, "length_mm": 30}), "RIM")

    assert isinstance(rim, Outlines)
    assert rim.points_mm[0, :2] == pytest.approx(np.array([(119.5, -10.943034), (119.5, 10.943034)]))
    # Segment area R²·(φ − sin φ·cos φ), φ = acos(119.5/120).
    phi = math.acos(119.5 / 120)
    flat_mm2 = 120**2 * (phi - math.sin(phi) * math.cos(phi))
    assert traced(rim).area == pytest.approx(math.pi * 120**2 - flat_mm2, rel=1e-5)


def test_notches_that_meet_are_refused() -> None:
    with pytest.raises(DocumentError, match="the notches at 0 and 3 degrees meet; make them one, or move one"):
        movement_of(NOTCH, {**NOTCH, "first_at_deg": 3})


def test_notches_that_meet_across_the_zero_angle_are_refused() -> None:
    with pytest.raises(DocumentError, match="the notches at 359 and 2 degrees meet"):
        movement_of({**NOTCH, "first_at_deg": 2}, {**NOTCH, "first_at_deg": -1})


def test_a_notch_down_to_the_centre_hole_is_refused() -> None:
    with pytest.raises(DocumentError, match="a notch at 120 mm, 240 wide, reaches the centre hole"):
        movement_of({**NOTCH, "width_mm": 240})


@pytest.mark.parametrize(("angle_deg", "bulge"), [(30, 0.1316525), (45, 0.1989124), (60, 0.2679492)])
def test_a_bulge_is_the_tangent_of_a_quarter_of_its_arc(angle_deg: float, bulge: float) -> None:
    # DXF reference: bulge = tan(included angle/4); the numbers from tan(7.5°), tan(11.25°), tan(15°).
    # Flats of equal length round the rim leave arcs of 360/count − 2·acos(floor/120) degrees.
    count = 3
    floor_mm = 120 * math.cos(math.radians((360 / count - angle_deg) / 2))
    flats = {**NOTCH, "radius_mm": floor_mm + 100, "width_mm": 200, "length_mm": 235, "count": count}

    [rim] = on_layer(movement_of(flats), "RIM")

    assert rim.bulges == pytest.approx([0, bulge] * count, abs=1e-7)  # type: ignore[union-attr]
