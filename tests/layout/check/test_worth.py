"""A margin smaller than the plus_minus it stands on says so: in the checks of a part's sizes, strength and time."""

from typing import Any

import pytest

from layout.check import Code, Finding, Level
from layout.check.drive import tempo_holds, winding_lasts
from layout.check.feature_sizes import features_suit_the_sheet
from layout.check.forming import bends_lie_across_the_rolling
from layout.check.kerf import nothing_closes_under_the_kerf
from layout.check.margin import told_worth
from layout.check.net_section import metal_holds_along_rays_and_rings
from layout.check.timing import fast_passages_are_held
from layout.check.worth import edge_unsure_mm, edges_unsure_mm, of_tracks, reach_unsure_mm, reaches_unsure_mm
from tests.layout.check.test_drive import LIFTED, SPRING, WOUND, found
from tests.layout.check.test_feature_sizes import cutter_ruling
from tests.layout.check.test_net_section import CHORDS, ROUND, cutter_asking
from tests.layout.check.test_timing import COARSE, top_line
from tests.layout.examples import LASER, cutter_with, disc_of, movement_with

HOLE = {"purpose": "drive", "shape": "hole", "radius_mm": 20, "first_at_deg": 90}
STANDS_ON = "of the numbers it stands on."


def worth(value: float, plus_minus: float) -> dict[str, float]:
    return {"value": value, "plus_minus": plus_minus}


def sizes_of(changes: dict[str, Any], **rules: list[float]) -> list[Finding]:
    return features_suit_the_sheet(disc_of(movement_with(changes), [(1, 10.0)], cutter_ruling(**rules)))


def test_a_worth_is_told_only_where_it_is_the_larger() -> None:
    assert told_worth(-0.1, 0.1, "mm", fails=True) == told_worth(0.1, 0.0, "mm", fails=False) == ""
    assert told_worth(-0.05, 0.1, "mm", fails=True) == (
        " It fails by 0.050 mm, less than the ±0.100 mm of the numbers it stands on."
    )
    assert told_worth(0.0, 0.1, "%", fails=False).startswith(" It holds by 0.000 %, less than the ±0.100 %")


def test_a_hole_that_misses_its_limit_by_less_than_it_is_worth_says_so() -> None:
    hole = HOLE | {"width_mm": worth(0.48, 0.03), "length_mm": 0.48}

    [finding] = sizes_of({"disc/features": [hole]}, hole=[1.0, 1.0, 1.0])

    # 1.0 times 0.5 mm; length and width are the same, and the width's worth is told.
    assert (finding.code, finding.level) == (Code.SMALL_FOR_SHEET, Level.ERROR)
    assert finding.message.endswith(f" It fails by 0.020 mm, less than the ±0.030 mm {STANDS_ON}")


def test_a_warning_that_may_be_an_error_says_so() -> None:
    hole = HOLE | {"width_mm": worth(0.52, 0.03), "length_mm": 0.52}

    [finding] = sizes_of({"disc/features": [hole]}, hole=[1.0, 1.5, 2.0])

    assert (finding.code, finding.level) == (Code.SMALL_FOR_SHEET, Level.WARNING)
    assert finding.message.endswith(
        f" It is 0.020 mm above 0.500 mm, the limit for an error, less than the ±0.030 mm {STANDS_ON}"
    )


def test_a_size_that_holds_by_less_than_it_is_worth_is_advice() -> None:
    hole = HOLE | {"width_mm": worth(0.52, 0.03), "length_mm": 0.52}

    [finding] = sizes_of({"disc/features": [hole]}, hole=[0.5, 0.5, 1.0])

    assert (finding.code, finding.level) == (Code.MARGIN_UNSURE, Level.ADVICE)
    assert finding.message.endswith(f" It holds by 0.020 mm, less than the ±0.030 mm {STANDS_ON}")
    assert (
        sizes_of({"disc/features": [HOLE | {"width_mm": worth(0.53, 0.03), "length_mm": 0.53}]}, hole=[1.0] * 3) == []
    )


