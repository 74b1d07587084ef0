import re
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
import resvg_py
import shapely

from layout.check.finding import Place
from layout.cut import plan_cuts
from layout.cut.plan import Circles, Drawing, Lettering, Outlines, Points
from layout.documents import Movement
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc
from layout.write import write_dxf, write_svg
from tests.layout.examples import cutter_with
from tests.layout.write.examples import (
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
from tests.layout.write.pictures import SVG, group_of, on_white, svg_of, texts_of
from tests.layout.write.reading import Geometry, read_dxf, read_svg, upside_down

FORMED_LAYERS = {"AFTER_FORMING", "FOLDS", "TRACKS"}  # of the record; the picture takes all else from disc.dxf


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


def test_nothing_runs_and_nothing_is_fetched() -> None:
    svg = svg_of(THREE_FOLDS, title="<script>alert(1)</script>", findings=(THIN_WEB,))

    root = ElementTree.fromstring(svg)
    tags = {element.tag.removeprefix(SVG) for element in root.iter()}
    assert tags <= {"svg", "title", "desc", "defs", "g", "path", "circle", "rect", "line", "text", "clipPath"}
    attributes = {name for element in root.iter() for name in element.attrib}
    assert [name for name in attributes if name.startswith("on") or name.endswith("href") or name == "style"] == []
    names = {element.get("id") for element in root.iter()}
    assert [name for name in re.findall(r"url\((.*?)\)", svg.decode()) if name.removeprefix("#") not in names] == []
    assert b"<!" not in svg


def test_what_lies_off_the_disc_is_not_drawn_over_the_words() -> None:
    blank = FERNHOLLOW.disc.model_copy(update={"outer_diameter_mm": 100})
    disc = disc_of(FERNHOLLOW.model_copy(update={"disc": blank}), LASER, [(1, 90.0), (31, 90.0), (31, 180.0)])
    findings = tuple(without(THIN_WEB, at=Place(tracks=(track,))) for track in (1, 31))

    svg = svg_of(disc, findings=findings)

    png = bytes(resvg_py.svg_to_bytes(svg_string=svg.decode(), width=1140, dpi=96))  # 10 pixels a millimetre
    picture = np.asarray(on_white(png).convert("L"))
    top_mm = float(ElementTree.fromstring(svg).get("viewBox", "").split()[1])
    down_mm, right_mm = (np.indices(picture.shape).reshape(2, -1) + 0.5) / 10 + np.array([[top_mm], [-57.0]])
    # 2.3 mm beyond the rim on the left there is neither a word nor an arrow; the ring of track 31 would be there
    beyond = (np.hypot(down_mm, right_mm) > 52.3) & (abs(down_mm) < 30) & (right_mm < 0)
    assert picture.reshape(-1)[beyond].min() == 255
    assert [group.get("id") for group in group_of(svg, "findings")] == ["finding_1"]


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


@pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())
@pytest.mark.parametrize("width_px", [400, 1600])
def test_a_renderer_draws_the_whole_picture(disc: Disc, width_px: int) -> None:
    svg = svg_of(disc, findings=(THIN_WEB, NEAR_LIMIT))

    png = bytes(resvg_py.svg_to_bytes(svg_string=svg.decode(), width=width_px, dpi=96))

    picture = np.asarray(on_white(png).convert("L"))
    box = [float(number) for number in ElementTree.fromstring(svg).get("viewBox", "").split()]
    scale = width_px / box[2]
    row = picture[round(-box[1] * scale)]  # through the disc's centre
    radius_px = disc.movement.disc.outer_diameter_mm / 2 * scale
    rim_px = np.flatnonzero(row[: width_px // 2] < 250)[0]  # the first pixel that is not paper
    assert rim_px == pytest.approx(width_px / 2 - radius_px, abs=2)
    assert picture[:, :3].min() == 255  # nothing is cut off at the sides
    assert picture[-3:].min() == 255


def dashed_row_mm(svg: bytes) -> shapely.Geometry:
    return shapely.union_all(read_svg(svg)["star_wheels"])


@pytest.mark.parametrize("disc", [THREE_FOLDS, THREE_SLOTS, THREE_LANCES], ids=["fold", "slot", "lance"])
def test_the_row_of_star_wheels_does_not_cover_the_index_mark(disc: Disc) -> None:
    plan = plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)

    svg = write_svg(plan, laid_out_of(disc))

    [mark] = read_svg(svg)["index_mark"]
    tracks = disc.turning.radius_mm
    assert dashed_row_mm(svg).distance(mark) > 0.2
    from_mm, _, to_mm, _ = dashed_row_mm(svg).bounds
    assert 0.97 * tracks[0] - 2 < from_mm < tracks[0] < tracks[-1] < to_mm  # over the tracks only


def test_the_row_of_star_wheels_keeps_off_an_index_mark_among_the_tracks() -> None:
    plan = plan_by_hand(THREE_FOLDS)
    mark = Outlines(
        layer="MARKS",
        points_mm=np.array([[(60.0, 0.0), (66.0, 0.0), (63.0, -3.0)]]),
        bulges=np.zeros(3),
        closed=False,
    )
    drawing = Drawing(entities=(*plan.disc.entities, mark), comments=plan.disc.comments)

    svg = write_svg(replace(plan, disc=drawing), laid_out_of(THREE_FOLDS))

    before, after = sorted(shape.bounds for shape in read_svg(svg)["star_wheels"])
    # 0.2 hundredths of the page's 270.18 mm are 0.54 mm
    assert (before[2], after[0]) == pytest.approx((60 - 0.54, 66 + 0.54), abs=0.001)


def test_fold_lines_are_drawn_over_the_working_edges() -> None:
    names = [group.get("id") for group in ElementTree.fromstring(svg_of(THREE_FOLDS)).iter(f"{SVG}g")]

    assert names.index("folds") > names.index("working_edges")


@pytest.mark.parametrize("movement", [FERNHOLLOW, MOSSBROOK], ids=lambda movement: movement.id)
def test_a_rim_left_open_by_bridges_still_bounds_the_sheet(movement: Movement) -> None:
    bridged = cutter_with({"bridges": {"count": 4, "width_mm": 3}}, LASER)
    discs = [disc_of(movement, cutter, [(5, 90.0)]) for cutter in (bridged, LASER)]

    pictures = [picture_as_planned(disc) for disc in discs]

    # Four gaps of 3 mm in a rim: some pixels differ, but far from the square that four arcs leave between them.
    differs = (pictures[0] != pictures[1]).any(axis=2)
    assert 0 < differs.mean() < 0.01


def picture_as_planned(disc: Disc) -> FloatArray:
    plan = plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)
    svg = write_svg(plan, laid_out_of(disc, title="Example", findings=())).decode()
    return np.asarray(on_white(bytes(resvg_py.svg_to_bytes(svg_string=svg, width=600, dpi=96))))
