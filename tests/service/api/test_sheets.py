import io
import json
import zipfile
from typing import Any

import ezdxf
import pytest

from service.limits import Limits
from tests.layout.sheets.drawn import FINGERPRINT, RIM_MM, disc_dxf, entities_of, record_dxf
from tests.service.api.conftest import ClientFor
from tests.service.fakes import Client, FakePlanner

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
    assert "Accept" in answer.headers["Vary"]
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
    assert answer.json["allowed_types"] == ["application/json", "multipart/form-data"]


def test_an_answer_that_cannot_be_given_is_refused_with_what_can(client: Client) -> None:
    answer = post(client, JOB, Accept="image/svg+xml")

    assert answer.status_code == 406
    assert answer.json["allowed_types"] == ["application/json", "application/zip"]


def test_a_job_larger_than_a_document_may_be_is_refused(planner: FakePlanner, client_for: ClientFor) -> None:
    client = client_for(planner, Limits(document_bytes=100))

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


FORM = "multipart/form-data; boundary=x"
DISC = disc_dxf()
DRAWN_JOB = JOB | {"discs": [{"id": "dance", "diameter_mm": RIM_MM, "quantity": 4}]}


def post_form(client: Client, parts: list[tuple[str, bytes]], **headers: str) -> Any:
    sent = {name.replace("_", "-"): value for name, value in headers.items()}
    return client.http.post("/v1/sheets", data=form_of(parts), content_type=FORM, headers=sent)


def form_of(parts: list[tuple[str, bytes]]) -> bytes:
    """A multipart body as RFC 7578 has it."""
    head = b'--x\r\nContent-Disposition: form-data; name="%s"; filename="disc.dxf"\r\n\r\n'
    return b"".join(head % name.encode() + content + b"\r\n" for name, content in parts) + b"--x--\r\n"


def job_part(job: Any = DRAWN_JOB) -> tuple[str, bytes]:
    return "job", json.dumps(job).encode()


def test_a_form_brings_the_drawings_of_discs(client: Client) -> None:
    answer = post_form(client, [job_part(), ("drawing-dance", DISC)], Accept="application/zip")

    assert answer.status_code == 200
    archive = zipfile.ZipFile(io.BytesIO(answer.data))
    drawn = entities_of(archive.read("sheet-1.dxf"))
    assert sum(layer == "RIM" for layer, *_ in drawn) == 3
    assert sum(layer == "SLITS" for layer, *_ in drawn) == 3 * sum(layer == "SLITS" for layer, *_ in entities_of(DISC))
    plan = json.loads(archive.read("sheets.json"))
    assert plan["discs"][0]["drawing"] == {"title": "Spring dance", "fingerprint": FINGERPRINT}


def test_a_form_without_drawings_is_the_job_alone(client: Client) -> None:
    assert post_form(client, [job_part(JOB)]).json == post(client, JOB).json


@pytest.mark.parametrize(
    ("dxf", "detail"),
    [
        (record_dxf(), "drawing of dance: (whole document): this is a record, for reading, never for cutting"),
        (
            disc_dxf(not_good="a gift"),
            "drawing of dance: (whole document): the file itself says NOT GOOD TO CUT: a gift",
        ),
        (b"\x00\xff" * 999, "drawing of dance: (whole document): not a DXF file that can be read"),
        (b"", "drawing of dance: (whole document): the file is empty; give a DXF file"),
        (b"0" * (9 * 2**19), "sheet job: /discs: the drawings are 4.5 MiB, 4 are allowed; make several jobs of it"),
    ],
    ids=["record", "not good", "no drawing", "empty", "large"],
)
def test_a_drawing_that_cannot_be_placed_is_a_problem_that_names_its_disc(
    client: Client, dxf: bytes, detail: str
) -> None:
    answer = post_form(client, [job_part(), ("drawing-dance", dxf)])

    assert answer.status_code == 422
    assert answer.json["type"] == "/problems/document-invalid"
    assert answer.json["detail"].startswith(detail)


def test_a_drawing_of_a_disc_that_the_job_does_not_have_is_a_problem(client: Client) -> None:
    answer = post_form(client, [job_part(), ("drawing-waltz", DISC)])

    assert answer.status_code == 422
    assert answer.json["invalid_params"] == [
        {
            "pointer": "/discs",
            "detail": "a drawing is given for 'waltz', which is none of the job's discs; they are dance",
        }
    ]


def test_a_form_without_a_job_is_a_problem(client: Client) -> None:
    answer = post_form(client, [("drawing-dance", DISC)])

    assert answer.status_code == 400
    assert answer.json["parameter"] == "job"
    assert answer.json["detail"] == (
        "the form has no part job; it is the sheet job, beside parts drawing-ID for the drawings of its discs"
    )


@pytest.mark.parametrize("name", ["cutter", "drawing", "drawing-", "drawing-Dance", "drawing-../x"])
def test_a_part_of_another_name_is_a_problem(client: Client, name: str) -> None:
    answer = post_form(client, [job_part(), (name, DISC)])

    assert answer.status_code == 400
    assert answer.json["detail"] == f"there is no part called {name!r}; the parts are job, drawing-ID"


def test_a_part_that_comes_twice_is_a_problem(client: Client) -> None:
    answer = post_form(client, [job_part(), ("drawing-dance", DISC), ("drawing-dance", DISC)])

    assert answer.status_code == 400
    assert answer.json["detail"] == "the part drawing-dance comes twice; send it once"


def test_a_form_that_is_none_is_a_problem(client: Client) -> None:
    answer = client.http.post("/v1/sheets", data=b"--y", content_type=FORM)

    assert answer.status_code == 400
    assert answer.json["type"] == "/problems/multipart-unreadable"


def test_a_form_may_be_larger_than_other_bodies_up_to_its_own_limit(
    planner: FakePlanner, client_for: ClientFor
) -> None:
    client = client_for(planner, Limits(upload_bytes=1000, sheet_form_bytes=100_000))

    assert len(DISC) > 1000
    assert post_form(client, [job_part(), ("drawing-dance", DISC)]).status_code == 200
    answer = post_form(client, [job_part(), ("drawing-dance", DISC + b" " * 100_000)])
    assert answer.status_code == 413
    assert answer.json["limit_bytes"] == 100_000
    assert answer.json["detail"] == "the form with the sheet job and its drawings is larger than 100000 bytes"


def test_the_limits_of_sheet_jobs_are_told(client: Client) -> None:
    told = {limit["name"]: limit for limit in client.get("/v1/limits").json["limits"]}

    assert told["sheet_job_drawing_mib"]["value"] == 4
    assert told["sheet_job_discs"]["value"] == 2000
    assert told["sheet_form_bytes"]["unit"] == "bytes"
