import json
from typing import Any

import pytest

from layout.documents import shipped_cutter, shipped_cutter_ids
from layout.documents.cutter import LAYER_COLOURS, read_cutter
from layout.documents.shipped import shipped_text
from layout.errors import DocumentError, NotShippedError
from tests.layout.examples import LASER, PRESS, cutter_with, document_with


@pytest.mark.parametrize("cutter_id", shipped_cutter_ids())
def test_a_shipped_cutter_keeps_our_layer_names(cutter_id: str) -> None:
    cutter = shipped_cutter(cutter_id)

    assert {ours: cutter.layer(ours).name for ours in LAYER_COLOURS} == {ours: ours for ours in LAYER_COLOURS}


def test_the_first_cutter_is_the_laser() -> None:
    assert shipped_cutter_ids()[0] == "fibre-laser"


@pytest.mark.parametrize(("forms", "side"), [("up", "star-side"), ("down", "label-side")])
def test_a_press_shows_the_face_that_lies_above_as_its_tools_form(forms: str, side: str) -> None:
    # A tab stands on the star side: pushed up, that side lies above; pushed down, the label side.
    unstated = {**PRESS.model_dump(mode="json"), "press": {"forms": forms}}
    del unstated["drawn_from"]

    cutter = read_cutter(json.dumps(unstated))

    assert cutter.drawn_from == side
    assert read_cutter(cutter.model_dump_json()) == cutter


@pytest.mark.parametrize("forms", ["up", "down"])
def test_a_side_that_is_stated_is_drawn_whichever_way_a_press_forms(forms: str) -> None:
    assert cutter_with({"press/forms": forms, "drawn_from": "label-side"}, PRESS).drawn_from == "label-side"


@pytest.mark.parametrize("press", [{}, {"forms": None}, {"forms": "sideways"}, "press", None])
def test_a_side_that_nothing_tells_must_be_stated(press: object) -> None:
    unstated = {**PRESS.model_dump(mode="json"), "press": press}
    del unstated["drawn_from"]

    with pytest.raises(DocumentError, match="/drawn_from: "):
        read_cutter(json.dumps(unstated))


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
        (LASER, {"kerf_compensated": True, "kerf_mm": 0}, "kerf_compensated true needs a laser with kerf_mm above 0"),
        (PRESS, {"kerf_compensated": True}, "kerf_compensated true needs a laser with kerf_mm above 0"),
        (LASER, {"press": {}}, "a laser is no press; leave press out"),
        (PRESS, {"lead_in": {"length_mm": 1}}, "a punch press has no lead_in and no bridges"),
        (PRESS, {"bridges": {"count": 3, "width_mm": 0.3}}, "a punch press has no lead_in and no bridges"),
        (LASER, {"feeds": {"cut_mm_per_s": 0}}, "/feeds/cut_mm_per_s: .*greater than or equal to 0.0+1, got 0"),
        (LASER, {"rates": {"currency": "EUR", "setup": 4.5}}, '/rates/setup: an amount is text .* such as "12.50"'),
        (LASER, {"rates": {"currency": "euro"}}, "/rates/currency: .*match pattern"),
        (LASER, {"feature_rules": {"hole": [1, 0.7, 1.5]}}, "hole: the three levels must not fall"),
        (LASER, {"tolerance_class": "fine"}, "/tolerance_class: Input should be 'iso-9013-1'"),
        (LASER, {"fold/springback": {"opens_deg": 45}}, "/fold/springback/opens_deg: .*less than 45"),
        (PRESS, {"press": {"change_word": "M6"}}, "change_word must hold {tool} once"),
        (PRESS, {"press": {"change_word": "T{tool} {M}"}}, "/press/change_word: .*match pattern"),
        (PRESS, {"press": {"strike_word": "M20 {tool}"}}, "strike_word cannot hold {tool}"),
        (LASER, {"fold/slit_width_mm": None}, 'slit "channel" needs slit_width_mm'),
        (LASER, {"fold/slit": "centre-line"}, "leave slit_width_mm out"),
        (
            LASER,
            {"fold/slit": "centre-line", "fold/slit_width_mm": None, "fold/relief_width_mm": 0.4},
            'relief_width_mm: slit "centre-line" has no room for relief_width_mm; use a channel',
        ),
        (
            LASER,
            {"fold/slit": "centre-line", "fold/slit_width_mm": None, "fold/relief_width_mm": None, "kerf_mm": 0},
            '/kerf_mm: slit "centre-line" needs kerf_mm above 0',
        ),
        (LASER, {"tools": PRESS.model_dump(mode="json")["tools"]}, "a laser has no tools"),
        (PRESS, {"fold": LASER.model_dump(mode="json")["fold"]}, "a punch press lances; leave fold out"),
        (PRESS, {"tools/2/edge_ahead_mm": 0.0}, "edge_ahead_mm must be minus half of footprint_length_mm"),
        (PRESS, {"tools/0/tab_depth_mm": None}, "lance tool L12 needs tab_width_mm and tab_depth_mm"),
        (PRESS, {"tools/0/edge_ahead_mm": 1.2}, "edge_ahead_mm puts the working edge outside the footprint"),
        (PRESS, {"tools/0/edge_ahead_mm": None}, "lance tool L12 needs edge_ahead_mm"),
        (PRESS, {"tools/2/edge_ahead_mm": None}, "slot tool S22 needs edge_ahead_mm"),
        (PRESS, {"tools/3/edge_ahead_mm": 0.5}, "hole tool R3 has no working edge; leave edge_ahead_mm out"),
        (PRESS, {"tools/3/tab_width_mm": 1}, "hole tool R3 forms no tab; leave tab_width_mm and tab_depth_mm out"),
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


def test_the_text_of_an_unknown_document_names_all_there_are() -> None:
    with pytest.raises(NotShippedError, match=r"no document has the id 'saw'; known: fernhollow-31.*turn-press"):
        shipped_text("saw")
