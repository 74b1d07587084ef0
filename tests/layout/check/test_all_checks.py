"""What goes from the check as a whole to its parts; and a relief of no length, whose width is nowhere cut."""

import pytest

from layout.arrange.arrangement import LeftOut
from layout.check import check
from layout.check.cutter import slits_are_wide_enough
from layout.check.finding import Code
from layout.check.music import WholeTune
from layout.mechanics.arrays import frozen_floats
from tests.layout.examples import PLAIN, arrangement_of, cutter_with, disc_of


@pytest.mark.parametrize(("disc_count", "said"), [(1, "over 3 discs (settings"), (2, "over 3 discs instead of 2 (")])
def test_a_check_of_one_disc_of_a_set_knows_the_whole_tune(disc_count: int, said: str) -> None:
    # Turns of 50 s: 0 and 40 s, 80 and 120 s, 180 s. The disc's own 100 s alone would fill 2 turns.
    whole = WholeTune(onset_s=frozen_floats([0.0, 40.0, 80.0, 120.0, 180.0]), from_s=0.0, disc_count=disc_count)
    arrangement = arrangement_of([(1, 0.0), (1, 49.0)], (LeftOut(note=2, reason="past-the-turn"),))

    findings = check(disc_of(PLAIN, [(1, 0.0), (1, 49.0)]), arrangement, whole)

    [too_long] = [finding for finding in findings if finding.code is Code.MUSIC_TOO_LONG]
    assert said in too_long.remedy


def test_a_drawing_read_back_is_not_judged_by_music_nobody_knows() -> None:
    findings = check(disc_of(PLAIN, []))

    assert [finding.code for finding in findings] == [Code.NOTHING_TO_PLAY]
    assert "the drawing has no projections" in findings[0].message


def test_the_width_of_a_relief_without_length_is_cut_nowhere() -> None:
    narrow = {"fold/relief_width_mm": 0.05}
    without_relief = cutter_with({**narrow, "fold/relief_mm": 0})

    assert len(slits_are_wide_enough(disc_of(PLAIN, [(1, 10.0)], cutter_with(narrow)))) == 1
    assert slits_are_wide_enough(disc_of(PLAIN, [(1, 10.0)], without_relief)) == []
