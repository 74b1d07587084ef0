"""POST /v1/sheets as someone sends who means no good: only documented problems come back, and soon."""

import json
import time
from typing import Any

import pytest
from werkzeug.test import TestResponse

from layout.documents.sheets import LIMITS
from service.api.problems import PROBLEMS
from service.limits import Limits
from tests.layout.sheets.drawn import RIM_MM, disc_dxf
from tests.service.fakes import Client

FORM = "multipart/form-data; boundary=x"
DISC = disc_dxf()
JOB: dict[str, Any] = {
    "format": "discwright-sheets/1",
    "title": "Spring batch",
    "gap_mm": 5,
    "margin_mm": 10,
    "stock": [{"id": "full", "width_mm": 800, "height_mm": 300}],
    "discs": [{"id": "dance", "diameter_mm": RIM_MM, "quantity": 2}],
}
SOON_S = 30.0  # of processor time; the largest honest jobs take a quarter of a minute


NAMED = b'--x\r\nContent-Disposition: form-data; name="job"'


def part(name: str, content: bytes, head: bytes = b"") -> bytes:
    return b'--x\r\nContent-Disposition: form-data; name="%s"%s\r\n\r\n%s\r\n' % (name.encode(), head, content)


def form(*drawings: tuple[str, bytes], job: Any = JOB) -> bytes:
    parts = [part("job", json.dumps(job).encode()), *(part(name, content) for name, content in drawings)]
    return b"".join(parts) + b"--x--\r\n"


def post(client: Client, body: bytes, media_type: str | None = FORM) -> TestResponse:
    began = time.process_time()
    answer = client.http.post("/v1/sheets", data=body, content_type=media_type)
    assert time.process_time() - began < SOON_S
    return answer


def refused(answer: TestResponse) -> dict[str, Any]:
    """The problem of an answer, which must be one that the service documents, and no failure of its own."""
    assert answer.content_type == "application/problem+json", answer.data[:200]
    told: dict[str, Any] = answer.get_json()
    kind = PROBLEMS[told["type"].removeprefix("/problems/")]
    assert (answer.status_code, told["status"]) == (kind.status, kind.status)
    assert answer.status_code < 500, told
    assert told["detail"].strip() == told["detail"] != ""
    assert not told["detail"].endswith((":", ";", ","))
    assert len(answer.data) < 20_000
    return told


@pytest.mark.parametrize(
    "body",
    [
        b"",
        b"--x",
        b"--x--",
        b"--x\r\n",
        b"\r\n" * 1000,
        b"--x\r\n\r\n\r\n--x--",
        b"--x\r\nContent-Disposition: form-data\r\n\r\nA\r\n--x--\r\n",
        b"--x\r\nContent-Disposition: form-data; name=\r\n\r\nA\r\n--x--\r\n",
        b'--x\r\nContent-Disposition: attachment; name="job"\r\n\r\n{}\r\n--x--\r\n',
        b"--x\r\nContent-Disposition: form-data; name*=utf-16''job\r\n\r\n{}\r\n--x--\r\n",
        b"--x\r\nContent-Disposition: form-data; name*=nonsense''%ff\r\n\r\n{}\r\n--x--\r\n",
        NAMED + b"\r\nContent-Type: text/plain; charset=rot13\r\n\r\n{\r\n--x--\r\n",
        NAMED + b"\r\nContent-Transfer-Encoding: base64\r\n\r\ne30=\r\n--x--\r\n",
        b"--x\r\n" + b"A: b\r\n" * 5000 + b'Content-Disposition: form-data; name="job"\r\n\r\n{}\r\n--x--\r\n',
        b'--x\r\nContent-Disposition: form-data; name="job"' + b"; a=b" * 20_000 + b"\r\n\r\n{}\r\n--x--\r\n",
        b'--x\r\nContent-Disposition: form-data; name="\xff\xfe"\r\n\r\n{}\r\n--x--\r\n',
        b'--x\r\nContent-Disposition: form-data; name="job\x00"\r\n\r\n{}\r\n--x--\r\n',
        form()[:-8],
        form(("drawing-dance", DISC))[:-3000],
    ],
    ids=range(19),
)
def test_bodies_that_are_no_form_are_problems(client: Client, body: bytes) -> None:
    refused(post(client, body))


@pytest.mark.parametrize("boundary", ["", "; boundary=", '; boundary=""', "; boundary=" + "y" * 5000, "; boundary=ü"])
def test_a_boundary_that_is_none_is_a_problem(client: Client, boundary: str) -> None:
    assert refused(post(client, form(), f"multipart/form-data{boundary}"))["type"] == "/problems/multipart-unreadable"