def test_the_thickness_shifts_the_limit_by_its_ratio() -> None:
    hole = HOLE | {"width_mm": 0.76, "length_mm": 0.76}

    # 1.5 times 0.5 ± 0.01 mm: 0.75 ± 0.015.
    [finding] = sizes_of({"disc/features": [hole], "disc/thickness_mm": worth(0.5, 0.01)}, hole=[0.5, 0.5, 1.5])

    assert finding.message.endswith(f" It holds by 0.010 mm, less than the ±0.015 mm {STANDS_ON}")


@pytest.mark.parametrize(
    ("changes", "unsure"),
    [
        ({"tracks/0/radius_mm": worth(50, 0.3)}, "0.300"),
        ({"disc/outer_diameter_mm": worth(240, 1.0)}, None),  # the rim is far off: the hole's edge is judged
        ({"disc/centre_hole_mm": worth(10, 0.5)}, "0.250"),
        ({"projection/width_mm": worth(1.2, 0.4)}, "0.200"),
    ],
)
def test_metal_to_an_edge_stands_on_track_blank_and_width(changes: dict[str, Any], unsure: str | None) -> None:
    # Track 1 reaches in to 50 − 0.6 − 0.42 mm of slit, so 43.98 mm are left to the hole of 10 mm: 88 times 0.5 is 44.0.
    # Ratios of a document end at 20, so the sheet is taken 2.2 mm thick: 20 times is 44.
    found_on = sizes_of({"disc/thickness_mm": 2.2, **changes}, edge=[0.002, 0.002, 20.0])

    [finding] = [each for each in found_on if "centre hole" in each.message]
    assert finding.level == Level.ADVICE
    assert (f"less than the ±{unsure} mm" in finding.message) is (unsure is not None)


def test_a_web_between_tracks_stands_on_both_radii_and_the_width() -> None:
    # Tabs side by side on tracks 10 mm apart: 10 − 1.2 − 2·0.42 = 7.96 mm of web.
    changes = {"tracks/0/radius_mm": worth(50, 0.02), "tracks/1/radius_mm": worth(60, 0.03)}
    changes["projection/width_mm"] = worth(1.2, 0.04)
    movement = movement_with(changes)

    def told(ratio: float) -> list[Finding]:
        disc = disc_of(movement, [(1, 10.0), (2, 10.0)], cutter_ruling(web=[0.002, 0.002, ratio]))
        return features_suit_the_sheet(disc)

    # 15.9 times 0.5 is 7.95, and 16 times 8.0: it holds by 0.010 and fails by 0.040; 0.02 + 0.03 + 0.04 is 0.09.
    [holds], [fails] = told(15.9), told(16.0)
    assert (holds.code, fails.code) == (Code.MARGIN_UNSURE, Code.SMALL_FOR_SHEET)
    assert holds.message.endswith(f" It holds by 0.010 mm, less than the ±0.090 mm {STANDS_ON}")
    assert fails.message.endswith(f" It fails by 0.040 mm, less than the ±0.090 mm {STANDS_ON}")
    assert told(15.7) == []  # 7.85: it holds by 0.11


def test_a_web_between_tracks_stands_on_the_thickness_by_the_greatest_ratio() -> None:
    # 7.96 mm again; 15.9 times 0.5 ± 0.01 mm is 7.95 ± 0.159.
    disc = disc_of(
        movement_with({"disc/thickness_mm": worth(0.5, 0.01)}),
        [(1, 10.0), (2, 10.0)],
        cutter_ruling(web=[0.002, 0.002, 15.9]),
    )

    [finding] = features_suit_the_sheet(disc)

    assert finding.code is Code.MARGIN_UNSURE
    assert finding.message.endswith(f" It holds by 0.010 mm, less than the ±0.159 mm {STANDS_ON}")


