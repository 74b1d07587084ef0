import json
import math
from dataclasses import replace

import numpy as np
import pytest

from layout.arrange.arrangement import NO_NOTE
from layout.mechanics.arrays import frozen_floats, frozen_ints
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
    *(
        "format",
        "title",
        "fingerprint",
        "disc",
        "good_to_cut",
        "despite_findings",
        "movement",
        "cutter",
        "engine_version",
    ),
    *("read", "revolution_s", "turns", "drawn_from", "transposed_semitones", "speed_factor", "from_s", "worth"),
    *("bars", "notes", "projections", "left_out", "findings"),
]


def test_the_fields_stand_in_their_order_with_what_the_layout_holds() -> None:
    record = json.loads(write_layout_json(laid_out_of(ONE_FOLD, title="Evening tune"), despite_findings=None))

    assert list(record) == PROMISED
    assert record["format"] == "discwright-layout/1"
    assert (record["title"], record["fingerprint"], record["good_to_cut"]) == ("Evening tune", FINGERPRINT, True)
    assert record["despite_findings"] is None
    assert record["movement"] == {"id": "fernhollow-31", "revision": 1}
    assert record["cutter"] == {"id": "fibre-laser"}
    assert record["engine_version"] == ENGINE_VERSION
    assert (record["revolution_s"], record["turns"], record["drawn_from"]) == (66, "clockwise", "label-side")
    assert (record["transposed_semitones"], record["speed_factor"], record["from_s"]) == (-3, 1.25, 0.5)
    assert record["worth"] == {"kept": 1000, "bound": 2000, "proved": False, "stopped": None}
    assert record["left_out"] == [{"note": 1, "reason": "no-such-pitch"}]
    assert record["read"] == {
        "midi_format": 1,
        "sequence": 1,
        "sequence_count": 1,
        "note_count": 2,
        "percussion_count": 2,
        "warnings": ["3 bytes follow the last track"],
    }


def test_the_reason_for_cutting_a_faulty_disc_is_told() -> None:
    laid_out = laid_out_of(ONE_FOLD, findings=(THIN_WEB,))

    record = json.loads(write_layout_json(laid_out, despite_findings="only to try the fold"))

    assert (record["good_to_cut"], record["despite_findings"]) == (False, "only to try the fold")


def test_every_note_read_stands_on_its_own_line_as_it_was_written() -> None:
    laid_out = laid_out_of(ONE_FOLD)  # transposed by -3, from 0.5 s on, 1.25 times as fast: of no matter here
    score = replace(
        laid_out.score,
        onset_s=frozen_floats([0.25, 7.5]),
        duration_s=frozen_floats([0.5, 1 / 3]),
        pitch=frozen_ints([61, 70]),
        velocity=frozen_ints([1, 127]),
        channel=frozen_ints([1, 16]),
    )

    written = write_layout_json(replace(laid_out, score=score), despite_findings=None).decode()

    # C4 is key 60, so key 61 is C#4 and key 70 Bb4 (MIDI 1.0 key numbers; A4 = 69)
    voice = {"weight": 1000, "voice": "highest", "melody": True}
    notes = [
        {"note": 0, "onset_s": 0.25, "duration_s": 0.5, "pitch": "C#4", "velocity": 1, "channel": 1} | voice,
        {"note": 1, "onset_s": 7.5, "duration_s": 1 / 3, "pitch": "Bb4", "velocity": 127, "channel": 16} | voice,
    ]
    assert json.loads(written)["notes"] == notes
    assert all(f"\n{json.dumps(note)}" in written for note in notes)


def test_every_bar_stands_with_its_number_and_its_start() -> None:
    laid_out = laid_out_of(ONE_FOLD)
    score = replace(laid_out.score, bar_s=frozen_floats([0.0, 1.5, 10 / 3]))

    bars = layout_record(replace(laid_out, score=score), despite_findings=None)["bars"]

    assert bars == [{"bar": 1, "start_s": 0.0}, {"bar": 2, "start_s": 1.5}, {"bar": 3, "start_s": 10 / 3}]


def test_a_note_tells_its_weight_and_its_voice_and_one_not_asked_for_has_neither() -> None:
    laid_out = laid_out_of(THREE_LANCES)  # four notes
    arrangement = replace(
        laid_out.arrangement,
        note_weight=frozen_ints([2000, 1400, 900, 0]),
        highest=np.array([True, False, False, False]),
        lowest=np.array([True, True, False, False]),  # what is highest as well is of the top line
        melody=np.array([False, False, True, False]),
    )

    notes = layout_record(replace(laid_out, arrangement=arrangement), despite_findings=None)["notes"]

    assert [(note["weight"], note["voice"], note["melody"]) for note in notes] == [
        (2000, "highest", False),
        (1400, "lowest", False),
        (900, "inner", True),
        (0, None, False),
    ]


