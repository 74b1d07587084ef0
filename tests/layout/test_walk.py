import json
from functools import cache

import pytest

from layout import file_names, walk
from layout.check.finding import Code
from layout.documents import read_movement, read_settings
from layout.errors import MidiReadError
from layout.write.laid_out import LaidOut
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, movement_with

DEFAULTS = read_settings("{}")


@cache
def demo_on(place: int, cutter_id: str = LASER.id) -> LaidOut:
    """The demo tune on a shipped movement, laid out once."""
    return walk.lay_out(demo_tune(), SHIPPED[place], {one.id: one for one in (LASER, PRESS)}[cutter_id], DEFAULTS)


def test_the_fingerprint_changes_with_every_input() -> None:
    stated = movement_with({"star_wheel/axis_depth_mm": {"value": 3.75, "plus_minus": 0.04}})
    inputs = [
        (b"a", PLAIN, LASER, DEFAULTS),
        (b"b", PLAIN, LASER, DEFAULTS),
        (b"a", SHIPPED[0], LASER, DEFAULTS),
        (b"a", PLAIN, PRESS, DEFAULTS),
        (b"a", PLAIN, LASER, read_settings('{"title": "other"}')),
        (b"a", stated, LASER, DEFAULTS),  # the same numbers, of another worth: other findings
    ]

    assert len({walk.fingerprint_of(*each) for each in inputs}) == len(inputs)


def test_the_fingerprint_is_the_same_for_the_same_inputs() -> None:
    first = walk.fingerprint_of(b"a", movement_with(), LASER, read_settings("{}"))

    assert walk.fingerprint_of(b"a", movement_with(), LASER, read_settings('{"discs": 1}')) == first
    assert len(first) == 16


def test_the_title_is_the_settings_then_the_tunes_own() -> None:
    own = demo_on(0)
    given = walk.lay_out(demo_tune(), SHIPPED[0], LASER, read_settings('{"title": "For the mill"}'))

    assert own.title == "Turning Day at Wickenbeck"
    assert given.title == "For the mill"


def test_a_title_that_cannot_be_lettered_is_told_by_the_layout_and_keeps_nothing_back() -> None:
    plain, other = (
        walk.lay_out(demo_tune(), SHIPPED[0], LASER, read_settings(json.dumps({"title": title})))
        for title in ("The Mill", "春の海")
    )

    assert [finding.code for finding in plain.findings] == []
    assert [finding.code for finding in other.findings] == [Code.LABEL_MISSING]
    assert other.good_to_cut


def test_a_label_that_finds_no_room_is_told_by_the_layout() -> None:
    tight = SHIPPED[2].model_dump(mode="json", by_alias=True)
    tight["disc"] |= {"centre_hole_mm": 36.0, "outer_diameter_mm": 106.0, "features": []}

    laid_out = walk.lay_out(demo_tune(), read_movement(json.dumps(tight)), LASER, DEFAULTS)

    told = [finding.message for finding in laid_out.findings if finding.code is Code.LABEL_MISSING]
    assert told == ["There is no room on the disc for: side, movement, burr side, fingerprint, title."]


def test_the_cutting_files_are_kept_back_while_an_error_stands() -> None:
    too_long = demo_on(2)

    kept = walk.files_of(too_long)

    assert not too_long.good_to_cut
    assert set(kept) == {"record.dxf", "disc.svg", "work-sheet.pdf", "layout.json", "report.json", "making.json"}


def test_a_reason_gives_every_file_and_marks_it() -> None:
    too_long = demo_on(2)

    given = walk.files_of(too_long, not_good="only to measure the fold")

    assert set(given) == set(file_names.files_for(LASER))
    assert given["disc.dxf"].startswith(b"999\nNOT GOOD TO CUT: only to measure the fold\n")
    assert b"NOT GOOD TO CUT" in given["disc.svg"]


def test_a_press_has_a_program_and_it_is_kept_back_like_what_it_strikes() -> None:
    good, too_long = (demo_on(place, PRESS.id) for place in (0, 2))

    assert set(walk.files_of(good)) == set(file_names.FILES) == set(file_names.files_for(PRESS))
    assert set(file_names.FILES) - set(walk.files_of(too_long)) == set(file_names.CUTTING_FILES)
    assert b"NOT GOOD TO CUT" in walk.files_of(too_long, not_good="a test")["press.nc"]


def test_a_press_without_a_tool_that_fits_has_every_file_where_a_person_asks_for_them() -> None:
    bare = PRESS.model_copy(update={"tools": ()})
    without = walk.lay_out(demo_tune(), SHIPPED[0], bare, DEFAULTS)

    given = walk.files_of(without, not_good="to look at")

    assert not without.good_to_cut
    assert set(given) == set(file_names.FILES)


def test_a_reason_marks_nothing_on_a_disc_that_is_good_to_cut() -> None:
    good = demo_on(0)

    assert walk.files_of(good, not_good="in any case") == walk.files_of(good)


@pytest.mark.parametrize("place", range(len(SHIPPED)), ids=[movement.id for movement in SHIPPED])
def test_the_same_inputs_give_the_same_bytes(place: int) -> None:
    first = walk.files_of(demo_on(place), not_good="a test")

    again = walk.files_of(walk.lay_out(demo_tune(), SHIPPED[place], LASER, DEFAULTS), not_good="a test")

    assert again == first


def test_a_tune_that_is_no_midi_file_is_refused() -> None:
    with pytest.raises(MidiReadError, match="tune, byte 0"):
        walk.lay_out(b"not a tune", PLAIN, LASER, DEFAULTS)
