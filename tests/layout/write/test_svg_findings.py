import math
from xml.etree import ElementTree

import pytest
import shapely

from layout.check.finding import Code, Finding, Level, Place
from layout.write.svg_findings import MOST_LISTED, MOST_OF_KIND, MOST_RINGED
from tests.layout.write.examples import (
    EARLY_DAMPER,
    LASER,
    MOSSBROOK,
    NEAR_LIMIT,
    ONE_FOLD,
    PRESS,
    THIN_WEB,
    THREE_FOLDS,
    disc_of,
    without,
)
from tests.layout.write.pictures import SVG, group_of, svg_of, texts_of


def centre_of_ring(svg: bytes, number: int) -> tuple[float, float]:
    circle = next(group_of(svg, f"finding_{number}").iter(f"{SVG}circle"))
    return float(circle.get("cx", "nan")), float(circle.get("cy", "nan"))


@pytest.mark.parametrize(("cutter", "down"), [(LASER, -1), (PRESS, 1)], ids=["label side", "star side"])
def test_a_finding_is_ringed_at_its_place_as_drawn(cutter: object, down: int) -> None:
    disc = disc_of(MOSSBROOK, PRESS if cutter is PRESS else LASER, [(5, 90.0)])
    finding = without(THIN_WEB, at=Place(radius_mm=100.0, angle_deg=30.0))

    svg = svg_of(disc, findings=(finding,))

    # x = 100 cos 30, y = 100 sin 30 = 50; up on the page is minus, and the star side turns y over once more
    assert centre_of_ring(svg, 1) == pytest.approx((86.603, down * 50.0), abs=0.001)


def test_a_finding_of_two_projections_is_ringed_at_the_first() -> None:
    finding = without(THIN_WEB, at=Place(projections=(2, 0)))

    svg = svg_of(THREE_FOLDS, findings=(finding,))

    # the third projection: track 31, 114.6 mm, at 359 degrees
    angle_rad = math.radians(359)
    assert centre_of_ring(svg, 1) == pytest.approx(
        (114.6 * math.cos(angle_rad), -114.6 * math.sin(angle_rad)), abs=0.001
    )


def test_a_finding_of_a_whole_track_is_ringed_along_the_track() -> None:
    svg = svg_of(THREE_FOLDS, findings=(without(THIN_WEB, at=Place(tracks=(31,))),))

    circle = next(group_of(svg, "finding_1").iter(f"{SVG}circle"))
    assert (circle.get("cx"), circle.get("cy"), circle.get("r")) == ("0", "0", "114.6")


def test_a_finding_without_a_place_is_only_listed() -> None:
    svg = svg_of(ONE_FOLD, findings=(NEAR_LIMIT,))

    assert list(group_of(svg, "findings").iter(f"{SVG}circle")) == []
    assert any(text.startswith("Warning: The tip clears the bend") for text in texts_of(svg))
    assert NEAR_LIMIT.remedy in texts_of(svg)


def test_findings_keep_their_numbers_and_errors_are_listed_first() -> None:
    svg = svg_of(THREE_FOLDS, findings=(EARLY_DAMPER, THIN_WEB))

    listed = [str(text.text) for text in group_of(svg, "findings_list").iter(f"{SVG}text")]
    assert [text for text in listed if text.isdigit()] == ["2", "1"]


def badges_of(svg: bytes) -> tuple[list[shapely.Point], float]:
    """Where the badges on the disc are, and their radius with the line round it."""
    circles = list(group_of(svg, "badges").iter(f"{SVG}circle"))
    places = [shapely.Point(float(badge.get("cx", "nan")), float(badge.get("cy", "nan"))) for badge in circles]
    return places, float(circles[0].get("r", "nan")) + float(circles[0].get("stroke-width", "nan")) / 2


def nearest_mm(places: list[shapely.Point]) -> float:
    return min(one.distance(other) for place, one in enumerate(places) for other in places[:place])


ON_A_TRACK = without(THIN_WEB, at=Place(tracks=(31,)))

AT_THE_RIM = without(THIN_WEB, at=Place(radius_mm=118.5, angle_deg=45.0))

IN_A_CLUSTER = tuple(without(THIN_WEB, at=Place(radius_mm=80.0, angle_deg=90.0 + step)) for step in range(28))


