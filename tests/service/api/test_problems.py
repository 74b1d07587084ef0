"""Every kind of error the service answers with: its status, its words, its members."""

import re
from collections.abc import Callable
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from flask import Flask
from werkzeug.exceptions import BadGateway, BadRequest, HTTPException
from werkzeug.test import TestResponse

from layout.errors import Problem as Fault
from layout.errors import RulingError
from service.api.failures import answer_failures
from service.api.problems import PROBLEMS
from service.limits import Limits
from tests.service.api.conftest import ClientFor
from tests.service.fakes import BROKEN_TUNE, TUNE, Client, FakePlanner

PART = b'--xx\r\nContent-Disposition: form-data; name="%s"\r\n\r\n%s\r\n'
FORM = "multipart/form-data; boundary=xx"


class FailingPlanner(FakePlanner):
    """Fails as a program with a fault does, and tells a secret doing so."""

    def lay_out_discs(self, *_: Any, most_s: float | None = None) -> Any:
        raise ZeroDivisionError("the secret of line 7")


class ContradictedPlanner(FakePlanner):
    """Finds two rulings that contradict each other."""

    def lay_out_discs(self, *_: Any, most_s: float | None = None) -> Any:
        fault = Fault(pointer="/rulings/1", message="note 4 is placed and left out")
        raise RulingError(document="settings", problems=(fault,))


def refuse(answer: TestResponse, name: str, detail: str, **more: Any) -> None:
    """Assert that an answer is a problem of a kind, in these words, with these members."""
    kind = PROBLEMS[name]
    told = answer.json
    assert answer.content_type == "application/problem+json"
    assert told["type"] == f"/problems/{name}"
    assert (answer.status_code, told["status"], told["title"]) == (kind.status, kind.status, kind.title)
    assert re.search(detail, told["detail"]), told["detail"]
    assert {member: told.get(member) for member in more} == more
    assert answer.headers["Cache-Control"] == "no-store"
    standard = {"type", "title", "status", "detail", "instance"}
    # RFC 9457 section 3.2: a name begins with a letter, has letters, digits and underscores, three or more.
    assert all(re.fullmatch(r"[A-Za-z][A-Za-z0-9_]{2,}", member) for member in set(told) - standard)


def test_a_file_that_is_no_midi_file(client: Client) -> None:
    refuse(
        client.post_tune(BROKEN_TUNE),
        "midi-unreadable",
        "tune, byte 0: found 'not ', expected the header chunk; export it again",
        byte_offset=0,
        found="'not '",
        expected="the header chunk",
        remedy="export it again",
        instance="/v1/layouts",
    )


def test_a_settings_document_with_two_faults(client: Client) -> None:
    settings = '{"speed": {"mode": "faster"}, "colour": 1}'

    answer = client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": settings})

    refuse(answer, "document-invalid", "settings: /speed/mode: .*; and 1 more", document="settings", problem_count=2)
    assert [fault["pointer"] for fault in answer.json["invalid_params"]] == ["/speed/mode", "/colour"]
    assert "no such field" in answer.json["invalid_params"][1]["detail"]


@pytest.mark.parametrize(
    "text",
    [
        b"{",
        b"",
        b"\xff",
        b"[" * 900 + b"]" * 900,
        b"[" * 100_000,
        b'{"title": "\\ud800"}',
        b'{"\\ud800": 1}',
        b"[1e999]",
    ],
    ids=["cut off", "empty", "no text", "deep", "deeper", "half a letter", "half a letter as name", "no number"],
)
def test_a_document_that_is_no_sound_json(client: Client, text: bytes) -> None:
    answer = client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": (BytesIO(text), "s.json")})

    refuse(answer, "document-invalid", "settings: ")


def test_a_document_with_many_faults_is_told_in_short(client: Client) -> None:
    settings = "{" + ", ".join(f'"{"x" * 5000}{number}": 1' for number in range(100)) + "}"

    answer = client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": (BytesIO(settings.encode()), "s.json")})

    refuse(answer, "document-invalid", "; and 99 more", problem_count=100)
    assert len(answer.json["invalid_params"]) == 20
    assert len(answer.data) < 20 * 1200


