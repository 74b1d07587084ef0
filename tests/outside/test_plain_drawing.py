"""Drawings made entity by entity with ezdxf's own API hold what ours hold: timings beside them are of the same job."""

import io

import pytest
from ezdxf.filemanagement import new, read

from layout.cut.plan import CutPlan, Drawing
from layout.documents import Settings, shipped_cutter, shipped_movement
from layout.walk import lay_out
from layout.write import write_dxf
from tests.bench.opponents.plain_drawing import Drawn, apart_mm, plain_drawing, what_is_drawn
from tests.bench.opponents.walk_stages import planned
from tests.service.shop import TUNE

MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
CUTTERS = {cutter_id: shipped_cutter(cutter_id) for cutter_id in ("fibre-laser", "turn-press")}
A_SLIT = Drawn(make=("LWPOLYLINE", "SLITS", "2 corners", "open", ""), numbers=(0.0, 0.0, 0.0, 1.0, 0.0, 0.0))
A_HOLE = Drawn(make=("CIRCLE", "HOLES"), numbers=(0.0, 0.0, 0.0, 2.0))


@pytest.fixture(scope="module", params=[(movement, cutter) for movement in MOVEMENTS for cutter in CUTTERS], ids=str)
def plan(request: pytest.FixtureRequest) -> tuple[CutPlan, str]:
    movement_id, cutter_id = request.param
    return planned(lay_out(TUNE, shipped_movement(movement_id), CUTTERS[cutter_id], Settings())), cutter_id


@pytest.mark.parametrize("file", ["disc", "record"])
def test_our_drawings_and_those_made_entity_by_entity_are_the_same_to_a_millionth_of_a_millimetre(
    plan: tuple[CutPlan, str], file: str
) -> None:
    drawing: Drawing = getattr(plan[0], file)
    cutter = CUTTERS[plan[1]]

    ours, plain = what_is_drawn(write_dxf(drawing, cutter)), what_is_drawn(plain_drawing(drawing, cutter))

    assert ours
    assert apart_mm(ours, plain) < 1e-6


def test_both_have_the_same_layers_in_the_same_colours(plan: tuple[CutPlan, str]) -> None:
    cutter = CUTTERS[plan[1]]
    named = []
    for dxf in (write_dxf(plan[0].record, cutter), plain_drawing(plan[0].record, cutter)):
        layers = read(io.StringIO(dxf.decode())).layers
        named.append({layer.dxf.name: layer.color for layer in layers if layer.dxf.name != "Defpoints"})

    assert named[0] == named[1]  # but for a layer that ezdxf makes for dimensions, of which there are none


@pytest.mark.parametrize(
    "other",
    [
        [A_SLIT],
        [A_HOLE, A_SLIT],
        [A_SLIT, Drawn(make=("CIRCLE", "RIM"), numbers=A_HOLE.numbers)],
    ],
    ids=["one less", "in another order", "on another layer"],
)
def test_drawings_of_other_entities_are_told_apart(other: list[Drawn]) -> None:
    with pytest.raises(ValueError, match=r"^2 entities and \d are not of the same makes, one by one$"):
        apart_mm([A_SLIT, A_HOLE], other)


def test_what_differs_by_a_number_is_measured() -> None:
    moved = Drawn(make=A_HOLE.make, numbers=(0.0, 0.25, 0.0, 2.0))

    assert apart_mm([A_SLIT, A_HOLE], [A_SLIT, moved]) == 0.25
    assert apart_mm([], []) == 0.0


def test_a_kind_that_no_drawing_of_ours_has_is_refused() -> None:
    document = new("R2010")
    document.modelspace().add_ellipse((0, 0), dxfattribs={"layer": "SLITS"})
    out = io.StringIO()
    document.write(out)

    with pytest.raises(TypeError, match=r"^ELLIPSE on SLITS: no drawing of ours has one$"):
        what_is_drawn(out.getvalue().encode())
