import json
from typing import Any

import pytest

from layout.documents import read_movement, shipped_movement, shipped_movement_ids
from layout.errors import DocumentError, NotShippedError
from tests.layout.examples import document_with, movement_with

OVERDRAWN = {
    "elastic_modulus_n_per_mm2": 206_000,
    "width_mm": 10,
    "thickness_mm": 0.4,
    "length_mm": 2000,
    "wound_turns": 8,
    "usable_turns": 9,
}


@pytest.mark.parametrize(
    ("movement_id", "tracks", "teeth", "first_mm", "last_mm"),
    [("fernhollow-31", 31, 31, 36, 114.6), ("mossbrook-67", 67, 75, 45, 210), ("tarnlight-17", 17, 17, 20, 53.6)],
)
def test_a_shipped_movement_lists_every_track(
    movement_id: str, tracks: int, teeth: int, first_mm: float, last_mm: float
) -> None:
    movement = shipped_movement(movement_id)

    assert len(movement.tracks) == tracks
    assert len(movement.teeth) == teeth
    assert (movement.tracks[0].radius_mm, movement.tracks[-1].radius_mm) == (first_mm, last_mm)


@pytest.mark.parametrize("movement_id", shipped_movement_ids())
def test_a_resolved_movement_reads_back_as_itself(movement_id: str) -> None:
    movement = shipped_movement(movement_id)

    assert read_movement(movement.model_dump_json(exclude_none=True)) == movement


def test_a_range_of_radii_is_listed_out() -> None:
    movement = movement_with(
        {
            "tracks": {"first_radius_mm": 50, "last_radius_mm": 60, "count": 5},
        }
    )

    # (60 - 50) / 4 = 2.5 mm apart
    assert [track.radius_mm for track in movement.tracks] == [50, 52.5, 55, 57.5, 60]