def test_only_an_extra_pluck_says_which_note_it_repeats() -> None:
    laid_out = laid_out_of(THREE_LANCES)
    arrangement = replace(
        laid_out.arrangement,
        notes=((0, 1), (), (2,)),
        again_of=frozen_ints([NO_NOTE, 0, NO_NOTE]),
        octave_semitones=frozen_ints([0, 12, -12]),
    )

    projections = layout_record(replace(laid_out, arrangement=arrangement), despite_findings=None)["projections"]

    assert [projection.get("again_of") for projection in projections] == [None, 0, None]
    assert ["again_of" in projection for projection in projections] == [False, True, False]
    assert [projection["notes"] for projection in projections] == [[0, 1], [], [2]]
    assert [projection["octave_semitones"] for projection in projections] == [0, 12, -12]


def test_a_search_that_was_stopped_says_by_what() -> None:
    laid_out = laid_out_of(ONE_FOLD)
    stopped = replace(laid_out.arrangement, worth=replace(laid_out.arrangement.worth, stopped="nodes"))

    record = layout_record(replace(laid_out, arrangement=stopped), despite_findings=None)

    assert record["worth"]["stopped"] == "nodes"


def test_a_projection_says_where_it_is_when_it_sounds_and_what_it_plays() -> None:
    laid_out = laid_out_of(ONE_FOLD)

    [projection] = json.loads(write_layout_json(laid_out, despite_findings=None))["projections"]

    fields = ["track", "teeth", "pitch", "radius_mm", "angle_deg", "asked_s", "sounds_s", "octave_semitones", "notes"]
    assert list(projection) == fields
    assert (projection["track"], projection["teeth"], projection["pitch"]) == (5, [5], "Bb4")
    assert (projection["radius_mm"], projection["angle_deg"]) == (46.48, 90.0)
    # every bit of the double is kept
    assert projection["sounds_s"] == laid_out.plucks.sounds_s[0]
    assert projection["notes"] == [0]


def test_angles_are_those_of_the_label_side_although_the_drawing_is_mirrored() -> None:
    projections = json.loads(write_layout_json(laid_out_of(THREE_LANCES), despite_findings=None))["projections"]

    assert [round(projection["angle_deg"], 9) for projection in projections] == [20.0, 200.0, 270.0]


def test_a_track_of_two_combs_lists_both_its_teeth_but_not_one_that_is_unusable() -> None:
    teeth = [tooth.model_dump() | {"usable": tooth.tooth != 69} for tooth in MOSSBROOK.teeth]
    movement = type(MOSSBROOK).model_validate(MOSSBROOK.model_dump() | {"teeth": teeth})

    projections = layout_record(laid_out_of(disc_of(movement, LASER, [(1, 30.0), (2, 60.0)])), despite_findings=None)[
        "projections"
    ]

    # mossbrook-67: teeth 1 and 68 on track 1, 2 and 69 on track 2
    assert [projection["teeth"] for projection in projections] == [[1, 68], [2]]


def test_the_greatest_angle_of_a_disc_stays_below_a_whole_turn() -> None:
    disc = disc_of(FERNHOLLOW, LASER, [(1, 0.0)])
    disc = replace(disc, edge_angle_rad=frozen_floats([math.nextafter(2 * math.pi, 0)]))

    [projection] = layout_record(laid_out_of(disc), despite_findings=None)["projections"]

    assert 359.9999999 < projection["angle_deg"] < 360


def test_findings_hold_their_numbers_and_only_the_places_that_apply() -> None:
    record = json.loads(
        write_layout_json(laid_out_of(ONE_FOLD, findings=(THIN_WEB, NEAR_LIMIT, EARLY_DAMPER)), despite_findings=None)
    )

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

    [written] = json.loads(write_layout_json(laid_out_of(ONE_FOLD, findings=(finding,)), despite_findings=None))[
        "findings"
    ]

    assert (written["measured"], written["limit"]) == (None, None)


def test_the_file_is_the_record_that_the_service_embeds() -> None:
    laid_out = laid_out_of(THREE_LANCES, findings=(THIN_WEB,))

    assert json.loads(write_layout_json(laid_out, despite_findings=None)) == layout_record(
        laid_out, despite_findings=None
    )


def test_an_empty_disc_has_an_empty_list_of_projections() -> None:
    laid_out = laid_out_of(EMPTY_DISC)

    assert json.loads(write_layout_json(laid_out, despite_findings=None))["projections"] == []


@pytest.mark.parametrize(
    "title", ["Ljus över tjärnen", 'a "b" \\ <c> & \n\x00', "\ud800"], ids=["accents", "odd", "half"]
)
def test_any_title_comes_back_as_it_was(title: str) -> None:
    written = write_layout_json(laid_out_of(ONE_FOLD, title=title), despite_findings=None)

    assert json.loads(written.decode("utf-8"))["title"] == title
    assert written.endswith(b"}\n")


def test_a_number_that_is_none_is_refused_rather_than_written() -> None:
    laid_out = laid_out_of(ONE_FOLD, findings=(without(THIN_WEB, measured=math.nan),))

    with pytest.raises(ValueError, match="not JSON compliant"):
        write_layout_json(laid_out, despite_findings=None)
