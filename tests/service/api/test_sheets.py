import io
import json
import zipfile
from pathlib import Path
from typing import Any

import ezdxf
import pytest

from service.limits import Limits
from tests.service.fakes import Client, FakePlanner, client_of

JOB: dict[str, Any] = {
    "format": "discwright-sheets/1",
    "title": "Spring batch",
    "gap_mm": 5,
    "margin_mm": 10,
    "stock": [{"id": "full", "width_mm": 800, "height_mm": 300, "quantity": 2, "lot": "B 12"}],
    "discs": [{"id": "fernhollow-31", "diameter_mm": 237, "quantity": 4}],
}


def post(client: Client, job: Any, **headers: str) -> Any:
    body = job if isinstance(job, bytes) else json.dumps(job).encode()
    sent = {"Content-Type": "application/json"} | {name.replace("_", "-"): value for name, value in headers.items()}
    return client.http.post("/v1/sheets", data=body, headers=sent)


def test_a_job_is_answered_with_its_plan(client: Client) -> None:
    answer = post(client, JOB)

    assert answer.status_code == 200
    assert answer.content_type == "application/json"
    assert answer.headers["Vary"] == "Accept"
    assert answer.json["complete"] is True
    # 800 − 2 × 10 holds three of 237 with gaps of 5: 721
    assert [(sheet["lot"], len(sheet["discs"])) for sheet in answer.json["sheets"]] == [("B 12", 3), ("B 12", 1)]


def test_the_archive_holds_the_plan_the_part_list_and_a_drawing_of_each_sheet(client: Client) -> None:
    answer = post(client, JOB, Accept="application/zip")

    assert answer.status_code == 200
    assert answer.content_type == "application/zip"
    plan = post(client, JOB).json
    assert answer.headers["Content-Disposition"] == (
        f'attachment; filename="spring-batch_sheets_mm_{plan["fingerprint"]}.zip"'
    )
    archive = zipfile.ZipFile(io.BytesIO(answer.data))
    assert archive.namelist() == ["sheets.json", "parts.csv", "sheet-1.dxf", "sheet-2.dxf"]
    assert json.loads(archive.read("sheets.json")) == plan
    drawing = ezdxf.read(io.StringIO(archive.read("sheet-1.dxf").decode("ascii")))
    assert len(drawing.modelspace().query("CIRCLE")) == 3


def test_discs_that_fit_nowhere_are_a_finding_and_no_failure(client: Client) -> None:
    answer = post(client, JOB | {"discs": [{"id": "great", "diameter_mm": 900, "quantity": 1}]}, Accept="*/*")

    assert answer.status_code == 200
    assert [finding["code"] for finding in answer.json["findings"]] == ["disc-not-placed"]
    archive = post(
        client, JOB | {"discs": [{"id": "great", "diameter_mm": 900, "quantity": 1}]}, Accept="application/zip"
    )
    assert 'filename="NOT-ALL-PLACED_spring-batch' in archive.headers["Content-Disposition"]


def test_a_fault_of_the_job_is_told_with_its_place(client: Client) -> None:
    crossing = [{"id": "rest", "outline_mm": [[0, 0], [100, 100], [100, 0], [0, 100]]}]

    answer = post(client, JOB | {"stock": crossing})

    assert answer.status_code == 422
    assert answer.content_type == "application/problem+json"
    assert answer.json["type"] == "/problems/document-invalid"
    assert answer.json["document"] == "sheet job"
    assert [fault["pointer"] for fault in answer.json["invalid_params"]] == ["/stock/0/outline_mm"]


@pytest.mark.parametrize("body", [b"", b"{", b"[]", b"\xff\xfe", b'{"format": "discwright-sheets/1"}', b"1e999"])
def test_a_body_that_is_no_job_is_a_problem_not_a_failure(client: Client, body: bytes) -> None:
    assert post(client, body).status_code == 422


@pytest.mark.parametrize("numbers", [b"NaN", b"1e400", b"-1e400", b'"1"', b"true", b"null"])
def test_numbers_that_are_none_are_refused(client: Client, numbers: bytes) -> None:
    body = json.dumps(JOB).encode().replace(b'"gap_mm": 5', b'"gap_mm": ' + numbers)

    assert post(client, body).status_code == 422


@pytest.mark.parametrize(
    ("headers", "seen"), [({"Content_Type": "text/plain"}, "'text/plain'"), ({"Content_Encoding": "gzip"}, "'gzip'")]
)
def test_a_body_of_another_kind_is_refused(client: Client, headers: dict[str, str], seen: str) -> None:
    answer = post(client, JOB, **headers)

    assert answer.status_code == 415
    assert seen in answer.json["detail"]
    assert answer.json["allowed_types"] == ["application/json"]


def test_an_answer_that_cannot_be_given_is_refused_with_what_can(client: Client) -> None:
    answer = post(client, JOB, Accept="image/svg+xml")

    assert answer.status_code == 406
    assert answer.json["allowed_types"] == ["application/json", "application/zip"]


def test_a_job_larger_than_a_document_may_be_is_refused(planner: FakePlanner, tmp_path: Path) -> None:
    client = client_of(planner, tmp_path, Limits(document_bytes=100))

    answer = post(client, JOB)

    assert answer.status_code == 413
    assert answer.json["limit_bytes"] == 100
    assert answer.json["detail"].startswith("the sheet job is larger than 100 bytes")


def test_a_parameter_is_unknown_here(client: Client) -> None:
    answer = client.http.post(
        "/v1/sheets?movement=fernhollow-31", data=json.dumps(JOB), content_type="application/json"
    )

    assert answer.status_code == 400
    assert answer.json["parameter"] == "movement"


def test_only_posting_makes_sheets(client: Client) -> None:
    assert client.get("/v1/sheets").status_code == 405