def test_rulings_that_contradict_each_other(client_for: ClientFor) -> None:
    refuse(
        client_for(ContradictedPlanner()).post_tune(),
        "rulings-contradict",
        "settings: /rulings/1: note 4 is placed and left out",
        invalid_params=[{"pointer": "/rulings/1", "detail": "note 4 is placed and left out"}],
    )


def test_a_cutting_file_of_a_disc_that_is_not_good(faulty_client: Client) -> None:
    answer = faulty_client.post_tune(Accept="image/vnd.dxf")

    refuse(answer, "not-good-to-cut", r"disc.dxf is kept back: 1 error\(s\), the first: the web between track 3")
    assert [(f["code"], f["level"]) for f in answer.json["findings"]] == [
        ("web-too-thin", "error"),
        ("web-to-rim", "warning"),
    ]


@pytest.mark.parametrize("path", ["/v1/movements/lost-1", "/v1/layouts?movement=lost-1"])
def test_a_movement_that_does_not_ship(client: Client, path: str) -> None:
    answer = client.http.post(path, data=TUNE) if "?" in path else client.get(path)

    refuse(
        answer,
        "movement-unknown",
        "no movement has the id 'lost-1'; known: fernhollow-31",
        known_ids=["fernhollow-31", "mossbrook-67", "tarnlight-17"],
    )


@pytest.mark.parametrize("path", ["/v1/cutters/saw", "/v1/layouts?movement=fernhollow-31&cutter=saw"])
def test_a_cutter_that_does_not_ship(client: Client, path: str) -> None:
    answer = client.http.post(path, data=TUNE) if "?" in path else client.get(path)

    refuse(answer, "cutter-unknown", "no cutter has the id 'saw'", known_ids=["fibre-laser", "turn-press"])


@pytest.mark.parametrize("rest", ["0123456789abcdef", "0123456789abcdef/disc.dxf", "xyz", "..%2f..%2fetc", "0" * 500])
def test_a_layout_that_is_not_kept(client: Client, rest: str) -> None:
    refuse(client.get(f"/v1/layouts/{rest}"), "(layout|route)-unknown".replace("(layout|route)", _kind_of(rest)), ".")


def _kind_of(rest: str) -> str:
    return "route" if "%2f" in rest else "layout"


def test_a_layout_that_is_not_kept_can_be_posted_again(client: Client) -> None:
    refuse(
        client.get("/v1/layouts/0123456789abcdef"), "layout-unknown", "under '0123456789abcdef'; post the tune again"
    )


def test_an_address_where_nothing_is(client: Client) -> None:
    refuse(client.get("/v2/d%C3%BCnn"), "route-unknown", "there is nothing at /v2/dünn", instance="/v2/d%C3%BCnn")


def test_a_file_no_layout_has(client: Client) -> None:
    path = client.post_tune().headers["Location"]

    refuse(client.get(f"{path}/disc.pdf"), "route-unknown", "no file called 'disc.pdf'; it has disc.dxf, record.dxf")


def test_a_method_an_address_does_not_take(client: Client) -> None:
    answer = client.http.delete("/v1/movements")

    refuse(answer, "method-not-allowed", "DELETE is not taken here; taken are GET, HEAD, OPTIONS")
    assert answer.headers["Allow"] == "GET, HEAD, OPTIONS"


def test_an_answer_in_a_form_there_is_not(client: Client, planner: FakePlanner) -> None:
    refuse(
        client.post_tune(Accept="application/pdf"),
        "not-acceptable",
        "Accept is 'application/pdf'; the answer can be application/json, image/svg\\+xml, image/vnd.dxf, ",
        allowed_types=["application/json", "image/svg+xml", "image/vnd.dxf", "application/zip"],
    )
    assert planner.laid_out_count == 0


def test_a_body_over_the_limit(client: Client) -> None:
    # 2 MiB = 2,097,152 bytes
    refuse(
        client.post_tune(TUNE + bytes(2_097_152)), "upload-too-large", "larger than 2097152 bytes", limit_bytes=2097152
    )


def test_a_body_of_just_the_limit_is_taken(client: Client) -> None:
    assert client.post_tune(TUNE + bytes(2_097_152 - len(TUNE))).status_code == 201


