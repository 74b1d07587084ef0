import json
from typing import Any

import pytest

from layout.documents import shipped_cutter, shipped_cutter_ids
from layout.documents.cutter import LAYER_COLOURS, read_cutter
from layout.errors import DocumentError, NotShippedError
from tests.layout.examples import LASER, PRESS, cutter_with, document_with


@pytest.mark.parametrize("cutter_id", shipped_cutter_ids())
def test_a_shipped_cutter_keeps_our_layer_names(cutter_id: str) -> None:
    cutter = shipped_cutter(cutter_id)

    assert {ours: cutter.layer(ours).name for ours in LAYER_COLOURS} == {ours: ours for ours in LAYER_COLOURS}


def test_the_first_cutter_is_the_laser() -> None:
    assert shipped_cutter_ids()[0] == "fibre-laser"


def test_a_cutter_may_name_its_own_layers() -> None:
    cutter = cutter_with({"layers": {"SLITS": {"name": "CUT-INSIDE", "colour": 3}}})

    assert cutter.layer("SLITS").name == "CUT-INSIDE"
    assert cutter.layer("RIM").name == "RIM"


@pytest.mark.parametrize(
    ("base", "changes", "message"),
    [
        (LASER, {"layers": {"SLITS": {"name": "rim", "colour": 3}}}, "layers: SLITS and RIM would share the layer"),
        (LASER, {"layers": {"CUTS": {"name": "A", "colour": 3}}}, "no layer of ours is called 'CUTS'; ours are SLITS"),
        (LASER, {"layers": {"SLITS": {"name": "A", "colour": 256}}}, "/layers/SLITS/colour: .*255, got 256"),
        (LASER, {"kerf_compensated": True}, "kerf_compensated true is not offered"),
        (LASER, {"fold/slit_width_mm": None}, 'slit "channel" needs slit_width_mm'),
        (LASER, {"fold/slit": "centre-line"}, "leave slit_width_mm out"),
        (LASER, {"tools": PRESS.model_dump(mode="json")["tools"]}, "a laser has no tools"),
        (PRESS, {"fold": LASER.model_dump(mode="json")["fold"]}, "a punch press lances; leave fold out"),
        (PRESS, {"tools/2/edge_ahead_mm": 0.0}, "edge_ahead_mm must be minus half of footprint_length_mm"),
        (PRESS, {"tools/0/tab_depth_mm": None}, "lance tool L12 needs tab_width_mm and tab_depth_mm"),
        (PRESS, {"tools/0/edge_ahead_mm": 1.2}, "edge_ahead_mm puts the working edge outside the footprint"),
        (PRESS, {"tools/1/tool": "L12"}, "two tools have the same name"),
        (LASER, {"min_web_mm": 60}, "/min_web_mm: .*less than or equal to 50, got 60"),
        (LASER, {"min_web_mm": -1}, "/min_web_mm: Input should be greater than or equal to 0.001, got -1"),
    ],
)
def test_a_fault_in_a_cutter_names_its_place(base: Any, changes: dict[str, Any], message: str) -> None:
    text = json.dumps(document_with(changes, base.model_dump(mode="json", exclude_none=True)))

    with pytest.raises(DocumentError, match=message):
        read_cutter(text)


def test_an_unknown_cutter_names_the_ones_there_are() -> None:
    with pytest.raises(NotShippedError, match="no cutter has the id 'saw'; known: fibre-laser, turn-press"):
        shipped_cutter("saw")
