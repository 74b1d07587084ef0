import io
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
import resvg_py
import shapely
from PIL import Image
from shapely.geometry.base import BaseGeometry

from layout.documents import Cutter, Movement
from layout.trial_walk import plan_trial, trial_files
from layout.write.trial_svg import write_trial_svg
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with
from tests.layout.write.pictures import SVG, group_of, texts_of
from tests.layout.write.reading import read_dxf, read_svg, upside_down

FERNHOLLOW, MOSSBROOK, TARNLIGHT = SHIPPED
HELD = cutter_with({"bridges": {"count": 4, "width_mm": 1.0}, "lead_in": {"length_mm": 0.4}})
EVERY = [
    pytest.param(movement, cutter, id=f"{movement.id}-{cutter.id}-{number}")
    for movement in SHIPPED
    for number, cutter in enumerate((LASER, HELD, PRESS))
]


def farthest_mm(one: BaseGeometry, other: BaseGeometry) -> float:
    """How far the farthest of some 400 vertices of one shape lies from the other."""
    vertices = shapely.get_coordinates(one)
    shapely.prepare(other)
    return float(shapely.distance(other, shapely.points(vertices[:: max(1, len(vertices) // 400)])).max())


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_every_layer_of_the_drawing_is_shown_upside_down_as_another_library_reads_it(
    movement: Movement, cutter: Cutter, tmp_path: Path
) -> None:
    files = trial_files(movement, cutter)

    groups = read_svg(files["trial-piece.svg"])

    drawn = read_dxf(files["trial-piece.dxf"], tmp_path)
    for layer in {layer for layer, _ in drawn}:
        ours = shapely.union_all([upside_down(shape) for name, shape in drawn if name == layer])
        shown = groups[layer.lower()]
        if layer == "RIM" and cutter is HELD:
            shown = shown[1:]  # the first is the sheet, which the open lines bound together
        theirs = shapely.union_all(shown)
        assert max(farthest_mm(ours, theirs), farthest_mm(theirs, ours)) < 0.002, layer


def test_the_picture_is_natural_size_and_holds_the_disc() -> None:
    root = ElementTree.fromstring(trial_files(FERNHOLLOW, LASER)["trial-piece.svg"])

    left, top, width, height = map(float, str(root.get("viewBox")).split())
    assert (root.get("width"), root.get("height")) == (f"{width:g}mm", f"{height:g}mm")
    assert max(left, top) <= -118.5  # the disc of 237 mm
    assert min(left + width, top + height) >= 118.5


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_the_steps_and_the_cautions_are_told_and_no_line_runs_off_the_page(movement: Movement, cutter: Cutter) -> None:
    piece = plan_trial(movement, cutter)
    svg = write_trial_svg(piece)

    words = " ".join(texts_of(svg))
    assert f"Trial piece: not a disc, for {movement.id}" in words
    for ladder in piece.ladders:
        for step in ladder.steps:
            assert f"{step.mark} {round(step.nominal_mm, 3):g}" in words
    assert piece.cautions[0] in words
    assert "what is cut is trial-piece.dxf" in words
    png = resvg_py.svg_to_bytes(svg_string=svg.decode(), width=800, dpi=96)
    picture = np.asarray(Image.open(io.BytesIO(bytes(png))).convert("L"))
    assert picture[:, [*range(16), *range(-16, 0)]].min() > 250


def test_what_is_not_tried_is_told() -> None:
    words = " ".join(texts_of(trial_files(FERNHOLLOW, cutter_with({"labels": False}))["trial-piece.svg"]))

    assert "Not tried lettering of what the piece is: the cutter states labels false" in words


@pytest.mark.parametrize(
    ("cutter", "shown"), [(LASER, ["slit", "slot"]), (HELD, ["slit", "slot", "lead-in"]), (PRESS, ["hit"])]
)
def test_the_legend_names_what_is_there(cutter: Cutter, shown: list[str]) -> None:
    svg = trial_files(MOSSBROOK, cutter)["trial-piece.svg"]

    assert [element.text for element in group_of(svg, "legend").iter(f"{SVG}text")] == shown


def test_the_picture_holds_no_script_and_refers_to_nothing_outside() -> None:
    root = ElementTree.fromstring(trial_files(TARNLIGHT, LASER)["trial-piece.svg"])

    assert not [one.tag for one in root.iter() if one.tag.rpartition("}")[2] in {"script", "image", "use", "style"}]
    assert not [name for one in root.iter() for name in one.attrib if "href" in name or name.startswith("on")]
