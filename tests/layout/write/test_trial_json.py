import io
import json
import math

import pytest
from ezdxf.entities.point import Point
from ezdxf.filemanagement import read

from layout.documents import Movement, read_cutter, read_movement
from layout.trial import trial_piece
from layout.write import write_dxf
from layout.write.trial_json import write_trial_json
from tests.layout.examples import LASER, PRESS, SHIPPED


@pytest.mark.parametrize("movement", SHIPPED, ids=[movement.id for movement in SHIPPED])
def test_every_step_names_a_field_that_stands_in_its_document(movement: Movement) -> None:
    told = json.loads(write_trial_json(trial_piece(movement, LASER)))
    documents = {"movement": movement.model_dump(mode="json"), "cutter": LASER.model_dump(mode="json")}

    assert len(told["steps"]) == sum(ladder["step_count"] for ladder in told["ladders"])
    for step in told["steps"]:
        found = documents[step["document"]]
        for key in step["field"].split("/")[1:]:  # RFC 6901
            found = found[int(key)] if isinstance(found, list) else found[key]
        assert isinstance(found, float)
        assert set(step) == {"ladder", "step", "nominal_mm", "document", "field", "how"}
        assert step["how"]


def test_the_steps_around_a_value_hold_that_value() -> None:
    told = json.loads(write_trial_json(trial_piece(SHIPPED[0], LASER)))
    nominal = {step["step"]: step["nominal_mm"] for step in told["steps"]}

    # fernhollow-31: tab 1.2 wide and 1.41 deep, tracks from 36 to 114.6; fibre-laser: web 0.5, slot 0.4.
    assert (nominal["W3"], nominal["D3"], nominal["M4"], nominal["K2"]) == (1.2, 1.41, 0.5, 0.4)
    assert (nominal["T1"], nominal["T31"]) == (36.0, 114.6)


@pytest.mark.parametrize("movement", SHIPPED, ids=[movement.id for movement in SHIPPED])
def test_the_hits_are_those_of_the_drawing_in_its_order(movement: Movement) -> None:
    piece = trial_piece(movement, PRESS)
    told = json.loads(write_trial_json(piece))
    drawing = read(io.StringIO(write_dxf(piece.drawing, PRESS).decode("ascii")))

    points = [(one.dxf.location.x, one.dxf.location.y) for one in drawing.modelspace() if isinstance(one, Point)]
    assert [(hit["x_mm"], hit["y_mm"]) for hit in told["hits"]] == points
    assert len(points) == len(movement.tracks) + 2 * 6  # one on each track, and six pairs
    assert {hit["tool"] for hit in told["hits"]} == {piece.hits.tool if piece.hits else ""}
    for hit in told["hits"]:
        angle_rad = math.radians(hit["angle_deg"])
        there = (hit["radius_mm"] * math.cos(angle_rad), hit["radius_mm"] * math.sin(angle_rad))
        assert there == pytest.approx((hit["x_mm"], hit["y_mm"]), abs=2e-6)
    assert [hit["sequence"] for hit in told["hits"]] == list(range(1, len(points) + 1))


def test_a_laser_has_no_hits() -> None:
    told = json.loads(write_trial_json(trial_piece(SHIPPED[0], LASER)))

    assert told["hits"] is None
    assert told["not_tried"] == []


def test_the_sheet_is_that_of_the_documents_as_they_can_be_read_again() -> None:
    movement = read_movement(SHIPPED[1].model_dump_json(exclude_none=True))
    cutter = read_cutter(LASER.model_dump_json(exclude_none=True))

    assert write_trial_json(trial_piece(movement, cutter)) == write_trial_json(trial_piece(SHIPPED[1], LASER))
