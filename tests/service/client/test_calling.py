"""How the client sends: again where that helps and is safe, never where it is not; the generated part is up to date."""

import io
import json
import re
import sys
import threading
from collections.abc import Iterator
from dataclasses import dataclass, field
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from pathlib import Path
from typing import Any

import pytest
import urllib3

from service.client import generate
from service.client.calling import Answer, AwayError, Caller, Fields, Form, ProblemError, once, place
from service.client.client import Client, WaitedTooLongError
from service.describe import document_here

HERE = Path(generate.__file__).parent
DOCUMENT = json.loads(document_here())


@dataclass
class Script:
    """What a server answers in turn; None: it hangs up. The last is repeated."""

    answers: list[tuple[int, dict[str, str], Any] | None] = field(default_factory=list)
    seen: list[tuple[str, str, dict[str, str], bytes]] = field(default_factory=list)


@pytest.fixture
def script() -> Script:
    return Script()


@pytest.fixture
def url(script: Script) -> Iterator[str]:
    class Handler(BaseHTTPRequestHandler):
        def answer(self) -> None:
            body = self.rfile.read(int(self.headers.get("Content-Length", 0)))
            headers = {name.lower(): value for name, value in self.headers.items()}
            script.seen.append((self.command, self.path, headers, body))
            answer = script.answers.pop(0) if len(script.answers) > 1 else script.answers[0]
            if answer is None:
                self.connection.close()
                return
            content = json.dumps(answer[2]).encode()
            self.send_response(answer[0])
            for name, value in {**answer[1], "Content-Length": str(len(content))}.items():
                self.send_header(name, value)
            self.end_headers()
            self.wfile.write(content)

        do_GET = do_POST = do_DELETE = answer

        def log_message(self, format: str, *arguments: Any) -> None:
            """Say nothing."""

    server = ThreadingHTTPServer(("127.0.0.1", 0), Handler)
    thread = threading.Thread(target=server.serve_forever)
    thread.start()
    yield f"http://127.0.0.1:{server.server_address[1]}"
    server.shutdown()
    thread.join()
    server.server_close()


Scripted = tuple[int, dict[str, str], Any]
BUSY: Scripted = (503, {"Retry-After": "7"}, {"type": "/problems/store-busy", "try_again": True})
FAILED: Scripted = (500, {}, {"type": "/problems/internal-error", "try_again": True})
GONE: Scripted = (404, {}, {"type": "/problems/order-unknown", "try_again": False, "detail": "no such order"})
GOOD: Scripted = (200, {}, {"well": True})


def caller_of(url: str, waits: list[float], patience_s: float = 60.0) -> Caller:
    return Caller(url, "dw_secret", patience_s=patience_s, sleep=waits.append)


def test_the_generated_part_is_that_of_the_document_of_this_version() -> None:
    made = {HERE / "shapes" / name: text for name, text in generate.shapes_of(DOCUMENT).items()}
    made |= {HERE / "operations" / name: text for name, text in generate.operations_of(DOCUMENT).items()}

    assert {path: path.read_text() for path in made} == made, (
        "make it anew:  python -m service.describe | python -m service.client.generate -"
    )
    assert {path for package in ("shapes", "operations") for path in (HERE / package).glob("*.py")} == made.keys()


def test_there_is_a_method_for_every_operation() -> None:
    names = [one["operationId"] for path in DOCUMENT["paths"].values() for one in path.values()]

    written = "".join(path.read_text() for path in (HERE / "operations").glob("*.py"))

    assert [name for name in names if f"    def {name}(" not in written] == []


def test_what_may_do_better_later_is_sent_again_after_the_time_told(script: Script, url: str) -> None:
    script.answers = [BUSY, BUSY, GOOD]
    waits: list[float] = []

    assert caller_of(url, waits).json("GET", "/v1/orders") == {"well": True}

    assert len(script.seen) == 3
    assert all(7.0 <= wait_s <= 7.0 * 1.2 for wait_s in waits)


def test_the_same_key_goes_with_every_try_of_what_is_done_once(script: Script, url: str) -> None:
    script.answers = [FAILED, None, GOOD]

    caller_of(url, []).send("POST", "/v1/orders", body=Form({"order": {}}), headers=once())

    keys = {headers["idempotency-key"] for _, _, headers, _ in script.seen}
    bodies = {body for *_, body in script.seen}
    assert (len(script.seen), len(keys), len(bodies)) == (3, 1, 1)


def test_a_post_that_may_have_done_its_work_is_not_sent_again(script: Script, url: str) -> None:
    script.answers = [FAILED, GOOD]

    with pytest.raises(ProblemError, match="500 internal-error"):
        caller_of(url, []).send("POST", "/v1/hooks", body={})

    assert len(script.seen) == 1


def test_a_refusal_that_will_not_do_better_is_told_at_once(script: Script, url: str) -> None:
    script.answers = [GONE]

    with pytest.raises(ProblemError, match=r"404 order-unknown: no such order \(no request id\)"):
        caller_of(url, []).send("GET", "/v1/orders/1")

    assert len(script.seen) == 1


def test_patience_ends(script: Script, url: str) -> None:
    script.answers = [BUSY]

    with pytest.raises(ProblemError, match="503 store-busy"):
        caller_of(url, [], patience_s=1.0).send("GET", "/v1/orders")

    script.answers = [None]
    with pytest.raises(AwayError, match="GET http"):
        caller_of(url, [], patience_s=0.1).send("GET", "/v1/orders")


