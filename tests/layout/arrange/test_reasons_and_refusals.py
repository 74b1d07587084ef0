"""Why notes are left out, and what an error says of rulings that cannot be followed: loads, nudges, several tracks."""

from typing import Any

import pytest

from layout.arrange import Arrangement, arrange
from layout.errors import RulingError
from tests.layout.arrange.small_comb import (
    CLOSE_TRACKS,
    NEARLY_NO_REST,
    SMALL_COMB,
    Note,
    arranged,
    asking,
    comb_with,
    left_out,
    played,
    score_of,
    spacing_for,
)


def comb_of_load(limit_nmm: float, *, lift_mm: float = 0.35) -> Any:
    """Teeth of 1.6 N/mm lifted 0.35 mm, 0.56 N: 16.8, 22.4, 28, 33.6 and 42 N·mm on tracks 1 to 5."""
    teeth = [{**tooth, "stiffness_n_per_mm": 1.6, "lift_mm": lift_mm} for tooth in SMALL_COMB["teeth"]]
    return comb_with({"teeth": teeth, "drive": {"torque_limit_nmm": limit_nmm}})


def ruled(notes: list[Note], *, movement: Any, **fields: Any) -> Arrangement:
    rulings = [{"note": note, "do": "must-sound"} for note in range(len(notes))]
    return arranged(notes, movement=movement, rulings=rulings, **fields)


C4_AND_D4: list[Note] = [(1.0, "C4", 1), (1.0, "D4", 127)]  # 16.8 + 22.4 = 39.2 N·mm


def test_a_chord_the_drive_just_carries_sounds() -> None:
    arrangement = arranged(C4_AND_D4, movement=comb_of_load(39.3))

    assert left_out(arrangement) == {}
    assert arrangement.load is not None
    assert arrangement.load.peak_nmm == pytest.approx(39.2)
    assert (arrangement.load.plucks, arrangement.load.limit_nmm) == ((0, 1), 39.3)


def test_of_a_chord_too_heavy_the_lighter_note_is_left_out_for_the_drive() -> None:
    arrangement = arranged(C4_AND_D4, movement=comb_of_load(39.1))

    assert left_out(arrangement) == {0: "drive-torque"}


def test_a_chord_too_heavy_is_spread_where_it_may_be_nudged() -> None:
    # Window of track 2: 0.35 · 60/(2π · 40) = 83.6 ms. Spread by 10 ms either way, D4 is 20 ms before its release
    # when C4's tooth is let go: 16.8 + 22.4 · (1 − 20/83.6) = 33.84 N·mm; by 20 it is 28.5.
    nudges: dict[str, Any] = {"largest_nudge_ms": 20, "largest_melody_nudge_ms": 20, "passage": {"from_s": 0}}

    arrangement = arranged(C4_AND_D4, movement=comb_of_load(34), **nudges)

    assert left_out(arrangement) == {}
    assert played(arrangement) in ([(0.99, 1), (1.01, 2)], [(0.98, 1), (1.02, 2)])
    assert arrangement.load is not None
    assert arrangement.load.peak_nmm < 34


def test_a_tooth_too_heavy_by_itself_is_left_out_for_the_drive() -> None:
    arrangement = arranged([(1.0, "C4"), (2.0, "G4")], movement=comb_of_load(41))

    assert left_out(arrangement) == {1: "drive-torque"}


def test_a_limit_not_to_be_kept_leaves_nothing_out_but_is_told() -> None:
    arrangement = arranged(C4_AND_D4, movement=comb_of_load(30), load_limit="ignore")

    assert left_out(arrangement) == {}
    assert arrangement.load is not None
    assert arrangement.load.peak_nmm == pytest.approx(39.2)
    assert arrangement.load.limit_nmm == 30


