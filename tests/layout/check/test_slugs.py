"""Bridges of slugs that have no room, or stand on a fit; how they are cut is tested in tests/layout/cut."""

from layout.check.finding import Code, Level
from layout.check.slugs import slugs_are_held
from tests.layout.cut.test_slugs import HELD, TARNLIGHT, held_with
from tests.layout.examples import LASER, disc_of


def test_one_bridge_without_room_is_told_as_one() -> None:
    # The free outline of a slot of 2.2 x 1.3 mm has sides of 0.9 mm and an arc of 2.04: none for a bridge of 2.1 mm.
    disc = disc_of(TARNLIGHT, [(1, 1.0)], held_with({"count": 1, "width_mm": 2.1, "least_slug_mm": 1.5}))

    slots = slugs_are_held(disc)[0]

    assert (slots.code, slots.level) == (Code.BRIDGE_HAS_NO_ROOM, Level.WARNING)
    assert (slots.measured, slots.limit, slots.unit) == (None, 2.1, "mm")
    assert "clear of the sides that work, for a bridge of 2.100 mm that would hold a slug" in slots.message


def test_bridges_on_the_fit_of_a_centre_hole_are_advice_with_their_width() -> None:
    [centre] = slugs_are_held(disc_of(TARNLIGHT, [], HELD))

    assert (centre.code, centre.level) == (Code.BRIDGE_ON_FIT, Level.ADVICE)
    assert (centre.measured, centre.limit, centre.unit) == (None, 0.2, "mm")
    assert centre.message.startswith("The centre hole has no room for 2 bridges of 0.200 mm")


def test_a_cutter_that_holds_no_slugs_is_told_nothing_of_them() -> None:
    assert slugs_are_held(disc_of(TARNLIGHT, [(1, 1.0)], LASER)) == []
