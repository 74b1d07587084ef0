import io
import math
import re
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
import resvg_py
import shapely
from hypothesis import given
from hypothesis import strategies as st
from PIL import Image

from layout.check.finding import Finding, Level, Place
from layout.cut import plan_cuts
from layout.cut.plan import Circles, Drawing, Lettering, Outlines, Points
from layout.documents import Movement
from layout.place.disc import Disc
from layout.write import write_dxf, write_svg
from layout.write.svg_findings import MOST_SHOWN
from layout.write.svg_style import TITLE_SIZE, VERDICT_SIZE
from tests.layout.write.examples import (
    EARLY_DAMPER,
    EMPTY_DISC,
    EXAMPLE_DISCS,
    FERNHOLLOW,
    FINGERPRINT,
    LASER,
    MOSSBROOK,
    NEAR_LIMIT,
    ONE_FOLD,
    PRESS,
    THIN_WEB,
    THREE_FOLDS,
    THREE_LANCES,
    THREE_SLOTS,
    disc_of,
    drawn_mm,
    laid_out_of,
    plan_by_hand,
    without,
)
from tests.layout.write.reading import Geometry, read_dxf, read_svg, upside_down

SVG = "{http://www.w3.org/2000/svg}"
LEAST_READABLE = 0.022  # of the width: 8.8 px of 400
FORMED_LAYERS = {"AFTER_FORMING", "FOLDS", "TRACKS"}  # of the record; the picture takes all else from disc.dxf


def svg_of(
    disc: Disc, *, title: str = "Example", findings: tuple[Finding, ...] = (), not_good: str | None = None
) -> bytes:
    plan = plan_by_hand(disc, title=title, not_good=not_good)
    return write_svg(plan, laid_out_of(disc, title=title, findings=findings))


def texts_of(svg: bytes) -> list[str]:
    return [str(element.text) for element in ElementTree.fromstring(svg).iter(f"{SVG}text")]


def group_of(svg: bytes, name: str) -> ElementTree.Element:
    [group] = [group for group in ElementTree.fromstring(svg).iter(f"{SVG}g") if group.get("id") == name]
    return group


def centre_of_ring(svg: bytes, number: int) -> tuple[float, float]:
    circle = next(group_of(svg, f"finding_{number}").iter(f"{SVG}circle"))
    return float(circle.get("cx", "nan")), float(circle.get("cy", "nan"))


def outlines_by_layer(drawing: Drawing, disc: Disc, folder: Path) -> dict[str, list[Geometry]]:
    """What GDAL reads of a drawing, turned over, by layer; circles last, as they stand in a picture's group."""
    parts = {Outlines: "points_mm", Points: "points_mm", Circles: "centres_mm", Lettering: "strokes_mm"}
    is_circle = [
        isinstance(entity, Circles) for entity in drawing.entities for _ in getattr(entity, parts[type(entity)])
    ]
    read = zip(is_circle, read_dxf(write_dxf(drawing, disc.cutter), folder), strict=True)
    found: dict[str, list[Geometry]] = {}
    for _, (layer, shape) in sorted(read, key=lambda entry: entry[0]):
        found.setdefault(layer, []).append(upside_down(shape))
    return found


