"""POST /v1/trial-pieces, with the real computation: it takes a moment and needs no tune."""

import io
import json
import zipfile
from typing import Any

import pytest
from ezdxf.filemanagement import read
from pypdf import PdfReader
from werkzeug.test import TestResponse

from layout.documents import shipped_cutter, shipped_movement
from layout.trial_walk import TRIAL_FILES, trial_files
from service.limits import Limits
from tests.service.api.conftest import ClientFor
from tests.service.fakes import Client, FakePlanner

FILES = trial_files(shipped_movement("tarnlight-17"), shipped_cutter("turn-press"))
MINE: dict[str, Any] = shipped_movement("tarnlight-17").model_dump(mode="json", exclude_none=True) | {"id": "mine-17"}


def post(client: Client, query: str = "movement=tarnlight-17&cutter=turn-press", **more: Any) -> TestResponse:
    return client.http.post(f"/v1/trial-pieces?{query}", **more)


def post_parts(client: Client, parts: dict[str, bytes], query: str = "") -> TestResponse:
    data = {name: (io.BytesIO(content), f"{name}.json") for name, content in parts.items()}
    return post(client, query, data=data, content_type="multipart/form-data")


def problem_of(response: TestResponse) -> tuple[int, str]:
    assert response.content_type == "application/problem+json"
    return response.status_code, response.get_json()["type"]


def test_without_a_wish_the_answer_is_what_to_measure(client: Client) -> None:
    response = post(client)

    assert (response.status_code, response.content_type) == (200, "application/json")
    assert response.get_json() == json.loads(FILES["trial-piece.json"])
    assert "Accept" in response.headers["Vary"]


@pytest.mark.parametrize(
    ("media_type", "file_name"), [("image/vnd.dxf", "trial-piece.dxf"), ("application/pdf", "measure.pdf")]
)
def test_drawing_and_sheet_come_as_they_are_asked_for(client: Client, media_type: str, file_name: str) -> None:
    response = post(client, headers={"Accept": media_type})

    assert (response.status_code, response.content_type) == (200, media_type)
    assert response.data == FILES[file_name]
    stem, ending = file_name.split(".")
    name = f"{stem}_tarnlight-17-r1_turn-press_star-side_mm.{ending}"
    assert response.headers["Content-Disposition"] == f'attachment; filename="{name}"'


def test_the_picture_is_shown_and_may_load_nothing(client: Client) -> None:
    response = post(client, headers={"Accept": "image/svg+xml"})

    assert (response.status_code, response.mimetype) == (200, "image/svg+xml")
    assert response.data == FILES["trial-piece.svg"]
    name = "trial-piece_tarnlight-17-r1_turn-press_star-side_mm.svg"
    assert response.headers["Content-Disposition"] == f'inline; filename="{name}"'
    assert response.headers["Content-Security-Policy"] == "default-src 'none'; style-src 'unsafe-inline'"


def test_an_archive_holds_all_files(client: Client) -> None:
    response = post(client, headers={"Accept": "application/zip"})

    with zipfile.ZipFile(io.BytesIO(response.data)) as archive:
        assert archive.testzip() is None
        packed = {name: archive.read(name) for name in archive.namelist()}
    assert list(packed.values()) == [FILES[name] for name in TRIAL_FILES]
    assert next(iter(packed)) == "trial-piece_tarnlight-17-r1_turn-press_star-side_mm.dxf"
    assert response.data == post(client, headers={"Accept": "application/zip"}).data


def test_documents_of_ones_own_come_as_parts(client: Client) -> None:
    cutter = shipped_cutter("turn-press").model_dump(mode="json", exclude_none=True) | {"id": "my-press"}
    parts = {"movement": json.dumps(MINE).encode(), "cutter": json.dumps(cutter).encode()}

    told = post_parts(client, parts).get_json()

    assert (told["movement"]["id"], told["cutter"]["id"]) == ("mine-17", "my-press")
    assert told["steps"] == json.loads(FILES["trial-piece.json"])["steps"]


def test_a_part_and_an_id_go_together_and_the_default_cutter_is_a_laser(client: Client) -> None:
    movement = {"movement": json.dumps(MINE).encode()}

    assert post_parts(client, movement, "cutter=turn-press").get_json()["cutter"] == {"id": "turn-press"}
    assert post_parts(client, movement).get_json()["cutter"] == {"id": "fibre-laser"}