def test_a_body_over_the_limit_that_does_not_tell_its_length(client: Client) -> None:
    answer = client.http.post(
        "/v1/layouts?movement=fernhollow-31",
        input_stream=BytesIO(TUNE + bytes(2_097_152)),
        content_type="audio/midi",
        environ_overrides={"wsgi.input_terminated": True, "CONTENT_LENGTH": ""},
    )

    refuse(answer, "upload-too-large", "larger than 2097152 bytes")


def test_a_multipart_body_over_the_limit(client: Client) -> None:
    body = PART % (b"tune", TUNE + bytes(1_500_000)) + PART % (b"settings", bytes(700_000)) + b"--xx--\r\n"

    answer = client.post_tune(body, media_type=FORM)

    refuse(answer, "upload-too-large", "the request body is larger than 2097152 bytes")


def test_a_document_over_its_limit(client_for: ClientFor) -> None:
    client = client_for(FakePlanner(), Limits(document_bytes=100))

    answer = client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": " " * 101})

    refuse(answer, "upload-too-large", "the part settings is larger than 100 bytes", limit_bytes=100)


@pytest.mark.parametrize("media_type", ["text/plain", "application/x-www-form-urlencoded", "audio/midi2", "nonsense"])
def test_a_body_of_a_media_type_that_is_not_taken(client: Client, media_type: str) -> None:
    answer = client.post_tune(media_type=media_type)

    refuse(answer, "media-type-unsupported", f"'{media_type}' is not taken; taken are audio/midi")
    assert answer.headers["Accept-Post"].startswith("audio/midi, ")
    assert answer.json["allowed_types"][-1] == "multipart/form-data"


def test_a_packed_body(client: Client) -> None:
    answer = client.post_tune(Content_Encoding="gzip")

    refuse(answer, "media-type-unsupported", "the body is packed \\('gzip'\\); send it as it is")
    assert answer.headers["Accept-Encoding"] == "identity"


@pytest.mark.parametrize("post", [lambda c: c.post_tune(b""), lambda c: c.post_parts({"settings": "{}"})])
def test_a_request_without_a_tune(client: Client, post: Callable[[Client], TestResponse]) -> None:
    refuse(post(client), "tune-missing", "its body, or the part tune, is empty")


def test_a_request_that_names_no_movement(client: Client) -> None:
    refuse(
        client.post_tune(query=""),
        "parameter-missing",
        r"add \?movement=ID, one of fernhollow-31",
        parameter="movement",
    )


@pytest.mark.parametrize(
    ("query", "parameter", "detail"),
    [
        ("movement=fernhollow-31&despite_finding=x", "despite_finding", "no parameter called 'despite_finding'"),
        ("movement=fernhollow-31&movement=tarnlight-17", "movement", "comes 2 times; give it once"),
        ("movement=fernhollow-31&despite_findings=", "despite_findings", "is empty; say in 1 to 200 characters"),
        ("movement=fernhollow-31&despite_findings=%20%20", "despite_findings", "is empty"),
        ("movement=fernhollow-31&despite_findings=" + "x" * 201, "despite_findings", "has 201 characters; at most 200"),
        ("movement=fernhollow-31&despite_findings=a%0A0%0ASECTION", "despite_findings", "holds a line break"),
    ],
)
def test_a_parameter_that_cannot_be_used(client: Client, query: str, parameter: str, detail: str) -> None:
    refuse(client.post_tune(query=query), "parameter-invalid", detail, parameter=parameter)


@pytest.mark.parametrize("file", ["", "/disc.dxf"])
def test_a_parameter_that_a_kept_layout_does_not_take(client: Client, file: str) -> None:
    path = client.post_tune().headers["Location"] + file

    refuse(client.get(f"{path}?movement=tarnlight-17"), "parameter-invalid", "no parameter called 'movement' here")