def test_what_only_a_chain_of_nudges_forbids_has_the_wheel_for_its_reason() -> None:
    # Track 1 repeats after 1 s. Each pair could be nudged apart, 0.97 + 2 · 0.02; three of them reach 1.94 + 0.04.
    notes: list[Note] = [(0.5, "C4", 127), (1.47, "C4", 1), (2.44, "C4", 127)]

    arrangement = arranged(notes, largest_nudge_ms=20, largest_melody_nudge_ms=20, passage={"from_s": 0})

    assert left_out(arrangement) == {1: "wheel-still-stepping"}


def test_the_damper_is_the_reason_where_it_asks_for_more_than_the_wheel() -> None:
    movement = comb_with({"damper_recovery_s": 1.3})

    arrangement = arranged([(0.0, "C4", 127), (1.2, "C4", 1)], movement=movement)

    assert left_out(arrangement) == {1: "damper-not-recovered"}


def test_the_web_is_the_reason_on_close_tracks() -> None:
    movement = comb_with({**CLOSE_TRACKS, **NEARLY_NO_REST})

    arrangement = arrange(
        score_of([(1.0, "C4", 1), (1.0, "D4", 127)]), movement, asking(), spacing_for(movement, min_web_mm=1.0)
    )

    assert left_out(arrangement) == {0: "web"}


def test_rulings_too_heavy_for_the_drive_are_refused_with_the_load() -> None:
    with pytest.raises(
        RulingError,
        match=r"note 1 \(/rulings/1\) and note 0 \(/rulings/0\) cannot both sound: together they load the disc with "
        r"39 N·mm, and the drive carries 30 N·mm; drop one of the two",
    ):
        ruled(C4_AND_D4, movement=comb_of_load(30))


def test_three_rulings_too_heavy_together_are_all_named() -> None:
    # Any two are carried: the heaviest are D4 and E4 on track 4, 56 N·mm. All three are 67.2 at least.
    with pytest.raises(RulingError, match=r"note 2 .*, note 1 .* and note 0 .* cannot all sound: together they load"):
        ruled([(1.0, "C4"), (1.0, "D4"), (1.0, "E4")], movement=comb_of_load(60))


def test_a_ruling_whose_tooth_is_too_heavy_alone_says_so() -> None:
    with pytest.raises(
        RulingError,
        match=r"note 0 \(/rulings/0\) cannot sound: its teeth alone on track 5 load the disc beyond what the drive",
    ):
        ruled([(1.0, "G4")], movement=comb_of_load(41))


def test_rulings_too_heavy_that_may_be_spread_are_followed() -> None:
    nudges = {"largest_nudge_ms": 20, "largest_melody_nudge_ms": 20}

    assert left_out(ruled(C4_AND_D4, movement=comb_of_load(34), **nudges)) == {}


def test_rulings_in_a_chain_no_nudge_can_mend_are_all_named() -> None:
    notes: list[Note] = [(0.5, "C4"), (1.47, "C4"), (2.44, "C4")]
    nudges: dict[str, Any] = {"largest_nudge_ms": 20, "largest_melody_nudge_ms": 20, "passage": {"from_s": 0}}

    with pytest.raises(RulingError, match=r"note 2 .*, note 1 .* and note 0 .* cannot all sound: on track 1"):
        ruled(notes, movement=comb_with(), **nudges)


def test_rulings_in_a_chain_of_more_than_are_named_are_counted() -> None:
    # 1 s is needed and 0.9968 s are there: thirteen notes are 12 · 3.2 = 38.4 ms short, which two ends moved by 20 ms
    # mend, fourteen 41.6 ms.
    nudges: dict[str, Any] = {"largest_nudge_ms": 20, "largest_melody_nudge_ms": 20, "passage": {"from_s": 0}}
    chain: list[Note] = [(0.5 + 0.9968 * number, "C4") for number in range(14)]

    assert left_out(ruled(chain[:13], movement=comb_with(), **nudges)) == {}
    with pytest.raises(RulingError) as refusal:
        ruled(chain, movement=comb_with(), **nudges)

    [problem] = refusal.value.problems
    assert problem.pointer == "/rulings/13"
    assert problem.message.endswith(
        "note 13 (/rulings/13) and 13 other notes that must sound have no room together; drop some of them"
    )
