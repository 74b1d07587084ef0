"""What goes to a computing child and comes back is what was meant, to the byte."""

from collections.abc import Mapping

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import (
    Cutter,
    Movement,
    Settings,
    read_settings,
    shipped_cutter,
    shipped_cutter_ids,
    shipped_movement,
    shipped_movement_ids,
)
from layout.errors import DocumentError, DrawingReadError, LayoutError, MidiReadError, Problem, RulingError
from layout.fingerprint import fingerprint_of
from service.computing.messages import (
    Answer,
    Asked,
    ChildSetup,
    DiscTold,
    Kind,
    Want,
    Work,
    answer_as_bytes,
    answer_from_bytes,
    asked_as_bytes,
    asked_from_bytes,
    setup_as_bytes,
    setup_from_bytes,
)
from tests.fuzz.random_machines import cutters, movements
from tests.layout.examples import movement_with

SETTINGS = read_settings('{"title": "Harvest \\u00e4", "speed": {"mode": "fit"}, "time_limit_s": 2.5}')


def asked_of(movement: Movement, cutter: Cutter, settings: Settings = SETTINGS, tune: bytes = b"MThd") -> Asked:
    work = Work(tune=tune, movement=movement, cutter=cutter, settings=settings, is_timed=True, most_s=60)
    return Asked(want=Want.FILES, work=work, name="7", disc_number=2, not_good="for the wall")


@pytest.mark.parametrize("movement_id", shipped_movement_ids())
@pytest.mark.parametrize("cutter_id", shipped_cutter_ids())
def test_a_child_works_on_the_very_documents_that_were_meant(movement_id: str, cutter_id: str) -> None:
    movement, cutter = shipped_movement(movement_id), shipped_cutter(cutter_id)

    read = asked_from_bytes(asked_as_bytes(asked_of(movement, cutter)))

    assert read == asked_of(movement, cutter)
    meant = fingerprint_of(b"MThd", movement, cutter, SETTINGS)
    assert fingerprint_of(b"MThd", read.work.movement, read.work.cutter, read.work.settings) == meant


def test_what_a_number_is_worth_goes_along() -> None:
    movement = movement_with({"star_wheel/axis_depth_mm": {"value": 3.75, "plus_minus": 0.04, "basis": "calculated"}})
    assert movement.plus_minus("/star_wheel/axis_depth_mm") == 0.04

    read = asked_from_bytes(asked_as_bytes(asked_of(movement, shipped_cutter("fibre-laser"))))

    assert read.work.movement.stated == movement.stated


@given(movement=movements(), cutter=cutters())
def test_so_do_documents_drawn_by_lot(movement: Movement, cutter: Cutter) -> None:
    assert asked_from_bytes(asked_as_bytes(asked_of(movement, cutter))) == asked_of(movement, cutter)


@pytest.mark.parametrize(
    "text",
    [
        '{"discs": 3, "passage": {"from_s": 1.5, "to_s": 20}, "speed": {"mode": "factor", "factor": 0.75}}',
        '{"speed": {"mode": "fit", "most": 4}, "writing": {"pluck_again_s": 0.3, "chords": "bass-first"}}',
        '{"rulings": [{"note": 0, "do": "leave-out"}, {"note": 3, "do": "must-sound"}], "order": "R-7"}',
    ],
)
def test_settings_go_along_whole(text: str) -> None:
    asked = asked_of(shipped_movement("tarnlight-17"), shipped_cutter("fibre-laser"), read_settings(text))

    assert asked_from_bytes(asked_as_bytes(asked)) == asked


CONTENTS = st.dictionaries(st.text(min_size=1, max_size=12), st.binary(max_size=200), max_size=4)


@given(told=CONTENTS, of_disc=CONTENTS, count=st.integers(0, 3))
def test_files_come_back_to_the_byte(told: Mapping[str, bytes], of_disc: Mapping[str, bytes], count: int) -> None:
    discs = tuple(
        DiscTold(
            title="Harvest",
            fingerprint=f"{number:016x}",
            disc_number=number + 1,
            disc_count=count,
            good_to_cut=number == 1,
            stopped="time" if number else None,
            told=told,
        )
        for number in range(count)
    )
    answer = Answer(kind=Kind.DONE, discs=discs, files=of_disc, trace="of nothing", resident_mib=87.5)

    assert answer_from_bytes(answer_as_bytes(answer)) == answer


@given(tune=st.binary(max_size=300))
def test_a_tune_goes_along_to_the_byte(tune: bytes) -> None:
    asked = asked_of(shipped_movement("tarnlight-17"), shipped_cutter("turn-press"), tune=tune)

    assert asked_from_bytes(asked_as_bytes(asked)).work.tune == tune


@pytest.mark.parametrize(
    "error",
    [
        MidiReadError(byte_offset=7, found="nothing", expected="a header", remedy="export it again"),
        DocumentError(document="settings", problems=(Problem(pointer="/discs", message="too many"),)),
        RulingError(
            document="settings",
            problems=(Problem(pointer="/rulings/0", message="no"), Problem(pointer="", message="nor this")),
        ),
        DrawingReadError("no drawing"),
    ],
)
def test_an_error_is_raised_as_it_was_told(error: LayoutError) -> None:
    back = answer_from_bytes(answer_as_bytes(Answer(kind=Kind.REFUSED, error=error))).error

    assert back is not None
    assert str(back) == str(error)
    assert vars(back) == vars(error)
    known = (MidiReadError, DocumentError, RulingError)
    assert type(back) is (type(error) if isinstance(error, known) else LayoutError)


def test_a_setup_goes_along() -> None:
    setup = ChildSetup(planner="layout.walk", memory_mib=2000)

    assert setup_from_bytes(setup_as_bytes(setup)) == setup