@pytest.mark.parametrize(
    "findings",
    [(THIN_WEB,) * 28, (ON_A_TRACK,) * 28, (AT_THE_RIM,) * 28, IN_A_CLUSTER, (THIN_WEB, ON_A_TRACK, AT_THE_RIM) * 9],
    ids=["one place", "one track", "rim", "cluster", "mixed"],
)
def test_badges_do_not_cover_each_other_and_stay_on_the_disc(findings: tuple[Finding, ...]) -> None:
    places, radius_mm = badges_of(svg_of(THREE_FOLDS, findings=findings))

    assert len(places) == MOST_RINGED
    assert nearest_mm(places) >= 2 * radius_mm - 0.002  # places are written to a micrometre
    width_mm = 237 * 1.14  # the page; 1.9 hundredths of it stay free beyond the rim
    assert max(math.hypot(place.x, place.y) for place in places) + radius_mm <= 237 / 2 + 0.019 * width_mm + 0.002


def test_no_ring_is_drawn_over_a_badge() -> None:
    root = ElementTree.fromstring(svg_of(THREE_FOLDS, findings=IN_A_CLUSTER))

    names = [element.get("id", "") for element in root.iter()]
    rings = [place for place, name in enumerate(names) if name.startswith("finding_")]
    badges = [place for place, name in enumerate(names) if name.startswith("badge_")]
    assert (len(rings), len(badges)) == (MOST_RINGED, MOST_RINGED)
    assert max(rings) < min(badges)


def test_a_badge_that_has_room_stands_beside_the_rings() -> None:
    # 3.2 hundredths of the page, 8.65 mm, apart along a radius: outwards of each, the next one's ring is in the way
    findings = tuple(without(THIN_WEB, at=Place(radius_mm=70 + 8.65 * step, angle_deg=30.0)) for step in range(3))

    svg = svg_of(THREE_FOLDS, findings=findings)

    places, radius_mm = badges_of(svg)
    rings = [shapely.Point(centre_of_ring(svg, number)) for number in (1, 2, 3)]
    assert min(place.distance(ring) for place in places for ring in rings) > radius_mm + 0.017 * 237 * 1.14 * 0.9


def listed_in(svg: bytes) -> list[str]:
    return [str(text.text) for text in group_of(svg, "findings_list").iter(f"{SVG}text")]


def test_findings_of_one_kind_are_listed_a_few_times_and_then_counted() -> None:
    findings = (THIN_WEB, *(EARLY_DAMPER,) * 20, NEAR_LIMIT, *(EARLY_DAMPER,) * 2)

    listed = listed_in(svg_of(THREE_FOLDS, findings=findings))

    assert [text for text in listed if text.isdigit()] == ["1", "22", "2", "3", "4"]
    assert "and 19 more of this kind, numbers 5 to 21, 23 to 24: see layout.json" in listed
    assert listed.count(EARLY_DAMPER.remedy) == 1  # the same for all three


def test_the_list_stays_short_however_many_kinds_there_are() -> None:
    findings = tuple(without(EARLY_DAMPER, code=code) for code in Code for _ in range(4))

    listed = listed_in(svg_of(THREE_FOLDS, findings=findings))

    assert len([text for text in listed if text.isdigit()]) == MOST_LISTED
    # four kinds of three take the twelve places and each leave one; all other codes have four findings each
    assert listed[-1] == f"and {4 * (len(Code) - MOST_LISTED // MOST_OF_KIND)} more: see layout.json"


def test_the_first_findings_are_written_out_in_full() -> None:
    message, remedy = "The message tells it at length. " * 8, "The remedy tells what to do. " * 8

    listed = listed_in(svg_of(ONE_FOLD, findings=(without(THIN_WEB, message=message, remedy=remedy),)))

    assert " ".join(listed[1:]) == f"Error: {message}{remedy}".strip()
    assert len(listed) >= 1 + 3 + 3  # the number, the message, the remedy: more than two lines each


def test_levels_are_told_apart_without_colour() -> None:
    findings = tuple(without(EARLY_DAMPER, level=level) for level in Level)

    svg = svg_of(THREE_FOLDS, findings=findings)

    rings = [list(group_of(svg, f"finding_{n}").iter(f"{SVG}circle"))[1].get("stroke-dasharray") for n in (1, 2, 3)]
    assert len(set(rings)) == 3
