import json
import math
from dataclasses import replace

import pytest

from layout.mechanics.arrays import frozen_floats
from layout.version import ENGINE_VERSION
from layout.write import layout_record, write_layout_json
from tests.layout.write.examples import (
    EARLY_DAMPER,
    EMPTY_DISC,
    FERNHOLLOW,
    FINGERPRINT,
    LASER,
    MOSSBROOK,
    NEAR_LIMIT,
    ONE_FOLD,
    THIN_WEB,
    THREE_LANCES,
    disc_of,
    laid_out_of,
    without,
)

PROMISED = [
    *("format", "title", "fingerprint", "good_to_cut", "movement", "cutter", "engine_version", "read", "revolution_s"),
    *("turns", "drawn_from", "transposed_semitones", "speed_factor", "from_s", "worth", "projections", "left_out"),
    "findings",
]


def test_the_fields_stand_in_their_order_with_what_the_layout_holds() -> None:
    record = json.loads(write_layout_json(laid_out_of(ONE_FOLD, title="Evening tune")))

    assert list(record) == PROMISED
    assert record["format"] == "discwright-layout/1"
    assert (record["title"], record["fingerprint"], record["good_to_cut"]) == ("Evening tune", FINGERPRINT, True)
    assert record["movement"] == {"id": "fernhollow-31", "revision": 1}
    assert record["cutter"] == {"id": "fibre-laser"}
    assert record["engine_version"] == ENGINE_VERSION
    assert (record["revolution_s"], record["turns"], record["drawn_from"]) == (66, "clockwise", "label-side")
    assert (record["transposed_semitones"], record["speed_factor"], record["from_s"]) == (-3, 1.25, 0.5)
    assert record["worth"] == {"kept": 1000, "bound": 2000, "proved": False}
    assert record["left_out"] == [{"note": 1, "reason": "no-such-pitch"}]
    assert record["read"] == {
        "midi_format": 1,
        "sequence": 1,
        "sequence_count": 1,
        "note_count": 2,
        "percussion_count": 2,
        "warnings": ["3 bytes follow the last track"],
    }


def test_a_projection_says_where_it_is_when_it_sounds_and_what_it_plays() -> None:
    laid_out = laid_out_of(ONE_FOLD)

    [projection] = json.loads(write_layout_json(laid_out))["projections"]

    fields = ["track", "teeth", "pitch", "radius_mm", "angle_deg", "asked_s", "sounds_s", "notes"]
    assert list(projection) == fields
    assert (projection["track"], projection["teeth"], projection["pitch"]) == (5, [5], "Bb4")
    assert (projection["radius_mm"], projection["angle_deg"]) == (46.48, 90.0)
    # every bit of the double is kept
    assert projection["sounds_s"] == laid_out.plucks.sounds_s[0]
    assert projection["notes"] == [0]


def test_angles_are_those_of_the_label_side_although_the_drawing_is_mirrored() -> None:
    projections = json.loads(write_layout_json(laid_out_of(THREE_LANCES)))["projections"]

    assert [round(projection["angle_deg"], 9) for projection in projections] == [20.0, 200.0, 270.0]


def test_a_track_of_two_combs_lists_both_its_teeth_but_not_one_that_is_unusable() -> None:
    teeth = [tooth.model_dump() | {"usable": tooth.tooth != 69} for tooth in MOSSBROOK.teeth]
    movement = type(MOSSBROOK).model_validate(MOSSBROOK.model_dump() | {"teeth": teeth})

    projections = layout_record(laid_out_of(disc_of(movement, LASER, [(1, 30.0), (2, 60.0)])))["projections"]

    # mossbrook-67: teeth 1 and 68 on track 1, 2 and 69 on track 2
    assert [projection["teeth"] for projection in projections] == [[1, 68], [2]]


def test_the_greatest_angle_of_a_disc_stays_below_a_whole_turn() -> None:
    disc = disc_of(FERNHOLLOW, LASER, [(1, 0.0)])
    disc = replace(disc, edge_angle_rad=frozen_floats([math.nextafter(2 * math.pi, 0)]))

    [projection] = layout_record(laid_out_of(disc))["projections"]

    assert 359.9999999 < projection["angle_deg"] < 360


def test_findings_hold_their_numbers_and_only_the_places_that_apply() -> None:
    record = json.loads(write_layout_json(laid_out_of(ONE_FOLD, findings=(THIN_WEB, NEAR_LIMIT, EARLY_DAMPER))))

    first, second, third = record["findings"]
    fields = ["code", "level", "message", "measured", "limit", "unit", "at", "remedy"]
    assert list(first) == fields
    assert (first["code"], first["level"], first["unit"]) == ("web-too-thin", "error", "mm")
    assert (first["measured"], first["limit"]) == (0.31, 0.5)
    assert first["at"] == {"tracks": [4, 5], "projections": [0, 1], "radius_mm": 45.2, "angle_deg": 91.5}
    assert second["at"] == {}
    assert third["at"] == {"tracks": [9], "radius_mm": 57.0, "angle_deg": 300.0, "sounds_s": 12.5}
    assert record["good_to_cut"] is False


def test_what_is_not_measured_is_null() -> None:
    finding = without(NEAR_LIMIT, measured=None, limit=None)

    [written] = json.loads(write_layout_json(laid_out_of(ONE_FOLD, findings=(finding,))))["findings"]

    assert (written["measured"], written["limit"]) == (None, None)


def test_the_file_is_the_record_that_the_service_embeds() -> None:
    laid_out = laid_out_of(THREE_LANCES, findings=(THIN_WEB,))

    assert json.loads(write_layout_json(laid_out)) == layout_record(laid_out)


def test_an_empty_disc_has_an_empty_list_of_projections() -> None:
    laid_out = laid_out_of(EMPTY_DISC)

    assert json.loads(write_layout_json(laid_out))["projections"] == []


@pytest.mark.parametrize(
    "title", ["Ljus över tjärnen", 'a "b" \\ <c> & \n\x00', "\ud800"], ids=["accents", "odd", "half"]
)
def test_any_title_comes_back_as_it_was(title: str) -> None:
    written = write_layout_json(laid_out_of(ONE_FOLD, title=title))

    assert json.loads(written.decode("utf-8"))["title"] == title
    assert written.endswith(b"}\n")


def test_a_number_that_is_none_is_refused_rather_than_written() -> None:
    laid_out = laid_out_of(ONE_FOLD, findings=(without(THIN_WEB, measured=math.nan),))

    with pytest.raises(ValueError, match="not JSON compliant"):
        write_layout_json(laid_out)