@pytest.mark.parametrize(
    ("query", "status", "kind", "says"),
    [
        ("", 400, "parameter-missing", "no movement is named; add ?movement=ID, one of fernhollow-31"),
        ("movement=lost", 404, "movement-unknown", "no movement has the id 'lost'"),
        ("movement=tarnlight-17&cutter=lost", 404, "cutter-unknown", "no cutter has the id 'lost'"),
        ("movement=tarnlight-17&tune=x", 400, "parameter-invalid", "known are movement, cutter"),
        ("movement=tarnlight-17&despite_findings=x", 400, "parameter-invalid", "known are movement, cutter"),
    ],
)
def test_a_query_that_cannot_be_used_is_told(client: Client, query: str, status: int, kind: str, says: str) -> None:
    response = post(client, query)

    assert problem_of(response) == (status, f"/problems/{kind}")
    assert says in response.get_json()["detail"]


def test_an_answer_that_cannot_be_given_is_refused(client: Client) -> None:
    response = post(client, headers={"Accept": "text/html"})

    assert problem_of(response) == (406, "/problems/not-acceptable")
    assert response.get_json()["allowed_types"] == [
        *("application/json", "image/vnd.dxf", "image/svg+xml", "application/pdf", "application/zip"),
    ]


def test_a_document_with_faults_is_told_by_its_places(client: Client) -> None:
    response = post_parts(client, {"movement": json.dumps(MINE | {"revolution_s": -1}).encode()})

    assert problem_of(response) == (422, "/problems/document-invalid")
    assert [fault["pointer"] for fault in response.get_json()["invalid_params"]] == ["/revolution_s"]


def test_a_cutter_that_cannot_make_the_projections_is_told(client: Client) -> None:
    press = shipped_cutter("turn-press").model_dump(mode="json", exclude_none=True) | {"tools": []}

    response = post_parts(client, {"cutter": json.dumps(press).encode()}, "movement=fernhollow-31")

    assert problem_of(response) == (422, "/problems/document-invalid")
    assert "no tool of turn-press makes the projections of fernhollow-31; it has none" in response.get_json()["detail"]


def test_a_document_given_twice_is_refused(client: Client) -> None:
    response = post_parts(client, {"movement": json.dumps(MINE).encode()}, "movement=tarnlight-17")

    assert problem_of(response) == (400, "/problems/parameter-invalid")
    assert response.get_json()["parameter"] == "movement"


def test_a_tune_is_not_taken(client: Client) -> None:
    alone = post(client, data=b"MThd", content_type="audio/midi")
    as_part = post_parts(client, {"tune": b"MThd"}, "movement=tarnlight-17")

    assert problem_of(alone) == (415, "/problems/media-type-unsupported")
    assert alone.headers["Accept-Post"] == "multipart/form-data"
    assert "a trial piece needs no tune" in alone.get_json()["detail"]
    assert problem_of(as_part) == (400, "/problems/parameter-invalid")


def test_bodies_and_parts_over_their_limits_are_refused(client_for: ClientFor) -> None:
    client = client_for(FakePlanner(), Limits(upload_bytes=4000, document_bytes=100))

    part = post_parts(client, {"movement": b"{" + b" " * 100}, "cutter=turn-press")
    body = post_parts(client, {"movement": b"{" + b" " * 5000})

    assert problem_of(part) == problem_of(body) == (413, "/problems/upload-too-large")
    assert part.get_json()["limit_bytes"] == 100
    assert body.get_json()["limit_bytes"] == 4000


def test_other_methods_are_told_which_one_is_taken(client: Client) -> None:
    response = client.get("/v1/trial-pieces")

    assert problem_of(response) == (405, "/problems/method-not-allowed")
    assert "POST" in response.headers["Allow"]


def test_what_is_given_can_be_opened(client: Client) -> None:
    drawing = post(client, headers={"Accept": "image/vnd.dxf"}).data
    sheet = post(client, headers={"Accept": "application/pdf"}).data

    assert read(io.StringIO(drawing.decode("ascii"))).audit().errors == []
    assert len(PdfReader(io.BytesIO(sheet)).pages) == 1
