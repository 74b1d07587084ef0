import json

import pytest

from layout.documents import (
    read_cutter,
    read_movement,
    shipped_cutter,
    shipped_cutter_ids,
    shipped_movement,
    shipped_movement_ids,
)
from layout.read.limits import LIMITS
from service.api.answers import json_bytes
from service.limits import Limits
from tests.service.fakes import Client


def test_the_movements_are_listed_with_what_a_choice_needs(client: Client) -> None:
    movements = client.get("/v1/movements").json["movements"]

    assert [movement["id"] for movement in movements] == list(shipped_movement_ids())
    assert movements[0] == {
        "id": "fernhollow-31",
        "title": "Fernhollow, 31 tracks, standing projections",
        "revision": 1,
        "turns": "clockwise",
        "revolution_s": 66.0,
        "free_turn_s": pytest.approx(61.6),  # 66 s * (360 - 14 - 10) / 360
        "track_count": 31,
        "outer_diameter_mm": 237.0,
        "thickness_mm": 0.5,
        "material": "cold-rolled steel",
        "projection": "standing",
        "kept_by": "shipped",
    }


@pytest.mark.parametrize("movement_id", shipped_movement_ids())
def test_a_movement_is_told_resolved_and_can_be_read_again(client: Client, movement_id: str) -> None:
    answer = client.get(f"/v1/movements/{movement_id}")

    again = read_movement(answer.data)
    assert again.model_dump() == shipped_movement(movement_id).model_dump()
    assert [track["track"] for track in answer.json["tracks"]] == list(range(1, len(again.tracks) + 1))


@pytest.mark.parametrize("cutter_id", shipped_cutter_ids())
def test_a_cutter_is_told_and_can_be_read_again(client: Client, cutter_id: str) -> None:
    answer = client.get(f"/v1/cutters/{cutter_id}")

    assert read_cutter(answer.data) == shipped_cutter(cutter_id)


def test_the_cutters_are_listed_and_the_default_is_marked(client: Client) -> None:
    cutters = client.get("/v1/cutters").json["cutters"]

    assert {cutter["id"]: cutter["is_default"] for cutter in cutters} == {"fibre-laser": True, "turn-press": False}


def test_a_document_the_client_has_is_not_sent_again(client: Client) -> None:
    first = client.get("/v1/movements/tarnlight-17")

    second = client.get("/v1/movements/tarnlight-17", If_None_Match=first.headers["ETag"])

    assert (second.status_code, second.data) == (304, b"")


def test_every_limit_is_told_with_its_unit_and_reason(client: Client) -> None:
    limits = client.get("/v1/limits").json["limits"]

    told = {limit["name"]: limit["value"] for limit in limits}
    assert told["upload_bytes"] == 2 * 1024 * 1024
    assert set(Limits.__dataclass_fields__) <= set(told)
    assert all(limit["unit"] and limit["reason"] for limit in limits)


def test_the_limits_of_reading_are_told_as_reading_keeps_them(client: Client) -> None:
    limits = client.get("/v1/limits").json["limits"]

    of_reading = {limit["name"]: limit["value"] for limit in limits if limit["name"].startswith("tune_")}
    assert of_reading == {f"tune_{name}": getattr(LIMITS, name) for name in LIMITS.__dataclass_fields__}


def test_the_service_says_that_it_runs(client: Client) -> None:
    assert client.get("/healthz").json["status"] == "ok"


def test_the_addresses_named_at_the_top_are_there(client: Client) -> None:
    links = client.get("/").json["links"]

    codes = {name: client.get(path).status_code for name, path in links.items()}
    only_posted_to = dict.fromkeys(("layouts", "trial_pieces", "sheets"), 405)
    with_a_key_alone = dict.fromkeys(("orders", "events", "hooks", "keys"), 401)
    assert codes == dict.fromkeys(links, 200) | only_posted_to | with_a_key_alone


def test_json_writes_half_a_letter_as_the_escape_json_has_for_it() -> None:
    value = {"Dünung": "\ud800"}

    text = json_bytes(value)

    assert text == '{\n  "Dünung": "\\ud800"\n}\n'.encode()
    assert json.loads(text) == value


def test_json_is_utf_8_with_its_own_letters(client: Client) -> None:
    answer = client.get("/problems")

    assert answer.content_type == "application/json"
    assert json.loads(answer.data.decode("utf-8")) == answer.json


@pytest.mark.parametrize("path", ["/", "/nowhere", "/v1/movements"])
def test_no_answer_may_be_taken_for_another_type_or_load_anything(client: Client, path: str) -> None:
    answer = client.get(path)

    assert answer.headers["X-Content-Type-Options"] == "nosniff"
    assert answer.headers["Content-Security-Policy"] == "default-src 'none'"
