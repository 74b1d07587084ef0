"""What a proof says to a customer agrees with the report and the layout, and has words for all that can happen."""

from collections.abc import Mapping
from dataclasses import replace
from typing import Any, get_args

import pytest

from layout.arrange.arrangement import LeftOutReason
from layout.check.finding import Code
from service.pages.proof_told import KINDS, PLACES_SHOWN, customer_data, found_of, kind_of, played_of
from service.pages.texts import texts
from tests.service.pages.discs_shown import shown

# Found in a drawing that is read back, or on a sheet of many discs: never on a disc of an order.
ELSEWHERE = {
    *(Code.UNKNOWN_CUT, Code.CUT_TWICE, Code.OFF_TRACK, Code.OUT_OF_SHAPE, Code.BLANK_DIFFERS, Code.DISC_NOT_PLACED),
    *(Code.NOT_A_CUTTING_FILE, Code.MARKED_NOT_GOOD, Code.OTHER_SIDE, Code.SIDE_NOT_SHOWN),
}


def report_with(**total: Any) -> dict[str, Any]:
    report = shown().report
    return {**report, "total": {**report["total"], **total}}


def finding(code: Code, level: str, **at: Any) -> Mapping[str, Any]:
    return {"code": code.value, "level": level, "message": "0.4 mm", "remedy": "wider", "at": at}


def test_every_finding_of_a_disc_is_of_one_kind_that_has_words() -> None:
    told = [code for codes in KINDS.values() for code in codes]

    assert len(told) == len(set(told))
    assert set(Code) - set(told) == ELSEWHERE
    assert {f"proof.found_{kind}" for kind in (*KINDS, "other")} <= texts().keys()
    assert kind_of("a-code-to-come") == "other"


def test_every_reason_for_which_a_note_is_left_out_has_words_for_one_and_for_many() -> None:
    for reason in get_args(LeftOutReason):
        many, one = (played_of(report_with(left_out={reason: count})).left_out for count in (3, 1))
        assert many[0].startswith("3 notes, ")
        assert one[0].startswith("1 note, ")


def test_what_is_lost_is_told_by_reason_the_most_first_and_by_voice() -> None:
    played = played_of(shown().report)

    # The demo tune on fernhollow-31: 370 notes, of which 9 and 2 are left out.
    assert played.kept == "It plays 359 of the 370 notes asked of it."
    assert [line.partition(",")[0] for line in played.left_out] == ["9 notes", "2 notes"]
    assert played.voices == ("Top line: 193 of 199", "Inner: 58 of 60", "Bass: 108 of 111")
    assert played.otherwise == ("12 notes sound a little earlier or later, by 12 thousandths of a second at most",)


def test_a_disc_that_loses_nothing_says_so_and_no_more() -> None:
    played = played_of(report_with(left_out={}, kept_count=370, nudged_count=0))

    assert played.kept == "It plays all 370 notes asked of it."
    assert (played.left_out, played.voices, played.otherwise, played.not_asked) == ((), (), (), ())


@pytest.mark.parametrize(
    ("semitones", "words"),
    [
        (7, "the whole tune is 7 semitones higher"),
        (1, "the whole tune is 1 semitone higher"),
        (-1, "the whole tune is 1 semitone lower"),
        (-5, "the whole tune is 5 semitones lower"),
    ],
)
def test_a_tune_that_is_moved_is_told_with_its_direction(semitones: int, words: str) -> None:
    report = {**report_with(nudged_count=0), "transposed_semitones": semitones}

    assert played_of(report).otherwise == (words,)


def test_tempo_octaves_and_notes_not_asked_for_are_told() -> None:
    report = report_with(nudged_count=1, largest_nudge_ms=6.2, octave_count=2)
    report |= {"speed_factor": 0.98, "not_asked": {"past-the-turn": 4}}

    played = played_of(report)

    assert played.otherwise == (
        "it plays at 98 % of the tempo written",
        "2 notes are moved by one or more octaves",
        "1 note sounds a little earlier or later, by 6 thousandths of a second",
    )
    assert played.not_asked == ("4 notes, because the turn of the disc ends before them",)


def test_notes_that_may_sound_in_the_wrong_order_are_told_of_in_hundredths_of_a_second() -> None:
    told = found_of({"findings": [finding(Code.TIMING_TOO_COARSE, "warning")]})

    # They are found from ORDER_HEARD_MS on, 20 ms: two hundredths of a second.
    assert "some hundredths of a second early or late" in told[0].found[0].words


def test_findings_are_told_by_kind_the_gravest_first_with_their_places_and_without_figures() -> None:
    findings = [
        finding(Code.LABEL_MISSING, "advice"),
        finding(Code.WEB_TOO_THIN, "error", angle_deg=10.0, radius_mm=50.0),
        finding(Code.REPEAT_TOO_SOON, "error", angle_deg=20.0, radius_mm=50.0),
        finding(Code.WEB_TO_RIM, "error", angle_deg=30.0, radius_mm=50.0),
    ]

    told = found_of({"findings": findings})

    assert [one.level for one in told] == ["error", "advice"]
    assert [kind.places for kind in told[0].found] == [(1, 3), (2,)]
    assert [kind.places for kind in told[1].found] == [()]
    words = " ".join(kind.words for one in told for kind in one.found)
    assert "0.4" not in words
    assert "wider" not in words


def test_a_customer_is_told_how_many_places_are_not_shown_one_by_one() -> None:
    findings = [finding(Code.WEB_TO_RIM, "error", angle_deg=float(place)) for place in range(PLACES_SHOWN + 3)]

    many, as_many = (found_of({"findings": some})[0].found[0] for some in (findings, findings[:PLACES_SHOWN]))

    assert (many.places, many.more) == (tuple(range(PLACES_SHOWN)), 3)
    assert (as_many.places, as_many.more) == (tuple(range(PLACES_SHOWN)), 0)


def test_a_finding_keeps_its_number_in_the_data_so_that_its_button_leads_to_its_place() -> None:
    findings = [finding(Code.LABEL_MISSING, "advice"), finding(Code.WEB_TO_RIM, "error", angle_deg=30.0)]
    disc = shown()

    data = customer_data(replace(disc, layout={**disc.layout, "findings": findings}))

    assert data["layout"]["findings"] == [{"level": "advice", "at": {}}, {"level": "error", "at": {"angle_deg": 30.0}}]
