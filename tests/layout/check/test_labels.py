"""Labels on the side that nobody sees."""

import pytest

from layout.check import Code, Level, check
from layout.check.labels import labels_are_seen, labels_stand
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


def test_labels_that_fit_nowhere_are_one_advice_that_names_them() -> None:
    disc = disc_of(PLAIN, [(1, 1.0)], STAR_SIDE_LASER)

    [finding] = labels_stand(disc, title="The Mill", without_room=("index mark", "order number", "title"))

    assert (finding.code, finding.level) == (Code.LABEL_MISSING, Level.ADVICE)
    assert finding.message == "There is no room on the disc for: index mark, order number, title."
    assert finding.remedy == (
        "Mark the star side by hand before the disc leaves the machine, in the words of the work sheet; or try a "
        "shorter title and order number in the settings."
    )


def test_a_label_that_the_settings_do_not_word_is_not_to_be_shortened() -> None:
    [finding] = labels_stand(disc_of(PLAIN, [(1, 1.0)]), title="The Mill", without_room=("burr side",))

    assert finding.remedy == (
        "Mark the label side by hand before the disc leaves the machine, in the words of the work sheet."
    )


def test_a_title_in_letters_that_are_not_engraved_is_one_advice() -> None:
    [finding] = labels_stand(disc_of(PLAIN, [(1, 1.0)]), title="春の海", without_room=())

    assert (finding.code, finding.level) == (Code.LABEL_MISSING, Level.ADVICE)
    assert finding.message == "The title is not lettered: more than half of its letters have no likeness among A to Z."
    assert finding.remedy == "Give a title in Latin letters in the settings, or letter the label side by hand."


@pytest.mark.parametrize(
    ("plucks", "changes", "title", "without_room"),
    [
        ([(1, 1.0)], {}, "The Mill", ()),
        ([(1, 1.0)], {"labels": False}, "春の海", ()),  # nothing is lettered that could be missed
        ([], {}, "春の海", ("title",)),  # nothing is cut
    ],
)
def test_labels_that_stand_or_are_not_wanted_pass(
    plucks: list[tuple[int, float]], changes: dict[str, object], title: str, without_room: tuple[str, ...]
) -> None:
    disc = disc_of(PLAIN, plucks, cutter_with(changes))

    assert labels_stand(disc, title=title, without_room=without_room) == []
