"""What the page of a disc says in words agrees with its layout, its report and the work sheet."""

from dataclasses import replace
from typing import Any, get_args

import pytest

from layout.arrange.arrangement import LeftOutReason
from layout.documents import shipped_cutter
from layout.documents.movement import Movement
from layout.file_names import FILES
from layout.write.work_sheet.cautions import cautions_for
from service.pages.disc_shown import ShownDisc
from service.pages.disc_told import (
    cautions_of,
    facts_of,
    files_of,
    findings_of,
    lost_of,
    not_asked_of,
    verdict_of,
)
from service.pages.texts import texts
from tests.service.pages.discs_shown import laid_out, shown


def _finding(level: str, **at: Any) -> dict[str, Any]:
    return {"code": "web-too-thin", "level": level, "message": "thin", "remedy": "", "at": at}


def _with(findings: list[dict[str, Any]], *, good: bool) -> ShownDisc:
    disc = shown()
    return replace(disc, layout={**disc.layout, "findings": findings, "good_to_cut": good})


@pytest.mark.parametrize(
    ("levels", "good", "said"),
    [
        ([], True, "Good to cut. Nothing was found against it."),
        (["advice"], True, "Good to cut, with 1 thing to look at first."),
        (["advice", "warning"], True, "Good to cut, with 2 things to look at first."),
        (["error"], False, "Not good to cut: 1 error stands."),
        (["error", "warning", "error"], False, "Not good to cut: 2 errors stand."),
    ],
)
def test_the_verdict_counts_what_it_rests_on(*, levels: list[str], good: bool, said: str) -> None:
    assert verdict_of(_with([_finding(level) for level in levels], good=good)) == said


def test_findings_stand_by_level_the_gravest_first_under_their_own_numbers() -> None:
    told = findings_of(_with([_finding("advice"), _finding("error", tracks=[3])], good=False).layout)

    assert [words for words, _ in told] == ["1 error: so the disc must not be cut", "1 piece of advice"]
    assert [(one.place, one.has_place) for _, some in told for one in some] == [(1, True), (0, False)]


def test_what_was_lost_is_counted_by_voice_with_its_reasons_in_words() -> None:
    report = shown("fernhollow-31").report

    told = {voice.name: voice for voice in lost_of(report)}

    assert list(told) == ["Top line", "Inner", "Bass", "All"]
    bass = told["Bass"]
    assert (bass.note_count, bass.kept_count) == (report["lowest"]["note_count"], report["lowest"]["kept_count"])
    assert bass.reasons == (
        "2 because the comb has no such pitch",
        "1 because the star wheel has not finished its step before",
    )
    assert told["All"].moved == "12 nudged, at most 12.2 ms"


def test_notes_that_were_never_asked_for_are_told_apart() -> None:
    assert not_asked_of(shown("tarnlight-17").report) == ("158 because the turn ends before it",)
    assert not_asked_of(shown("fernhollow-31").report) == ()


def test_there_are_words_for_every_reason_and_for_every_file() -> None:
    assert {f"script.disc.reason_{reason.replace('-', '_')}" for reason in get_args(LeftOutReason)} <= set(texts())
    for name in FILES:
        key = f"disc.file_{name.replace('.', '_').replace('-', '_')}"
        assert {key, f"{key}_who"} <= set(texts())


@pytest.mark.parametrize("cutter", ["fibre-laser", "turn-press"])
def test_the_cautions_are_those_of_the_work_sheet(cutter: str) -> None:
    assert cautions_of(shown("fernhollow-31", cutter)) == cautions_for(laid_out("fernhollow-31", cutter).disc)


def test_files_that_are_kept_back_are_named_without_an_address() -> None:
    kept_back = [file.name for file in files_of(shown("tarnlight-17", "turn-press")) if file.address is None]

    assert kept_back == ["disc.dxf", "hits.csv", "press.nc"]
    assert all(file.address for file in files_of(shown("fernhollow-31", "turn-press")))


def test_the_facts_say_what_the_disc_is() -> None:
    facts = dict(facts_of(shown("mossbrook-67")))

    assert facts["Turn"] == "clockwise seen from the label side, 90 s a turn"
    assert facts["Blank"] == "428 mm across, 0.6 mm thick, cold-rolled steel"
    assert facts["Notes"] == "368 of 370 kept"
    assert facts["Transposed"] == "−5 semitones"
    assert "Disc" not in facts, "one disc is no set"


def test_a_disc_of_a_set_says_which_one_it_is() -> None:
    disc = shown()
    second = replace(disc, layout={**disc.layout, "disc": {"number": 2, "of": 3}})

    assert dict(facts_of(second))["Disc"] == "2 of 3"


def test_a_search_that_proved_nothing_says_so() -> None:
    disc = shown()
    worth = {**disc.report["worth"], "proved": False}

    told = dict(facts_of(replace(disc, report={**disc.report, "worth": worth})))

    assert told["Worth kept"].endswith("ended before it was proved that none keeps more")
    assert isinstance(disc.movement, Movement)
    assert shipped_cutter("fibre-laser").title in told["Cutter"]
