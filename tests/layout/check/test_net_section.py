"""The net section held against the cutter's least shares."""

import pytest

from layout.check import Code, Finding, Level, check
from layout.check.net_section import metal_holds_along_rays_and_rings
from layout.documents import Cutter, Movement
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of

CHORDS = [(1, 10.0), (2, 10.0), (3, 10.0)]
ROUND = [(2, float(second)) for second in range(60)]


def cutter_asking(line: float, ring: float, base: Cutter = PRESS) -> Cutter:
    return cutter_with({"net_section": {"least_line_share": line, "least_ring_share": ring}}, base)


def found_on(disc: Disc) -> list[Finding]:
    return metal_holds_along_rays_and_rings(disc)


def test_a_line_that_is_cut_through_is_told_with_what_is_left() -> None:
    # The lance stands square to the radius through its middle, √(r² − 0.7²) from the centre: the band is
    # √(100.7976² + 1.15²) − 49.1951 = 51.609 mm; three openings of 1.6 leave 46.808 of it: 90.70 %
    [finding] = found_on(disc_of(PLAIN, CHORDS, cutter_asking(0.91, 0.5)))

    assert (finding.code, finding.level, finding.unit) == (Code.LINE_CUT_THROUGH, Level.ERROR, "%")
    assert finding.measured == pytest.approx(100 * 46.808 / 51.609, abs=0.01)
    assert finding.limit == pytest.approx(91)
    # The working edges lie at 90 degrees; the outermost corner ahead asin(0.7/100) − atan(1.15/100.7976) from there.
    assert finding.at.angle_deg == pytest.approx(90 + 0.4011 - 0.6537, abs=0.001)
    assert finding.message == (
        "On the line from the centre at 89.75°, openings leave 46.808 mm of the 51.609 mm between 49.195 and "
        "100.804 mm: 90.70 %; turn-press needs 91.00 %. The disc may buckle or tear along it."
    )
    assert "chords bass-first" in finding.remedy


def test_a_ring_that_is_cut_through_is_told_with_what_is_left() -> None:
    # 60 openings, each 2 · asin(1.15/59.2071) wide, at √((59.9959 − 0.8)² + 1.15²) mm: 2.3310 of 6.2832 rad
    [finding] = found_on(disc_of(PLAIN, ROUND, cutter_asking(0.0, 0.63)))

    assert (finding.code, finding.level, finding.unit) == (Code.RING_CUT_THROUGH, Level.ERROR, "%")
    assert finding.measured == pytest.approx(100 * (1 - 2.33096 / 6.28319), abs=0.002)
    assert finding.limit == pytest.approx(63)
    assert finding.at.radius_mm == pytest.approx(59.207, abs=0.001)
    assert "at 59.207 mm, openings leave 234.000 mm of the 372.009 mm round: 62.90 %;" in finding.message
    assert "turn-press needs 63.00 %. The disc may tear off or twist along it." in finding.message
    assert "share them with another track" in finding.remedy


def test_a_disc_that_keeps_just_enough_passes() -> None:
    assert found_on(disc_of(PLAIN, CHORDS, cutter_asking(0.9069, 0.98))) == []
    assert found_on(disc_of(PLAIN, ROUND, cutter_asking(0.0, 0.629))) == []


def test_a_share_of_nothing_never_fails_even_where_nothing_is_left() -> None:
    crowded = [(1, 0.3 * place) for place in range(200)]  # runs right round

    assert found_on(disc_of(PLAIN, crowded, cutter_asking(0.0, 0.0))) == []
    assert [one.code for one in found_on(disc_of(PLAIN, crowded, cutter_asking(0.0, 0.01)))] == [Code.RING_CUT_THROUGH]


def test_a_cutter_that_states_no_shares_is_held_to_none() -> None:
    assert found_on(disc_of(PLAIN, ROUND, cutter_with({"net_section": None}, PRESS))) == []


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_shipped_cutters_ask_for_the_metal_of_the_openest_common_perforated_sheet(
    movement: Movement, cutter: Cutter
) -> None:
    # Perforated sheet is commonly made with up to about 60 % open (common practice, from memory): 40 % is left.
    assert cutter.net_section is not None
    assert (cutter.net_section.least_line_share, cutter.net_section.least_ring_share) == (0.4, 0.4)
    # Openings are 1.3 to 2.04 mm across, tracks 2.1 to 2.62 mm apart: a chord on all at once leaves less than that,
    # one on every second track more.
    everywhere = [(track.track, 4.0) for track in movement.tracks]
    assert [one.code for one in found_on(disc_of(movement, everywhere, cutter))] == [Code.LINE_CUT_THROUGH]
    assert Code.LINE_CUT_THROUGH in [one.code for one in check(disc_of(movement, everywhere, cutter))]
    assert found_on(disc_of(movement, everywhere[::2], cutter)) == []