def test_the_key_is_shown_to_the_service_alone(script: Script, url: str) -> None:
    script.answers = [GOOD]
    elsewhere = Caller("https://discs.example", "dw_secret", sleep=lambda _: None)

    elsewhere.send("GET", f"{url}/a")
    caller_of(url, []).send("GET", "/b")

    shown = [headers.get("authorization") for _, _, headers, _ in script.seen]
    assert shown == [None, "Bearer dw_secret"]


def test_values_are_quoted_in_paths_and_queries(script: Script, url: str) -> None:
    script.answers = [GOOD]

    caller_of(url, []).send(
        "GET", place("/v1/{name}", {"name": "a/b ?"}), query={"test": True, "after": None, "q": "ä&"}
    )

    assert script.seen[0][1] == "/v1/a%2Fb%20%3F?test=true&q=%C3%A4%26"


def test_the_client_imports_nothing_else_of_this_program() -> None:
    lines = [line for path in HERE.glob("*.py") for line in path.read_text().splitlines()]
    imported = {line.split()[1] for line in lines if re.match(r"(from|import) (service|layout)\b", line)}

    assert {name for name in imported if not name.startswith("service.client")} == set()
    assert "service.client.calling" in imported


def test_fields_are_sent_as_a_form_of_a_page(script: Script, url: str) -> None:
    script.answers = [GOOD]

    caller_of(url, []).send("POST", "/sign-in", body=Fields({"key": "dw_a b&c"}))

    [(_, _, headers, body)] = script.seen
    assert (headers["content-type"], body) == ("application/x-www-form-urlencoded", b"key=dw_a+b%26c")


@pytest.mark.parametrize("told", ["no object", ["no", "object"]])
def test_a_refusal_that_tells_no_problem_is_told_by_its_status(script: Script, url: str, told: Any) -> None:
    script.answers = [(502, {"Request-Id": "r-1"}, told)]

    with pytest.raises(ProblemError, match=r"^502 : no detail was told \(r-1\)$"):
        caller_of(url, []).send("GET", "/v1/orders")


def test_a_refusal_that_is_no_json_is_told_by_its_status() -> None:
    class Between:
        def request(self, *_: object, **__: object) -> urllib3.HTTPResponse:
            return urllib3.HTTPResponse(b"<html>Bad gateway</html>", status=502)

    caller = Caller("https://discs.example", None)
    caller._pool = Between()  # type: ignore[assignment]  # all that is asked of it

    with pytest.raises(ProblemError, match=r"^502 : no detail was told \(no request id\)$"):
        caller.send("GET", "/v1/orders")


def test_the_generator_writes_both_packages_and_nothing_of_what_was(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(generate, "__file__", str(tmp_path / "generate.py"))
    (tmp_path / "shapes").mkdir()
    (tmp_path / "shapes" / "forgotten.py").write_text("")
    (tmp_path / "openapi.json").write_text(json.dumps(DOCUMENT))

    assert generate.main([str(tmp_path / "openapi.json")]) == 0

    for package in ("shapes", "operations"):
        made = {path.name: path.read_text() for path in (tmp_path / package).iterdir()}
        assert made == {path.name: path.read_text() for path in (HERE / package).glob("*.py")}


def test_the_generator_takes_the_document_from_its_input_too(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(generate, "__file__", str(tmp_path / "generate.py"))
    monkeypatch.setattr(sys, "stdin", io.StringIO(json.dumps(DOCUMENT)))

    assert generate.main(["-"]) == 0

    assert (tmp_path / "operations" / "orders.py").read_text() == (HERE / "operations" / "orders.py").read_text()


def test_the_generator_without_a_document_says_how_it_is_used(capsys: pytest.CaptureFixture[str]) -> None:
    assert generate.main([]) == 2

    assert capsys.readouterr().err == generate.USAGE


def answers_in_turn(*answers: Answer) -> Client:
    """A client to whom these are answered in turn, the last again and again."""
    left = list(answers)
    caller = Caller("https://discs.example", None)

    def send(*_: object, **__: object) -> Answer:
        return left.pop(0) if len(left) > 1 else left[0]

    caller.send = send  # type: ignore[method-assign]
    return Client("https://discs.example", caller=caller)


def order_in(state: str, **headers: str) -> Answer:
    return Answer(status=200, headers={"etag": '"1"', **headers}, body=json.dumps({"state": state}).encode())


def test_an_order_that_is_waited_for_too_long_is_told_with_where_it_stands() -> None:
    client = answers_in_turn(order_in("planning", **{"preference-applied": "wait=0"}))

    with pytest.raises(WaitedTooLongError, match=r"^the order order_1 is planning after 0 s$"):
        client.wait_for("order_1", frozenset({"ready"}), within_s=0)


def test_where_the_service_has_no_place_to_wait_the_client_looks_again_by_itself(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    slept: list[float] = []
    monkeypatch.setattr("service.client.client.time.sleep", slept.append)
    unchanged = Answer(status=304, headers={}, body=b"")
    client = answers_in_turn(order_in("planning"), unchanged, order_in("ready"))

    assert client.wait_for("order_1", frozenset({"ready"}), within_s=60) == {"state": "ready"}

    assert slept == [1.0, 1.0]