@pytest.mark.parametrize(("width_mm", "code"), [(0.11, Code.KERF_CLOSES), (0.13, Code.MARGIN_UNSURE)])
def test_what_is_near_the_kerf_says_what_it_is_worth(width_mm: float, code: Code) -> None:
    hole = HOLE | {"width_mm": worth(width_mm, 0.02), "length_mm": width_mm}
    disc = disc_of(movement_with({"disc/features": [hole]}), [], cutter_with({"kerf_compensated": True}))

    [finding] = nothing_closes_under_the_kerf(disc)

    assert finding.code is code
    assert finding.message.endswith(f"by 0.010 mm, less than the ±0.020 mm {STANDS_ON}")


def test_a_line_near_its_least_metal_says_what_that_is_worth() -> None:
    # Of 51.609 mm three openings take 4.801, 9.30 %: with a width of 1.2 ± 0.12 a tenth of that, 0.930 %, more or less.
    movement = movement_with({"projection/width_mm": worth(1.2, 0.12)})

    [fails] = metal_holds_along_rays_and_rings(disc_of(movement, CHORDS, cutter_asking(0.91, 0.5)))
    [holds] = metal_holds_along_rays_and_rings(disc_of(movement, CHORDS, cutter_asking(0.90, 0.5)))

    assert (fails.code, holds.code) == (Code.LINE_CUT_THROUGH, Code.MARGIN_UNSURE)
    assert "It fails by 0.30" in fails.message
    assert f"less than the ±0.930 % {STANDS_ON}" in fails.message
    assert "may buckle" not in holds.message
    assert f"less than the ±0.930 % {STANDS_ON}" in holds.message
    assert metal_holds_along_rays_and_rings(disc_of(movement, CHORDS, cutter_asking(0.89, 0.5))) == []


def test_a_ring_near_its_least_metal_says_what_that_is_worth() -> None:
    # 62.90 % are left, 37.10 % cut: a tenth of the depth, 0.141 of 1.41, is 3.710 % more or less.
    movement = movement_with({"projection/depth_mm": worth(1.41, 0.141)})

    [fails] = metal_holds_along_rays_and_rings(disc_of(movement, ROUND, cutter_asking(0.0, 0.63)))
    [holds] = metal_holds_along_rays_and_rings(disc_of(movement, ROUND, cutter_asking(0.0, 0.60)))

    assert (fails.code, holds.code) == (Code.RING_CUT_THROUGH, Code.MARGIN_UNSURE)
    assert f"less than the ±3.710 % {STANDS_ON}" in fails.message
    assert "It holds by 2.90" in holds.message


def test_a_ring_with_nothing_left_holds_or_fails_by_all_of_its_limit() -> None:
    # Openings run right round. What is cut is all of it: a tenth of the depth more or less is 10 % of the ring.
    movement = movement_with({"projection/depth_mm": worth(1.41, 0.141)})
    crowded = [(1, 0.3 * place) for place in range(200)]

    [holds] = metal_holds_along_rays_and_rings(disc_of(movement, crowded, cutter_asking(0.0, 0.0)))
    [fails] = metal_holds_along_rays_and_rings(disc_of(movement, crowded, cutter_asking(0.0, 0.04)))

    assert (holds.code, holds.measured, holds.limit) == (Code.MARGIN_UNSURE, 0, 0)
    assert holds.message.endswith(f" It holds by 0.000 %, less than the ±10.000 % {STANDS_ON}")
    assert (fails.code, fails.measured, fails.limit) == (Code.RING_CUT_THROUGH, 0, 4)
    assert fails.message.endswith(f" It fails by 4.000 %, less than the ±10.000 % {STANDS_ON}")


def test_a_passage_near_what_is_heard_says_what_the_turn_and_the_radius_are_worth() -> None:
    # 0.1 mm at 60 s and 50 mm is 19.099 ms, 0.01° 1.667: together 20.765. A turn of 60 ± 3 s is 5 % of both, 1.038;
    # a radius of 50 ± 1 mm 2 % of the first, 0.382.
    movement = movement_with({"revolution_s": worth(60, 3), "tracks/0/radius_mm": worth(50, 1)})
    tune = top_line([(1, 1.0), (1, 1.2)])

    [finding] = fast_passages_are_held(tune, disc_of(movement, [(1, 1.0), (1, 1.2)], COARSE))

    assert finding.message.endswith(f" It fails by 0.765 ms, less than the ±1.420 ms {STANDS_ON}")


