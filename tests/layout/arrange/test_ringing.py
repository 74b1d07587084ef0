"""What ringing teeth and ringing basses cost, by hand on the small comb; weights as test_writing.py says them."""

import pytest

from tests.layout.arrange.small_comb import SMALL_COMB, comb_with, played
from tests.layout.arrange.test_writing import Lasting, written

UNDAMPED = {"teeth": [tooth | {"damped": False} for tooth in SMALL_COMB["teeth"]]}


def test_plucking_a_ringing_tooth_costs_its_share_until_the_tooth_has_faded() -> None:
    cost = {"ringing_tooth_cost": 0.5}
    soon = written([(0.25, 0.0, "C4"), (0.25, 1.0, "C4")], cost)
    late = written([(0.25, 0.0, "C4"), (0.25, 2.0, "C4")], cost)

    # 2000·1.1·0.95 = 2090 on a bar, 1900 on a beat; after 2 s a tooth has faded.
    assert soon.worth.kept == 2090 + 1900 - 950
    assert late.worth.kept == 2090 + 2090
    assert soon.worth.proved
    assert len(soon.notes) == len(late.notes) == 2


def test_doubled_teeth_take_turns_because_ringing_costs() -> None:
    notes: list[Lasting] = [(0.25, at_s, "E4") for at_s in (0.0, 0.7, 1.4)]

    arrangement = written(notes, {"ringing_tooth_cost": 0.5})

    first, second, third = (track for _, track in played(arrangement))
    assert first != second
    assert third in (first, second)
    # 2090, then on the other tooth 2000·0.9·0.95 = 1710; at 1.4 both ring: 1710 − 855.
    assert arrangement.worth.kept == 2090 + 1710 + 855


def test_whatever_ringing_costs_a_note_is_worth_more_than_none() -> None:
    arrangement = written([(0.25, 0.0, "C4"), (0.25, 1.0, "C4")], {"ringing_tooth_cost": 1})

    assert arrangement.worth.kept == 2090 + 1


BASSES: list[Lasting] = [(0.25, 0.0, "C4"), (0.25, 0.0, "G4"), (0.25, 1.0, "D4"), (0.25, 1.0, "E4")]
BASSES_KEPT = 1463 + 2090 + 1330 + 1900  # 1400·1.1·0.95, 2000·1.1·0.95, 1400·0.95, 2000·0.95
BASS_COST = {"ringing_bass_cost": 0.5}


def test_an_undamped_bass_under_a_foreign_harmony_loses_its_share() -> None:
    # C4 under D4 and E4: 1463/2 = 731. D4 has nothing after it.
    arrangement = written(BASSES, BASS_COST, movement=comb_with(UNDAMPED))

    assert written(BASSES, {}).worth.kept == BASSES_KEPT
    assert arrangement.worth.kept == BASSES_KEPT - 1463 + 731
    assert arrangement.worth.proved


def test_a_damped_bass_loses_nothing() -> None:
    teeth = [tooth | {"damped": tooth["pitch"] == "C4"} for tooth in UNDAMPED["teeth"]]

    assert written(BASSES, BASS_COST, movement=comb_with({"teeth": teeth})).worth.kept == BASSES_KEPT


@pytest.mark.parametrize(
    ("notes", "kept"),
    [
        # the same bass again: C4 at 1.0 1330
        ([(0.25, 0.0, "C4"), (0.25, 0.0, "G4"), (0.25, 1.0, "C4"), (0.25, 1.0, "E4")], BASSES_KEPT),
        # C an octave higher in the next harmony, for which there is no tooth; E4 is inner, 950
        (
            [(0.25, 0.0, "C4"), (0.25, 0.0, "G4"), (0.25, 1.0, "D4"), (0.25, 1.0, "E4"), (0.25, 1.0, "C5")],
            BASSES_KEPT - 1900 + 950,
        ),
        # two seconds later it has faded; D4 and E4 on the bar
        (
            [(0.25, 0.0, "C4"), (0.25, 0.0, "G4"), (0.25, 2.0, "D4"), (0.25, 2.0, "E4")],
            1463 + 2090 + 1463 + 2090,
        ),
    ],
)
def test_a_bass_loses_nothing_under_its_own_harmony_or_when_it_has_faded(notes: list[Lasting], kept: int) -> None:
    assert written(notes, BASS_COST, movement=comb_with(UNDAMPED)).worth.kept == kept


def test_a_melody_alone_is_no_bass() -> None:
    arrangement = written([(0.25, 0.0, "C4"), (0.25, 1.0, "D4")], BASS_COST, movement=comb_with(UNDAMPED))

    assert arrangement.worth.kept == 2090 + 1900


def test_a_bass_plucked_again_pays_with_its_share() -> None:
    # C4 lasts 1.5 s, D4 and E4 come at 1.5: half of 1400·1.1·1.1 = 1694 and half of a fifth of it, 338, are left.
    notes: list[Lasting] = [(1.5, 0.0, "C4"), (0.25, 0.0, "G4"), (0.25, 1.5, "D4"), (0.25, 1.5, "E4")]

    arrangement = written(notes, BASS_COST | {"pluck_again_s": 1.0}, movement=comb_with(UNDAMPED))

    assert arrangement.worth.kept == 847 + 169 + 2090 + 1330 + 1900