@pytest.mark.parametrize(
    "name",
    [
        *("drawing-../../etc/passwd", "drawing-..\\..\\x", "drawing-dance/..", "drawing-/dance", "drawing-dance\n"),
        *("drawing-ID", "drawing-", "drawing", "Drawing-dance", "drawing-DANCE", "drawing-dance.dxf", "drawing-d a"),
        *("job/../job", "jobs", " job", "drawing-" + "a" * 65, "drawing-" + "a" * 100_000, "drawing-ü", "%00", ""),
    ],
    ids=lambda name: name[:12],
)
def test_names_of_parts_that_are_none_are_refused_in_short(client: Client, name: str) -> None:
    told = refused(post(client, form((name, DISC))))

    assert told["type"] in {"/problems/parameter-invalid", "/problems/multipart-unreadable"}
    assert len(told["detail"]) < 200


def test_a_file_name_is_never_looked_at(client: Client) -> None:
    body = form()[:-7] + part("drawing-dance", DISC, b'; filename="../../../etc/passwd"') + b"--x--\r\n"

    assert post(client, body).status_code == 200


@pytest.mark.parametrize("count", [LIMITS.disc_kinds + 1, 1000, 10_000])
def test_more_parts_than_a_job_can_have_are_refused_at_once(client: Client, count: int) -> None:
    drawings = [(f"drawing-d{number}", b"0") for number in range(count)]

    assert refused(post(client, form(*drawings)))["detail"].endswith("it has too many parts")


def test_as_many_drawings_as_a_job_can_have_are_taken(client: Client) -> None:
    discs = [{"id": f"d{number}", "diameter_mm": RIM_MM, "quantity": 1} for number in range(LIMITS.disc_kinds)]
    stock = [{"id": "full", "width_mm": 2000, "height_mm": 1500, "quantity": 2}]

    answer = post(
        client, form(*((f"drawing-{disc['id']}", DISC) for disc in discs), job=JOB | {"discs": discs, "stock": stock})
    )

    assert answer.status_code == 200


NUMBERS = ["1e308", "-1e308", "1e999", "nan", "inf", "1" + "0" * 400, "1e-400", "0x10", "", "A", "1_0", "\u0661"]


@pytest.mark.parametrize("number", NUMBERS, ids=lambda text: text[:6])
@pytest.mark.parametrize("code", [b" 10\n", b" 20\n", b" 42\n", b" 40\n", b" 90\n", b" 70\n", b" 62\n"])
def test_a_drawing_with_numbers_that_are_none_is_refused_or_read(client: Client, number: str, code: bytes) -> None:
    begin = DISC.index(b"ENTITIES")
    place = DISC.index(code, begin)
    at = place + len(code)
    dxf = DISC[:at] + number.encode() + DISC[DISC.index(b"\n", at) :]

    answer = post(client, form(("drawing-dance", dxf)))

    if answer.status_code != 200:
        assert refused(answer)["detail"].startswith("drawing of dance: ")


@pytest.mark.parametrize(
    "entity",
    [
        ("CIRCLE", [(10, "1e308"), (20, "1e308"), (40, "1e308")]),
        ("CIRCLE", [(10, "0"), (20, "0"), (40, "1e-320")]),
        ("ARC", [(10, "0"), (20, "0"), (40, "50"), (50, "1e308"), (51, "-1e308")]),
        ("ARC", [(10, "0"), (20, "0"), (40, "50"), (50, "nan"), (51, "inf")]),
        ("LINE", [(10, "-1e308"), (20, "0"), (11, "1e308"), (21, "0")]),
        ("POINT", [(10, "1e308"), (20, "-1e308")]),
        ("POINT", [(10, "0"), (20, "0"), (30, "1e308"), (210, "1e308"), (220, "1e308"), (230, "1e308")]),
        ("LWPOLYLINE", [(90, "2000000000"), (70, "1"), (10, "0"), (20, "0")]),
        ("LWPOLYLINE", [(90, "2"), (70, "1"), (10, "0"), (20, "0"), (42, "1e308"), (10, "1"), (20, "1")]),
        ("LWPOLYLINE", [(90, "2"), (70, "1"), (10, "0"), (20, "0"), (42, "999999"), (10, "0"), (20, "0")]),
        ("POLYLINE", [(66, "1"), (70, "1")]),
        ("INSERT", [(2, "*Model_Space"), (10, "0"), (20, "0"), (70, "30000"), (71, "30000")]),
        ("SPLINE", [(71, "3"), (72, "2000000000"), (73, "2000000000")]),
        ("TEXT", [(10, "0"), (20, "0"), (40, "1"), (1, "x" * 100_000)]),
        ("HATCH", []),
    ],
    ids=lambda entity: entity[0],
)
def test_an_entity_that_means_no_good_is_refused_or_placed(
    client: Client, entity: tuple[str, list[tuple[int, str]]]
) -> None:
    kind, groups = entity
    written = f"  0\n{kind}\n  5\nFFFF\n100\nAcDbEntity\n  8\nSLITS\n" + "".join(
        f"{code:3}\n{value}\n" for code, value in groups
    )
    at = DISC.index(b"  0\n", DISC.index(b"ENTITIES"))
    dxf = DISC[:at] + written.encode() + DISC[at:]

    answer = post(client, form(("drawing-dance", dxf)))

    if answer.status_code != 200:
        assert refused(answer)["detail"].startswith("drawing of dance: ")