def test_folds_near_the_rolling_say_what_its_direction_is_worth() -> None:
    # An edge at 30 + 6·10 = 90 degrees, rolled along 62: 28 from it.
    for plus_minus, ends in ((3, f" It fails by 2.000 deg, less than the ±3.000 deg {STANDS_ON}"), (1, "more easily.")):
        movement = movement_with({"disc/rolled_along_deg": worth(62, plus_minus)})

        [finding] = bends_lie_across_the_rolling(disc_of(movement, [(3, 10.0)], LASER))

        assert finding.message.endswith(ends)


def test_a_tempo_that_sags_says_what_the_spring_is_worth() -> None:
    # It slows by 4.262 %, 1.762 too much. A spring 0.5 ± 0.1 mm thick may bring 1.6 times less torque.
    [sure], [told] = (
        found(tempo_holds, LIFTED | WOUND | {f"{SPRING}/thickness_mm": thickness})
        for thickness in (0.5, worth(0.5, 0.1))
    )

    assert sure.message.endswith("is just heard.")
    assert "It fails by 1.762 %, less than the ±" in told.message


def test_a_winding_of_nearly_two_turns_says_what_they_are_worth() -> None:
    # 0.9 turns of the barrel are 1.8 of the disc; 0.9 ± 0.2 makes 1.8·(1 − 1/(1 + 0.2/0.9)) = 0.327 less.
    [finding] = found(winding_lasts, LIFTED | WOUND | {f"{SPRING}/usable_turns": worth(0.9, 0.2)})

    assert (finding.code, finding.level) == (Code.WINDING_TOO_SHORT, Level.ADVICE)
    assert finding.message.endswith(f" It fails by 0.200 turns, less than the ±0.327 turns {STANDS_ON}")


ARCS = {"tracks/1/engagement_arc_mm": worth(3.0, 0.03), "tracks/1/release_arc_mm": worth(0.5, 0.03)}


@pytest.mark.parametrize("arcs", [{}, ARCS], ids=["computed wheel", "measured arcs"])
def test_the_worths_of_all_tracks_at_once_are_those_of_each(arcs: dict[str, Any]) -> None:
    stated = {"tracks/1/radius_mm": worth(60, 0.03), "star_wheel/tip_radius_mm": worth(3.2, 0.03), **arcs}
    disc = disc_of(movement_with(stated), [(1, 1.0), (2, 5.0)])

    assert of_tracks(disc, "radius_mm").tolist() == [0.0, 0.03, 0.0]
    assert edges_unsure_mm(disc).tolist() == [edge_unsure_mm(disc, index) for index in range(3)]
    # track 3 carries no projection
    assert reaches_unsure_mm(disc).tolist() == [reach_unsure_mm(disc, 0), reach_unsure_mm(disc, 1), 0.0]
    assert reach_unsure_mm(disc, 1) > 0
    assert reaches_unsure_mm(disc_of(movement_with(), [(1, 1.0)])).tolist() == [0.0, 0.0, 0.0]


def test_the_measured_arcs_of_a_wheel_may_be_off_together() -> None:
    wheel = {"engagement_arc_mm": worth(3.2, 0.3), "release_arc_mm": worth(1.0, 0.2), "thickness_mm": 0.5}
    own = {"tracks/0/engagement_arc_mm": worth(3.2, 0.1), "tracks/0/release_arc_mm": 1.0}
    disc = disc_of(movement_with({"star_wheel": wheel, **own}), [(1, 1.0)])

    # Track 1 has arcs of its own, of which one is measured.
    assert [reach_unsure_mm(disc, track) for track in (0, 1)] == [0.1, pytest.approx(0.3 + 0.2)]