def test_a_measured_number_is_read_plain_and_its_worth_is_kept() -> None:
    stated = {"value": 3.75, "plus_minus": 0.04, "basis": "measured"}

    movement = movement_with({"star_wheel/axis_depth_mm": stated})

    assert movement.star_wheel.axis_depth_mm == 3.75  # type: ignore[union-attr]  # the plain movement's wheel is computed
    assert movement.plus_minus("/star_wheel/axis_depth_mm") == 0.04
    assert movement.plus_minus("/star_wheel/tip_radius_mm") == 0.0


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"format": "discwright-movement/2"}, r"/format: Input should be 'discwright-movement/1'"),
        (
            {"drive": {"winding": {"spring": OVERDRAWN, "barrel_to_disc": [4]}}},
            "/drive/winding/spring/usable_turns: usable_turns cannot be above wound_turns",
        ),
        ({"id": "Fern Hollow"}, r"/id: an id is a small letter followed by .*; got 'Fern Hollow'"),
        ({"revolution_s": None, "disc": []}, r"/disc: "),
        ({"damper_arc_mm": [1]}, r"/damper_arc_mm: a number is needed, got a list"),
        ({"damper_arc_mm": {"plus_minus": 1}}, r'/damper_arc_mm: a number stated with its worth needs "value"'),
        ({"revolution_s": 0}, r"/revolution_s: Input should be greater than or equal to 0.001, got 0"),
        ({"revolution_s": "60"}, r"/revolution_s: a number is needed, got '60'"),
        ({"colour": "red"}, r"/colour: no such field"),
        ({"title": None}, r"/title: this field is needed"),
        ({"fastest_revolution_s": 70}, r"fastest_revolution_s \(70\) is the shortest turn"),
        ({"before_music_deg": 200, "after_music_deg": 160}, "leave no part of the turn for music"),
        ({"tracks/1/radius_mm": 40}, r"track 2 \(40 mm\) must lie outside track 1 \(50 mm\)"),
        ({"tracks/0/track": 2}, "tracks must be numbered 1, 2, 3"),
        ({"gantry_offset_mm": 51}, r"track 1 \(50 mm\) does not reach the row of star wheels"),
        (
            {"star_wheel/release_angle_deg": {"value": 30, "plus_minus": -1}},
            r"^movement: /star_wheel/release_angle_deg/plus_minus: Input should be greater than or equal to 0, got -1",
        ),
        ({"star_wheel/points": 2}, r"/star_wheel/points: Input should be greater than or equal to 3"),
        ({"star_wheel": {"thickness_mm": 0.4}}, "track 1: state both engagement_arc_mm and release_arc_mm"),
        ({"tracks/2/engagement_arc_mm": 3}, "track 3: state both engagement_arc_mm and release_arc_mm"),
        ({"projection/depth_mm": None}, "a standing projection needs depth_mm"),
        ({"projection/kind": "slot"}, "a slot needs length_mm"),
        (
            {"projection": {"kind": "slot", "width_mm": 1, "length_mm": 2, "forming": "fold"}},
            "/projection/forming: forming belongs to standing projections; leave it out for a slot",
        ),
        ({"projection": {"kind": "slot", "width_mm": 1, "length_mm": 2}}, "slots need measured arcs"),
        ({"teeth/1/tooth": 1}, "tooth 1 is listed 2 times"),
        ({"teeth/1/track": 4}, "tooth 2: there is no track 4"),
        ({"teeth/1/track": 1}, "tooth 2: track 1 already has a tooth of another pitch"),
        ({"teeth/1/pitch": "H4"}, r"/teeth/1/pitch: 'H4' is not a pitch name"),
        ({"keep_out": [{"from_radius_mm": 1, "to_radius_mm": 2, "why": "x"}] * 33}, "/keep_out: .*at most 32 items"),
        (
            {
                "disc/features": [
                    {
                        "purpose": "stop",
                        "shape": "hole",
                        "radius_mm": 40,
                        "count": 300,
                        "width_mm": 0.1,
                        "length_mm": 0.1,
                    }
                ]
                * 2
            },
            "more than 400 holes",
        ),
        ({"disc/a~b/c": 1}, "/disc/a~0b: no such field"),
        ({"disc/centre_hole_mm": 240}, "centre_hole_mm must be below outer_diameter_mm"),
        (
            {"keep_out": [{"from_radius_mm": 9, "to_radius_mm": 8, "why": "clamp"}]},
            "keep-out 'clamp': to_radius_mm must be above",
        ),
        ({"tracks": {"first_radius_mm": 50, "count": 3}}, r"/tracks/last_radius_mm: this field is needed"),
        ({"damper_recovery_s": True}, r"/damper_recovery_s: a number is needed, got true"),
    ],
)
def test_a_fault_in_a_movement_names_its_place_and_what_is_allowed(changes: dict[str, Any], message: str) -> None:
    text = json.dumps(document_with(changes))

    with pytest.raises(DocumentError, match=message):
        read_movement(text)


@pytest.mark.parametrize(
    ("feature", "message"),
    [
        ({"shape": "hole", "radius_mm": 119, "width_mm": 5, "length_mm": 5}, "leaves the disc"),
        ({"shape": "hole", "radius_mm": 20, "width_mm": 5, "length_mm": 6}, "a hole is round"),
        ({"shape": "notch", "radius_mm": 100, "width_mm": 5, "length_mm": 5}, "a notch must cross the rim at 120 mm"),
        ({"shape": "slot", "radius_mm": 20, "width_mm": 5, "length_mm": 70, "count": 2}, "do not fit round 20 mm"),
    ],
)
def test_a_feature_that_cannot_be_is_refused(feature: dict[str, Any], message: str) -> None:
    text = json.dumps(document_with({"disc/features": [{"purpose": "drive", **feature}]}))

    with pytest.raises(DocumentError, match=message):
        read_movement(text)


@pytest.mark.parametrize("text", ["", "{", "[1", b"\xff\xfe", '{"revolution_s": NaN}', "[" * 100_000])
def test_text_that_is_not_json_is_refused(text: str | bytes) -> None:
    with pytest.raises(DocumentError, match=r"movement: .*(not JSON|not UTF-8|is empty|nested more than 12 deep)"):
        read_movement(text)