def farthest_mm(one: Geometry, other: Geometry) -> float:
    """How far the farthest vertex of one shape lies from the other; of a fine arc's, some 200 are tried."""
    vertices = shapely.get_coordinates(one)
    shapely.prepare(other)
    return float(shapely.distance(other, shapely.points(vertices[:: max(1, len(vertices) // 200)])).max())


@pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())
def test_every_outline_is_that_of_the_dxf_files_upside_down(disc: Disc, tmp_path: Path) -> None:
    plan = plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)
    drawings = [(plan.record, FORMED_LAYERS), (plan.disc, {"SLITS", "SLOTS", "HITS", "HOLES", "RIM", "MARKS"})]

    groups = read_svg(write_svg(plan, laid_out_of(disc)))

    for drawing, layers in drawings:
        for layer, drawn in outlines_by_layer(drawing, disc, tmp_path).items():
            if layer in layers:
                assert len(groups[layer.lower()]) == len(drawn)
                for one, other in zip(drawn, groups[layer.lower()], strict=True):
                    assert max(farthest_mm(one, other), farthest_mm(other, one)) < 0.001, layer
                    assert one.length == pytest.approx(other.length, abs=0.002), layer  # so no side is missing


def test_the_picture_is_in_millimetres_at_natural_size() -> None:
    root = ElementTree.fromstring(svg_of(ONE_FOLD))

    width, height = root.get("width", ""), root.get("height", "")
    box = [float(number) for number in root.get("viewBox", "").split()]
    assert (width, height) == (f"{box[2]:g}mm", f"{box[3]:.3f}".rstrip("0") + "mm")
    assert box[2] > 237  # room for the disc, whose diameter is 237 mm
    assert box[0] == pytest.approx(-box[2] / 2)


def test_there_is_a_group_for_each_layer_that_occurs_and_no_other() -> None:
    names = {group.get("id") for group in ElementTree.fromstring(svg_of(THREE_LANCES)).iter(f"{SVG}g")}

    assert {"rim", "tracks", "after_forming", "hits", "holes", "marks"} <= names
    assert names & {"slits", "slots", "folds", "leads"} == set()


def test_no_group_of_the_disc_is_moved_by_a_transform() -> None:
    root = ElementTree.fromstring(svg_of(THREE_FOLDS, findings=(THIN_WEB,)))

    assert [element for element in root.iter() if element.get("transform")] == []


@pytest.mark.parametrize("disc", [THREE_FOLDS, THREE_SLOTS, THREE_LANCES], ids=["fold", "slot", "lance"])
def test_the_working_edge_is_shown_where_it_lies_as_drawn(disc: Disc) -> None:
    half_mm = disc.movement.projection.width_mm / 2
    expected = [shapely.LineString(line * (1, -1)) for line in drawn_mm(disc, np.array([(0, -half_mm), (0, half_mm)]))]

    shown = read_svg(svg_of(disc))["working_edges"]

    assert [shapely.hausdorff_distance(*pair) for pair in zip(shown, expected, strict=True)] == pytest.approx(
        [0, 0, 0], abs=0.001
    )


def test_screen_readers_get_a_name_and_a_description() -> None:
    root = ElementTree.fromstring(svg_of(ONE_FOLD, title="Evening tune", findings=(THIN_WEB, NEAR_LIMIT)))

    names = {element.get("id"): element for element in root}
    assert root.get("role") == "img"
    labels = [names[name] for name in root.get("aria-labelledby", "").split()]
    assert [label.tag for label in labels] == [f"{SVG}title", f"{SVG}desc"]
    assert labels[0].text == "Evening tune: tune disc for fernhollow-31"
    assert "NOT GOOD TO CUT. Findings: 1 error, 1 warning." in str(labels[1].text)
    assert "tune disc, seen from the label-side. units: mm." in str(labels[1].text)  # the drawing's comments


def test_nothing_runs_and_nothing_is_fetched() -> None:
    svg = svg_of(THREE_FOLDS, title="<script>alert(1)</script>", findings=(THIN_WEB,))

    root = ElementTree.fromstring(svg)
    tags = {element.tag.removeprefix(SVG) for element in root.iter()}
    assert tags <= {"svg", "title", "desc", "defs", "g", "path", "circle", "rect", "line", "text"}
    attributes = {name for element in root.iter() for name in element.attrib}
    assert [name for name in attributes if name.startswith("on") or name.endswith("href") or name == "style"] == []
    assert b"url(" not in svg
    assert b"<!" not in svg


@pytest.mark.parametrize("title", ["a < b & \"c\" > 'd'", "one\ntwo\x00\x0b\x1bthree", "\ud800 half \uffff", "]]>"])
def test_text_of_a_person_cannot_break_the_picture(title: str) -> None:
    reason = f"because {title}"

    svg = svg_of(ONE_FOLD, title=title, findings=(without(THIN_WEB, message=title, remedy=title),), not_good=reason)

    shown = "\n".join(texts_of(svg))
    assert all(word in shown for word in re.findall(r"[a-z]{3,}", title))
    assert "NOT GOOD TO CUT" in shown


@given(title=st.text(max_size=60))
def test_any_title_gives_a_well_formed_picture(title: str) -> None:
    root = ElementTree.fromstring(svg_of(EMPTY_DISC, title=title))

    assert root.tag == f"{SVG}svg"


def test_a_disc_without_errors_is_called_good_to_cut() -> None:
    shown = texts_of(svg_of(ONE_FOLD, findings=(NEAR_LIMIT, EARLY_DAMPER)))

    assert "Good to cut, 1 warning, 1 piece of advice" in shown
    assert not any("NOT GOOD" in text for text in shown)


def test_a_disc_with_an_error_is_called_not_good_to_cut() -> None:
    shown = texts_of(svg_of(ONE_FOLD, findings=(THIN_WEB,)))

    assert "NOT GOOD TO CUT" in shown
    assert {"1 error", "cutting files kept back"} <= set(shown)
    assert not any(text.startswith("Good") for text in shown)


def test_the_reason_for_cutting_a_faulty_disc_is_shown() -> None:
    shown = texts_of(svg_of(ONE_FOLD, findings=(THIN_WEB,), not_good="trial piece"))

    assert "cutting files given because: trial piece" in shown


@pytest.mark.parametrize("findings", [(), (THIN_WEB,)], ids=["good", "not good"])
def test_title_and_verdict_can_be_read_at_400_pixels(findings: tuple[Finding, ...]) -> None:
    svg = svg_of(ONE_FOLD, findings=findings)

    width = float(ElementTree.fromstring(svg).get("viewBox", "").split()[2])
    sizes = [float(text.get("font-size", "0")) / width for text in group_of(svg, "header").iter(f"{SVG}text")]
    assert len(sizes) >= 3
    assert min(sizes) >= LEAST_READABLE
    assert (TITLE_SIZE / 100, VERDICT_SIZE / 100) > (LEAST_READABLE, LEAST_READABLE)


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


def test_badges_of_findings_at_one_place_do_not_cover_each_other() -> None:
    svg = svg_of(THREE_FOLDS, findings=(THIN_WEB,) * MOST_SHOWN)

    badges = [list(group_of(svg, f"finding_{n}").iter(f"{SVG}circle"))[-1] for n in range(1, MOST_SHOWN + 1)]
    places = shapely.points([(float(badge.get("cx", "nan")), float(badge.get("cy", "nan"))) for badge in badges])
    radius_mm = float(badges[0].get("r", "nan"))
    apart = [one.distance(other) for i, one in enumerate(places) for other in places[:i]]
    assert min(apart) >= 2 * radius_mm


def test_findings_that_are_not_shown_are_counted() -> None:
    svg = svg_of(THREE_FOLDS, findings=(EARLY_DAMPER,) * (MOST_SHOWN + 7))

    assert "and 7 more: see layout.json" in texts_of(svg)
    assert len(list(group_of(svg, "findings"))) == MOST_SHOWN


@pytest.mark.parametrize(
    ("movement", "cutter", "turns"),
    [(FERNHOLLOW, LASER, "clockwise"), (FERNHOLLOW, PRESS, "anticlockwise")],
    ids=["label side", "star side"],
)
def test_the_arrow_turns_as_the_disc_does_seen_from_the_side_drawn(
    movement: Movement, cutter: object, turns: str
) -> None:
    svg = svg_of(disc_of(movement, PRESS if cutter is PRESS else LASER, []))

    arrow = group_of(svg, "turning")
    [title] = arrow.iter(f"{SVG}title")
    assert title.text == f"the disc turns {turns} seen from this side"
    assert f"turns {turns}" in texts_of(svg)
    [arc, _] = [str(path.get("d")) for path in arrow.iter(f"{SVG}path")]
    start_x = float(arc.removeprefix("M").split(" ")[0])
    end_x = float(arc.split(" ")[-2])
    # on the upper right of the disc a clockwise arrow runs to the right
    assert (end_x > start_x) is (turns == "clockwise")


def test_the_facts_say_what_was_kept_and_why_the_rest_was_not() -> None:
    shown = " ".join(texts_of(svg_of(THREE_LANCES)))

    assert "3 of 4 kept, on 3 projections" in shown
    assert "1 no such pitch" in shown
    assert "−3 semitones" in shown
    assert "1.25 × as written" in shown
    assert FINGERPRINT in shown
    assert "tool L11" in shown
    assert "the star side, mirrored, natural size" in shown


@pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())
@pytest.mark.parametrize("width_px", [400, 1600])
def test_a_renderer_draws_the_whole_picture(disc: Disc, width_px: int) -> None:
    svg = svg_of(disc, findings=(THIN_WEB, NEAR_LIMIT))

    png = bytes(resvg_py.svg_to_bytes(svg_string=svg.decode(), width=width_px, dpi=96))

    picture = np.asarray(Image.open(io.BytesIO(png)).convert("L"))
    box = [float(number) for number in ElementTree.fromstring(svg).get("viewBox", "").split()]
    scale = width_px / box[2]
    row = picture[round(-box[1] * scale)]  # through the disc's centre
    radius_px = disc.movement.disc.outer_diameter_mm / 2 * scale
    rim_px = np.flatnonzero(row[: width_px // 2] < 250)[0]  # the first pixel that is not paper
    assert rim_px == pytest.approx(width_px / 2 - radius_px, abs=2)
    assert picture[:, :3].min() == 255  # nothing is cut off at the sides
    assert picture[-3:].min() == 255


def test_levels_are_told_apart_without_colour() -> None:
    findings = tuple(without(EARLY_DAMPER, level=level) for level in Level)

    svg = svg_of(THREE_FOLDS, findings=findings)

    rings = [list(group_of(svg, f"finding_{n}").iter(f"{SVG}circle"))[1].get("stroke-dasharray") for n in (1, 2, 3)]
    assert len(set(rings)) == 3
