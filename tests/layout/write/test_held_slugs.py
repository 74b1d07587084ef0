"""What picture and work sheet say and show of slugs that bridges hold."""

from layout.documents import Cutter
from tests.layout.cut.test_slugs import FEATURED, HELD, held_with
from tests.layout.examples import LASER, cutter_with, disc_of
from tests.layout.write.test_svg import picture_as_planned
from tests.layout.write.test_work_sheet import sheet_of
from tests.layout.write.work_sheets import words_of

PLUCKS = [(1, 3.0), (2, 20.0), (3, 33.0)]


def sheet_words(cutter: Cutter) -> str:
    return words_of(sheet_of(disc_of(FEATURED, PLUCKS, cutter)))


def test_holes_left_open_by_bridges_are_still_shown_as_holes() -> None:
    rim_only = cutter_with({"bridges": {"count": 4, "width_mm": 0.4}})

    held, whole = (picture_as_planned(disc_of(FEATURED, PLUCKS, c)) for c in (held_with({"width_mm": 2}), rim_only))

    # Gaps of 2.12 mm, four pixels and more, but for a sliver under the arc; the sheet is #f3f2ee, what is behind white.
    through = (whole == 255).all(axis=2)
    assert held[through].min() >= 248
    assert (held != whole).any()


def test_the_work_sheet_says_which_slugs_are_knocked_out() -> None:
    words = sheet_words(HELD)

    assert (
        "Knock out the slugs of slots, location hole, drive hole, drive slot, stop slot, location slot, centre hole, "
        "each on 2 bridges; stone the stubs flush. Take out every loose slug."
    ) in words
    assert "2 in each slug from 1.5 mm up, 0.2 mm wide" in words
    assert "each on one bridge; stone" in sheet_words(held_with({"count": 1}))


def test_the_work_sheet_counts_a_held_hole_once() -> None:
    # Three slots and six holes, each of two lines.
    assert "slots 3, 3 of them in 6 pieces holes 6, 6 of them in 12 pieces rim 1, in 4 pieces" in sheet_words(HELD)
    # The centre hole's slug alone is 9.76 mm and longer than 8 mm.
    assert "holes 6, 1 of them in 2 pieces" in sheet_words(held_with({"least_slug_mm": 8}))


def test_a_cutter_that_holds_no_slugs_has_no_word_of_them() -> None:
    words = sheet_words(LASER)

    assert "Knock out" not in words
    assert "Take out every slug." in words
    assert "holes 6 rim 1 projections 3" in words