def test_the_worth_of_a_range_of_radii_is_that_of_every_radius_in_it() -> None:
    first = {"value": 50, "plus_minus": 0.1}

    movement = movement_with({"tracks": {"first_radius_mm": first, "last_radius_mm": 60, "count": 3}})

    assert [movement.plus_minus(f"/tracks/{index}/radius_mm") for index in range(3)] == [0.1, 0.1, 0.1]


def test_a_field_given_twice_is_refused() -> None:
    with pytest.raises(DocumentError, match="the field 'id' is given twice"):
        read_movement('{"id": "one", "title": "x", "id": "two"}')


def test_a_document_nested_too_deep_is_refused() -> None:
    with pytest.raises(DocumentError, match="nested more than 12 deep"):
        read_movement('{"disc": ' + "[" * 900 + "]" * 900 + "}")


def test_json_that_is_no_object_is_refused() -> None:
    with pytest.raises(DocumentError, match="a JSON object is needed, got a list"):
        read_movement("[]")


def test_an_unknown_id_names_the_ids_there_are() -> None:
    with pytest.raises(
        NotShippedError, match="no movement has the id 'fern'; known: fernhollow-31, mossbrook-67, tarnlight-17"
    ):
        shipped_movement("fern")


def test_a_whole_number_longer_than_any_is_refused_in_our_words() -> None:
    with pytest.raises(DocumentError, match="a number has 10000 digits; 400 are the most any field needs"):
        read_movement('{"revision": ' + 10_000 * "9" + "}")


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("barrel_to_disc", [1e9]),
        ("barrel_to_disc", [0.0001]),
        ("disc_to_brake", [1001]),
        ("efficiency", 0.001),
        ("spring/length_mm", 0.5),
        ("spring/elastic_modulus_n_per_mm2", 999),
        ("spring/wound_turns", 0.001),
    ],
)
def test_numbers_of_a_winding_far_outside_any_clockwork_are_refused(field: str, value: object) -> None:
    changes = {"drive": {"winding": {"spring": OVERDRAWN | {"usable_turns": 0.001}, "barrel_to_disc": [4]}}}
    text = json.dumps(document_with({f"drive/winding/{field}": value}, document_with(changes)))

    with pytest.raises(DocumentError, match=f"/drive/winding/{field}"):
        read_movement(text)


def test_what_a_movement_does_not_state_of_its_sound_is_left_out_of_a_dump() -> None:
    plain = movement_with().model_dump(mode="json")
    stated = movement_with({"tooth_quality": 900, "teeth/0/quality": 400, "teeth/1/end_mass_ratio": 0.5})

    assert ("tooth_quality" in plain, {"quality", "end_mass_ratio"} & set(plain["teeth"][0])) == (False, set())
    assert stated.model_dump(mode="json")["tooth_quality"] == 900
    assert stated.model_dump(mode="json")["teeth"][0]["quality"] == 400
    assert stated.model_dump(mode="json")["teeth"][1]["end_mass_ratio"] == 0.5


def test_numbers_of_the_sound_may_be_stated_with_their_worth() -> None:
    movement = movement_with({"tooth_quality": {"value": 900, "plus_minus": 200}})

    assert (movement.tooth_quality, movement.plus_minus("/tooth_quality")) == (900, 200)


@pytest.mark.parametrize(
    ("field", "value", "limit"),
    [
        ("tooth_quality", 0.5, "greater than or equal to 1,"),
        ("teeth/0/quality", 2e6, "less than or equal to 1000000"),
        ("teeth/0/end_mass_ratio", -0.1, "greater than or equal to 0"),
        ("teeth/0/end_mass_ratio", 101, "less than or equal to 100"),
    ],
)
def test_a_sound_no_tooth_can_have_is_refused(field: str, value: float, limit: str) -> None:
    with pytest.raises(DocumentError, match=limit) as caught:
        movement_with({field: value})

    assert caught.value.problems[0].pointer == f"/{field}"