@pytest.mark.parametrize(
    ("body", "parameter", "detail"),
    [
        (PART % (b"tune", TUNE) * 2, "tune", "the part tune comes twice"),
        (PART % (b"song", TUNE), "song", "no part called 'song'; the parts are tune, settings, movement, cutter"),
        (PART % (b"tune", TUNE) + PART % (b"movement", b"{}"), "movement", "a movement is given twice"),
    ],
)
def test_a_part_that_cannot_be_used(client: Client, body: bytes, parameter: str, detail: str) -> None:
    answer = client.post_tune(body + b"--xx--\r\n", media_type=FORM)

    refuse(answer, "parameter-invalid", detail, parameter=parameter)


@pytest.mark.parametrize(
    ("body", "media_type", "detail"),
    [
        (PART % (b"tune", TUNE) + b"--xx--\r\n", "multipart/form-data", "states no boundary"),
        (PART % (b"tune", TUNE), FORM, "does not end with its boundary"),
        (b"hello", FORM, "does not end with its boundary"),
        (b"--xx\r\nContent-Type: audio/midi\r\n\r\nMThd\r\n--xx--\r\n", FORM, "a part lacks its name"),
        (b"--xx\r\nContent-Disposition: \xff\r\n\r\nMThd\r\n--xx--\r\n", FORM, "cannot be taken apart"),
    ],
)
def test_a_multipart_body_that_cannot_be_taken_apart(client: Client, body: bytes, media_type: str, detail: str) -> None:
    refuse(client.post_tune(body, media_type=media_type), "multipart-unreadable", detail)


def test_a_multipart_body_of_too_many_parts(client_for: ClientFor) -> None:
    client = client_for(FakePlanner(), Limits(form_parts=1))
    body = PART % (b"tune", TUNE) + PART % (b"settings", b"{}") + b"--xx--\r\n"

    refuse(client.post_tune(body, media_type=FORM), "multipart-unreadable", "it has too many parts")


def test_a_body_that_ends_too_soon(client: Client) -> None:
    answer = client.http.post(
        "/v1/layouts?movement=fernhollow-31",
        input_stream=BytesIO(TUNE),
        content_type="audio/midi",
        environ_overrides={"CONTENT_LENGTH": str(len(TUNE) + 10), "wsgi.input_terminated": True},
    )

    # "MThd a tune" has 11 bytes, 10 more were announced
    refuse(answer, "request-malformed", "the body ended after 11 bytes, but Content-Length says 21; send it again")


def test_a_fault_of_the_service_is_logged_and_not_told(client_for: ClientFor, caplog: pytest.LogCaptureFixture) -> None:
    answer = client_for(FailingPlanner()).post_tune()

    refuse(answer, "internal-error", "the service failed; its log holds the trace")
    assert b"secret" not in answer.data
    assert "the secret of line 7" in caplog.text


def test_each_kind_of_problem_explains_itself_at_its_type(client: Client) -> None:
    listed = client.get("/problems").json["problems"]

    told = [client.get(kind["type"]).json for kind in listed]

    assert told == listed
    assert [kind["type"] for kind in listed] == [f"/problems/{name}" for name in PROBLEMS]
    assert all(kind["what_to_do"].endswith(".") for kind in listed)


def test_every_kind_of_problem_has_a_test() -> None:
    tests = "".join(path.read_text() for path in Path(__file__).parents[1].glob("**/test_*.py"))

    assert [name for name in PROBLEMS if f'"{name}"' not in tests] == []


def test_a_page_of_no_kind_of_problem(client: Client) -> None:
    refuse(client.get("/problems/unlucky"), "route-unknown", "no kind of problem is called 'unlucky'")


@pytest.mark.parametrize(
    ("refusal", "status", "name", "detail"),
    [
        (BadRequest("the head of a part is broken"), 400, "request-malformed", "the head of a part is broken"),
        (BadGateway("geheim"), 500, "internal-error", "the service failed; its log holds the trace"),
    ],
)
def test_what_a_library_refuses_is_told_in_words_and_what_it_fails_in_is_the_service_s_fault(
    refusal: HTTPException, status: int, name: str, detail: str
) -> None:
    app = Flask("odd", static_folder=None)
    answer_failures(app, Limits())

    @app.get("/")
    def refuse() -> None:
        raise refusal

    answer = app.test_client().get("/")

    told: Any = answer.json
    assert (answer.status_code, told["type"], told["detail"]) == (status, f"/problems/{name}", detail)