@pytest.mark.parametrize(
    "changes",
    [
        {"stock": []},
        {"stock": None},
        {"stock": {}},
        {"stock": [[]] * 40},
        {"stock": [{"id": "a", "width_mm": 1e308, "height_mm": 1e308}]},
        {"stock": [{"id": "a", "width_mm": 800, "height_mm": 300, "quantity": 10**400}]},
        {"stock": [{"id": "a", "outline_mm": [[0, 0]] * 100_000}]},
        {"stock": [{"id": "a", "outline_mm": [[1e308, 0], [0, 1e308], [-1e308, 0]]}]},
        {"stock": [{"id": "a", "width_mm": 800, "height_mm": 300, "clamps": [{}] * 10_000}]},
        {"discs": [{"id": "dance", "diameter_mm": 1e308, "quantity": 1}]},
        {"discs": [{"id": "dance", "diameter_mm": 0.001, "quantity": 2000}]},
        {"discs": [{"id": "dance", "diameter_mm": 9, "quantity": 10**30}]},
        {"discs": [{"id": f"d{number}", "diameter_mm": 9, "quantity": 1} for number in range(10_000)]},
        {"discs": [{"id": "../x", "diameter_mm": 9, "quantity": 1}]},
        {"gap_mm": -0.1},
        {"gap_mm": 1e308},
        {"margin_mm": {"value": 1e308, "plus_minus": 1e308}},
        {"title": "x" * 1_000_000},
        {"title": ""},
        {"layers": {f"L{number}": {"name": "A", "colour": 1} for number in range(10_000)}},
        {"layers": {"RIM": {"name": "../RIM", "colour": 1}}},
        {"layers": {"RIM": {"name": "CLAMPS", "colour": 1}}},
        {"labels": "yes"},
        {"x" * 100_000: 1},
    ],
    ids=range(24),
)
def test_jobs_that_cannot_be_are_told_by_their_places(client: Client, changes: dict[str, Any]) -> None:
    for body, media_type in ((form(job=JOB | changes), FORM), (json.dumps(JOB | changes).encode(), "application/json")):
        told = refused(post(client, body, media_type))

        assert told["type"] == "/problems/document-invalid"
        assert told["invalid_params"]


def test_nested_and_endless_json_is_a_problem(client: Client) -> None:
    for body in (b"[" * 100_000, b'{"a":' * 100_000, b'"' + b"\\" * 99_999, b"9" * 1_000_000, b"\x00" * 1000):
        refused(post(client, body, "application/json"))


@pytest.mark.parametrize(
    "media_type", [None, "", "text/plain", "application/jsonx", "a/b" * 2000, "multipart/mixed; boundary=x"]
)
def test_a_body_of_another_kind_or_none_is_refused_with_what_is_taken(client: Client, media_type: str | None) -> None:
    told = refused(post(client, json.dumps(JOB).encode(), media_type))

    assert told["type"] == "/problems/media-type-unsupported"
    assert told["allowed_types"] == ["application/json", "multipart/form-data"]
    if not media_type:
        assert told["detail"].startswith("a body without a media type is not taken; a sheet job is sent as")


@pytest.mark.parametrize("query", ["foo=1", "foo", "=1", "movement=a&movement=b", "a" * 5000, "%00=%ff"])
def test_a_query_is_told_that_none_is_taken(client: Client, query: str) -> None:
    answer = client.http.post(f"/v1/sheets?{query}", data=json.dumps(JOB), content_type="application/json")

    told = refused(answer)
    assert told["detail"].endswith("here; none are taken")
    assert len(told["detail"]) < 200


def test_a_body_over_its_limit_is_told_by_the_limit_of_its_kind(client: Client) -> None:
    limits = {limit["name"]: limit["value"] for limit in client.get("/v1/limits").json["limits"]}  # type: ignore[index]
    for media_type, name in ((FORM, "sheet_form_bytes"), ("application/json", "document_bytes")):
        told = refused(post(client, b" " * (limits[name] + 1), media_type))

        assert (told["type"], told["limit_bytes"]) == ("/problems/upload-too-large", limits[name])


def test_every_limit_of_a_sheet_job_is_told(client: Client) -> None:
    told = {limit["name"] for limit in client.get("/v1/limits").json["limits"]}  # type: ignore[index]

    assert {f"sheet_job_{name}" for name in LIMITS.__dataclass_fields__} <= told
    assert {"sheet_form_bytes", "sheet_job_least_disc_mm"} <= told


def test_a_job_in_a_form_may_be_no_longer_than_one_alone(client: Client) -> None:
    job = {**JOB, "title": "x" * Limits().document_bytes}

    told = refused(post(client, form(("drawing-dance", DISC), job=job)))

    assert told["type"] == "/problems/upload-too-large"
    assert "the sheet job" in told["detail"]
