"""A kept layout laid out again with other settings, and the settings that a layout was made with."""

import json
from collections.abc import Iterator
from typing import Any

import pytest
from flask.testing import FlaskClient

from service.access.scopes import Scope
from service.app import create_app
from service.settings import AccessSettings, PlaceSettings, ServiceSettings
from tests.service.api.guarded import bearing, new_key
from tests.service.conftest import parts_of
from tests.service.fakes import MANY
from tests.service.shop import TUNE


@pytest.fixture(scope="module")
def client(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    folder = tmp_path_factory.mktemp("service")
    parts = parts_of(folder)
    places = PlaceSettings(data_directory=parts.settings.places.data_directory, cache_directory=folder / "kept")
    access = AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY)
    client = create_app(ServiceSettings(places=places, access=access)).test_client()
    client.other = bearing(new_key(parts, Scope.ORDER, owner="Thornbury"))  # type: ignore[attr-defined]
    client.own = bearing(new_key(parts, Scope.ORDER, owner="Bellgrove"))  # type: ignore[attr-defined]
    yield client
    parts.store.close()


@pytest.fixture(scope="module")
def made(client: FlaskClient) -> dict[str, Any]:
    answer = client.post("/v1/layouts?movement=mossbrook-67&cutter=turn-press", data=TUNE, content_type="audio/midi")
    assert answer.status_code == 201, answer.text
    told: dict[str, Any] = answer.get_json()
    return told


def notes_played(layout: dict[str, Any]) -> set[int]:
    return {note for projection in layout["projections"] for note in projection["notes"]}


def test_a_layout_laid_out_again_keeps_tune_movement_and_cutter_and_follows_its_rulings(
    client: FlaskClient, made: dict[str, Any]
) -> None:
    note = min(notes_played(made["layout"]))
    settings = {"title": "Again", "rulings": [{"note": note, "do": "leave-out"}]}

    again = client.post(f"/v1/layouts/{made['fingerprint']}/again", json=settings)

    assert again.status_code == 201
    told = again.get_json()
    assert again.headers["Location"] == f"/v1/layouts/{told['fingerprint']}"
    assert told["fingerprint"] != made["fingerprint"]
    assert (told["layout"]["movement"]["id"], told["layout"]["cutter"]["id"]) == ("mossbrook-67", "turn-press")
    assert (told["title"], len(told["layout"]["notes"])) == ("Again", len(made["layout"]["notes"]))
    assert note not in notes_played(told["layout"])
    assert {"note": note, "reason": "ruled-out"} in told["layout"]["left_out"]
    assert client.get(f"/v1/layouts/{told['fingerprint']}/settings.json").get_json() == settings


def test_the_settings_a_layout_was_made_with_lead_to_the_same_layout_again(
    client: FlaskClient, made: dict[str, Any]
) -> None:
    settings = client.get(f"/v1/layouts/{made['fingerprint']}/settings.json")
    again = client.post(f"/v1/layouts/{made['fingerprint']}/again", json=settings.get_json())

    assert settings.get_json() == {}
    assert settings.headers["Content-Disposition"].startswith("attachment; filename=")
    assert f"{made['fingerprint']}_settings.json" in settings.headers["Content-Disposition"]
    assert again.get_json()["layout"] == made["layout"]
    same = client.get(
        f"/v1/layouts/{made['fingerprint']}/settings.json", headers={"If-None-Match": settings.headers["ETag"]}
    )
    assert same.status_code == 304


def test_the_tune_a_layout_was_made_from_is_given_as_it_was_brought(client: FlaskClient, made: dict[str, Any]) -> None:
    tune = client.get(f"/v1/layouts/{made['fingerprint']}/tune.mid")

    assert (tune.status_code, tune.data, tune.content_type) == (200, TUNE, "audio/midi")
    assert f"{made['fingerprint']}_tune.mid" in tune.headers["Content-Disposition"]
    same = client.get(f"/v1/layouts/{made['fingerprint']}/tune.mid", headers={"If-None-Match": tune.headers["ETag"]})
    assert same.status_code == 304


def test_rulings_that_contradict_are_told_each_at_its_place(client: FlaskClient, made: dict[str, Any]) -> None:
    rulings = [{"note": 0, "do": "must-sound"}, {"note": 1, "do": "leave-out"}, {"note": 0, "do": "leave-out"}]

    refused = client.post(f"/v1/layouts/{made['fingerprint']}/again", json={"rulings": rulings})

    assert (refused.status_code, refused.get_json()["type"]) == (422, "/problems/rulings-contradict")
    assert refused.get_json()["invalid_params"] == [
        {
            "pointer": "/rulings/2",
            "detail": "note 0: 'leave-out' here and 'must-sound' in /rulings/0 disagree; keep one of them",
        }
    ]


def test_settings_that_are_none_are_refused_with_their_place(client: FlaskClient, made: dict[str, Any]) -> None:
    refused = client.post(f"/v1/layouts/{made['fingerprint']}/again", json={"rulings": [{"note": -1, "do": "place"}]})

    assert (refused.status_code, refused.get_json()["type"]) == (422, "/problems/document-invalid")
    assert refused.get_json()["document"] == "settings"
    assert refused.get_json()["invalid_params"][0]["pointer"] == "/rulings/0/note"


def test_settings_of_another_media_type_are_refused(client: FlaskClient, made: dict[str, Any]) -> None:
    refused = client.post(f"/v1/layouts/{made['fingerprint']}/again", data=b"{}", content_type="audio/midi")

    assert (refused.status_code, refused.get_json()["allowed_types"]) == (415, ["application/json"])


def test_a_layout_that_is_not_kept_or_is_anothers_is_not_laid_out_again(client: FlaskClient) -> None:
    own = client.post(
        "/v1/layouts?movement=fernhollow-31",
        data=TUNE,
        content_type="audio/midi",
        headers=client.own,  # type: ignore[attr-defined]
    ).get_json()

    for fingerprint, headers in (("0" * 16, {}), ("nothing", {}), (own["fingerprint"], client.other)):  # type: ignore[attr-defined]
        refused = client.post(f"/v1/layouts/{fingerprint}/again", json={}, headers=headers)
        unread = [
            client.get(f"/v1/layouts/{fingerprint}/{name}", headers=headers) for name in ("settings.json", "tune.mid")
        ]

        assert {answer.get_json()["type"] for answer in (refused, *unread)} == {"/problems/layout-unknown"}


def test_what_is_laid_out_again_is_kept_for_its_owner_alone(client: FlaskClient) -> None:
    own = client.post("/v1/layouts?movement=fernhollow-31", data=TUNE, content_type="audio/midi", headers=client.own)  # type: ignore[attr-defined]

    again = client.post(
        f"/v1/layouts/{own.get_json()['fingerprint']}/again",
        data=json.dumps({"title": "Own"}),
        content_type="application/json",
        headers=client.own,  # type: ignore[attr-defined]
    ).get_json()

    assert client.get(f"/v1/layouts/{again['fingerprint']}", headers=client.own).status_code == 200  # type: ignore[attr-defined]
    assert client.get(f"/v1/layouts/{again['fingerprint']}", headers=client.other).status_code == 404  # type: ignore[attr-defined]
