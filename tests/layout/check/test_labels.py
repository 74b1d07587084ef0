"""Labels on the side that nobody sees."""

import pytest

from layout.check import Code, Level, check
from layout.check.labels import labels_are_seen
from tests.layout.examples import LASER, PLAIN, cutter_with, disc_of

STAR_SIDE_LASER = cutter_with({"drawn_from": "star-side"})


def test_labels_on_the_star_side_are_one_advice() -> None:
    [finding] = labels_are_seen(disc_of(PLAIN, [(1, 1.0), (2, 9.0)], STAR_SIDE_LASER))

    assert (finding.code, finding.level) == (Code.LABEL_HIDDEN, Level.ADVICE)
    assert finding.message == (
        "fibre-laser marks the star side, the one it is drawn from; the labels cannot be read while the disc lies in "
        "its movement."
    )
    assert finding.remedy == (
        "If the machine can mark the label side, set drawn_from to it in the cutter document; else letter that side by "
        "hand, or set labels to false."
    )


@pytest.mark.parametrize("changes", [{"drawn_from": "label-side"}, {"drawn_from": "star-side", "labels": False}])
def test_labels_that_are_seen_or_not_there_pass(changes: dict[str, object]) -> None:
    assert labels_are_seen(disc_of(PLAIN, [(1, 1.0)], cutter_with(changes))) == []


def test_hidden_labels_are_part_of_checking_a_disc_and_keep_nothing_back() -> None:
    shown, hidden = (check(disc_of(PLAIN, [(1, 1.0)], cutter)) for cutter in (LASER, STAR_SIDE_LASER))

    assert [finding.code for finding in shown if finding.code is Code.LABEL_HIDDEN] == []
    assert [finding.code for finding in hidden if finding.code is Code.LABEL_HIDDEN] == [Code.LABEL_HIDDEN]
