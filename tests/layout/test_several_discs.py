import json
from functools import cache

import numpy as np
import pytest

from layout import file_names, walk
from layout.check import Code
from layout.documents import read_settings
from layout.errors import DocumentError
from layout.write.laid_out import LaidOut
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, SHIPPED

TARNLIGHT = SHIPPED[2]  # the demo tune lasts 58.75 s, one turn of this movement has 36.2 s


@cache
def two_discs() -> tuple[LaidOut, ...]:
    return walk.lay_out_discs(demo_tune(), TARNLIGHT, LASER, read_settings('{"discs": 2}'))


@cache
def one_disc() -> LaidOut:
    return walk.lay_out(demo_tune(), TARNLIGHT, LASER, read_settings("{}"))


def test_a_tune_too_long_for_one_turn_is_good_to_cut_on_two_discs() -> None:
    one = one_disc()

    assert not one.good_to_cut
    assert [disc.good_to_cut for disc in two_discs()] == [True, True]


def test_every_note_belongs_to_exactly_one_disc() -> None:
    counted = np.zeros(two_discs()[0].score.note_count, dtype=np.int64)
    for disc in two_discs():
        played = [note for notes in disc.arrangement.notes for note in notes]
        lost = [left.note for left in disc.arrangement.left_out if left.reason != "outside-passage"]

        np.add.at(counted, played + lost, 1)

    assert set(counted.tolist()) == {1}


def test_the_discs_have_one_transposition_and_one_speed_and_follow_each_other() -> None:
    first, second = (disc.arrangement for disc in two_discs())

    assert first.transposed_semitones == second.transposed_semitones
    assert first.speed_factor == second.speed_factor
    last_s = max(two_discs()[0].score.onset_s[note] for notes in first.notes for note in notes)
    assert first.from_s <= last_s < second.from_s


def test_each_disc_read_back_plays_its_part() -> None:
    for disc in two_discs():
        checked = walk.check_drawing(walk.files_of(disc)["disc.dxf"], TARNLIGHT, LASER)

        order, as_read = (np.lexsort((p.sounds_s, p.track_index)) for p in (disc.plucks, checked.plucks))
        assert checked.good_to_cut
        assert checked.plucks.track_index[as_read].tolist() == disc.plucks.track_index[order].tolist()
        # a drawing's sixth decimal is 1e-6 mm: far below a microsecond at 5 mm/s
        assert np.abs(checked.plucks.sounds_s[as_read] - disc.plucks.sounds_s[order]).max() < 1e-6


def test_every_file_of_a_set_is_there_and_says_which_disc_it_is() -> None:
    files = walk.files_of(two_discs()[1])

    assert set(files) == set(file_names.files_for(LASER))
    assert json.loads(files["layout.json"])["disc"] == {"number": 2, "of": 2}
    assert json.loads(files["report.json"])["disc"] == {"number": 2, "of": 2}
    for drawing in ("disc.dxf", "record.dxf"):
        assert b"999\ndisc 2 of 2\n" in files[drawing]  # the head
        assert b"DISC 2 OF 2" in files[drawing]  # MARKS
    assert b">Turning Day at Wickenbeck, disc 2 of 2: tune disc for tarnlight-17" in files["disc.svg"]
    assert b"Disc 2 of 2 for Tarnlight" in files["disc.svg"]


def test_the_making_of_each_disc_of_a_set_says_which_it_is_and_its_order() -> None:
    discs = walk.lay_out_discs(demo_tune(), TARNLIGHT, LASER, read_settings('{"discs": 2, "order": "2026-118"}'))

    told = [json.loads(walk.files_of(disc)["making.json"]) for disc in discs]

    assert [each["disc"] for each in told] == [{"number": 1, "of": 2}, {"number": 2, "of": 2}]
    assert {each["order_number"] for each in told} == {"2026-118"}


def test_each_disc_has_a_fingerprint_of_its_own_known_beforehand() -> None:
    settings = read_settings('{"discs": 2}')

    named = [walk.fingerprint_of(demo_tune(), TARNLIGHT, LASER, settings, number) for number in (1, 2)]

    assert [disc.fingerprint for disc in two_discs()] == named
    assert named[0] != named[1]


def test_one_disc_is_a_set_of_one_and_says_nothing_of_it() -> None:
    settings = read_settings("{}")
    alone = walk.lay_out(demo_tune(), SHIPPED[0], LASER, settings)

    [of_set] = walk.lay_out_discs(demo_tune(), SHIPPED[0], LASER, settings)

    files = walk.files_of(alone)
    assert walk.files_of(of_set) == files
    assert json.loads(files["layout.json"])["disc"] == {"number": 1, "of": 1}
    assert b"DISC 1" not in files["disc.dxf"]
    assert b"disc 1 of" not in files["disc.dxf"] + files["disc.svg"]


def test_several_discs_are_not_laid_out_as_one() -> None:
    with pytest.raises(DocumentError, match="settings: /discs: 3 discs are asked for where one is made; ask for 1"):
        walk.lay_out(demo_tune(), TARNLIGHT, LASER, read_settings('{"discs": 3}'))


def test_too_few_discs_name_how_many_it_takes_and_that_many_do() -> None:
    slow = '{"discs": %d, "speed": {"mode": "factor", "factor": 0.5}}'  # 117.5 s on turns of 36.2 s: four
    two = walk.lay_out_discs(demo_tune(), TARNLIGHT, LASER, read_settings(slow % 2))
    four = walk.lay_out_discs(demo_tune(), TARNLIGHT, LASER, read_settings(slow % 4))

    found = [finding for disc in two for finding in disc.findings if finding.code is Code.MUSIC_TOO_LONG]
    assert found
    assert all("Cut the tune over 4 discs instead of 2" in finding.remedy for finding in found)
    assert all(disc.good_to_cut for disc in four)


def test_the_number_of_discs_one_disc_names_will_do() -> None:
    [finding] = [finding for finding in one_disc().findings if finding.code is Code.MUSIC_TOO_LONG]

    assert finding.measured == pytest.approx(58.75, abs=0.01)
    assert finding.remedy.startswith("Cut the tune over 2 discs (settings: discs), or choose a passage of it (passage)")


def test_more_discs_than_there_are_moments_are_refused() -> None:
    with pytest.raises(DocumentError, match="24 discs need a note each"):
        walk.lay_out_discs(
            demo_tune(), TARNLIGHT, LASER, read_settings('{"discs": 24, "passage": {"from_s": 0, "to_s": 1}}')
        )


def test_discs_fit_at_the_least_speed_at_which_none_loses_a_note() -> None:
    fit = '{"discs": 2, "speed": {"mode": "fit", "least": 0.5}}'

    discs = walk.lay_out_discs(demo_tune(), TARNLIGHT, LASER, read_settings(fit))

    free_s = discs[0].disc.turning.free_turn_s
    assert max(disc.arrangement.length_s for disc in discs) == pytest.approx(free_s, abs=1e-6)
    assert {left.reason for disc in discs for left in disc.arrangement.left_out}.isdisjoint({"past-the-turn"})
