"""The service as it runs: gunicorn, two workers, the real computation, spoken to over a socket."""

import http.client
import json
import os
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import ExitStack
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest

from service.commands.main import main
from tests.service.fakes import HEARING_FILES

DEMO = files("service.demo").joinpath("tune.mid").read_bytes()
FERNHOLLOW = "/v1/layouts?movement=fernhollow-31"
TARNLIGHT = "/v1/layouts?movement=tarnlight-17"
MIDI = {"Content-Type": "audio/midi"}
START_WITHIN_S = 60.0
MIB = 1024 * 1024


@dataclass
class Answer:
    """An answer of the service."""

    status: int
    headers: Any
    body: bytes

    @property
    def json(self) -> Any:
        return json.loads(self.body)


@dataclass
class Service:
    """A running service."""

    port: int

    def ask(self, method: str, path: str, body: Any = None, headers: dict[str, str] | None = None) -> Answer:
        connection = http.client.HTTPConnection("127.0.0.1", self.port, timeout=60)
        try:
            connection.request(method, path, body=body, headers=headers or {})
            answer = connection.getresponse()
            return Answer(answer.status, answer.headers, answer.read())
        finally:
            connection.close()


@pytest.fixture(scope="module")
def service(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Service]:
    folder = tmp_path_factory.mktemp("service")
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        running = Service(probe.getsockname()[1])
    command = [sys.executable, "-m", "service.commands.main", "serve", "--port", str(running.port)]
    environment = {**os.environ, "DISCWRIGHT_CACHE": str(folder / "layouts"), "PYTHONHASHSEED": "0"}
    with (folder / "log").open("w+") as log:
        process = subprocess.Popen(command, env=environment, stdout=log, stderr=log)
        try:
            wait_until_it_answers(running, process)
            yield running
        finally:
            process.terminate()
            process.wait(timeout=30)
        log.seek(0)
        assert "Traceback" not in log.read()


def wait_until_it_answers(service: Service, process: "subprocess.Popen[bytes]") -> None:
    give_up_at_s = time.monotonic() + START_WITHIN_S
    while True:
        assert process.poll() is None, "the service ended by itself"
        try:
            if service.ask("GET", "/healthz").status == 200:
                return
        except OSError:
            assert time.monotonic() < give_up_at_s, "the service does not answer"
            time.sleep(0.2)


@pytest.fixture(scope="module")
def planned(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder with the files that the command makes of the demo tune."""
    out = tmp_path_factory.mktemp("planned")
    (out / "tune.mid").write_bytes(DEMO)
    command = [sys.executable, "-m", "service.commands.main", "plan", str(out / "tune.mid")]
    environment = {**os.environ, "PYTHONHASHSEED": "4"}
    subprocess.run([*command, "--movement", "fernhollow-31", "--out", str(out / "disc")], check=True, env=environment)
    return out / "disc"


def test_one_request_turns_a_tune_into_the_drawing_the_command_makes(service: Service, planned: Path) -> None:
    answer = service.ask("POST", FERNHOLLOW, DEMO, {**MIDI, "Accept": "image/vnd.dxf"})

    assert answer.status == 200
    assert answer.headers["Content-Type"] == "image/vnd.dxf"
    assert answer.body == (planned / "disc.dxf").read_bytes()
    assert "turning-day-at-wickenbeck_fernhollow-31-r1_cold-rolled-steel-0.5mm" in answer.headers["Content-Disposition"]


def test_every_file_is_what_the_command_makes_whichever_worker_answers(service: Service, planned: Path) -> None:
    told = service.ask("POST", FERNHOLLOW, DEMO, MIDI).json["links"]
    links = {name: path for name, path in told.items() if name not in HEARING_FILES}

    # 2 workers: that 8 requests for one file all went to the same one is all but ruled out
    answers = [(name, service.ask("GET", path)) for name, path in links.items() for _ in range(8)]

    assert len(links) == 8
    assert {answer.status for _, answer in answers} == {200}
    assert all(answer.body == (planned / name).read_bytes() for name, answer in answers)


def test_the_command_reads_the_service_s_drawing_back(
    service: Service, planned: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    drawing = tmp_path / "disc.dxf"
    drawing.write_bytes(service.ask("POST", FERNHOLLOW, DEMO, {**MIDI, "Accept": "image/vnd.dxf"}).body)

    code = main(["check", str(drawing), "--movement", "fernhollow-31", "--json"])

    told = json.loads(capsys.readouterr().out)
    asked = json.loads((planned / "layout.json").read_text())["projections"]
    assert code == 0
    assert len(told["plucks"]) == len(asked) > 0
    by_time = sorted((p["sounds_s"], p["track"]) for p in asked)
    # 1 ms is what a drawing must give back of every pluck
    assert [pluck["sounds_s"] for pluck in told["plucks"]] == pytest.approx([s for s, _ in by_time], abs=1e-3)


def test_a_tune_longer_than_the_turn_has_its_cutting_files_kept_back(service: Service) -> None:
    answer = service.ask("POST", TARNLIGHT, DEMO, {**MIDI, "Accept": "image/vnd.dxf"})

    assert answer.status == 422
    assert answer.json["type"] == "/problems/not-good-to-cut"
    assert "music-too-long" in [finding["code"] for finding in answer.json["findings"]]


def test_with_a_reason_the_drawing_is_given_and_says_what_it_is(service: Service) -> None:
    made = service.ask("POST", f"{TARNLIGHT}&despite_findings=for%20the%20wall", DEMO, MIDI).json

    given = {name: service.ask("GET", path) for name, path in made["links"].items() if name not in HEARING_FILES}

    assert made["good_to_cut"] is False
    assert {answer.status for answer in given.values()} == {200}
    assert b"NOT GOOD TO CUT: for the wall" in given["disc.dxf"].body
    assert b"NOT GOOD TO CUT" in given["disc.svg"].body
    assert 'filename="NOT-GOOD-TO-CUT_' in given["disc.dxf"].headers["Content-Disposition"]


def test_a_passage_in_the_settings_makes_it_good(service: Service) -> None:
    body = b"".join(
        b'--b\r\nContent-Disposition: form-data; name="%s"\r\n\r\n%s\r\n' % part
        for part in ((b"tune", DEMO), (b"settings", b'{"passage": {"to_s": 36}}'))
    )

    headers = {"Content-Type": "multipart/form-data; boundary=b"}
    made = service.ask("POST", TARNLIGHT, body + b"--b--\r\n", headers)

    assert made.status == 201
    assert made.json["good_to_cut"] is True


def test_a_ruling_that_no_tooth_can_keep_is_told(service: Service) -> None:
    settings = b'{"rulings": [{"note": 0, "do": "leave-out"}, {"note": 0, "do": "must-sound"}]}'
    body = b"".join(
        b'--b\r\nContent-Disposition: form-data; name="%s"\r\n\r\n%s\r\n' % part
        for part in ((b"tune", DEMO), (b"settings", settings))
    )

    headers = {"Content-Type": "multipart/form-data; boundary=b"}
    answer = service.ask("POST", FERNHOLLOW, body + b"--b--\r\n", headers)

    assert answer.status == 422
    assert answer.json["type"] == "/problems/rulings-contradict"
    assert answer.json["invalid_params"][0]["pointer"].startswith("/rulings/")


@pytest.mark.parametrize("size_mib", [3, 12])
def test_a_body_far_over_the_limit_gets_its_answer_and_no_reset(service: Service, size_mib: int) -> None:
    answer = service.ask("POST", FERNHOLLOW, bytes(size_mib * MIB), MIDI)

    assert answer.status == 413
    assert answer.json["limit_bytes"] == 2 * MIB


def test_a_chunked_body_over_the_limit_gets_its_answer(service: Service) -> None:
    # http.client sends an iterable in chunks, without Content-Length
    answer = service.ask("POST", FERNHOLLOW, iter([bytes(MIB)] * 3), MIDI)

    assert answer.status == 413
    assert answer.json["type"] == "/problems/upload-too-large"


def test_a_chunked_body_is_taken(service: Service, planned: Path) -> None:
    headers = {**MIDI, "Accept": "image/svg+xml"}

    answer = service.ask("POST", FERNHOLLOW, iter([DEMO[:100], DEMO[100:]]), headers)

    assert answer.status == 200
    assert answer.body == (planned / "disc.svg").read_bytes()


def test_idle_sockets_and_stalled_bodies_of_one_client_hold_nobody_up(service: Service) -> None:
    head = f"POST {FERNHOLLOW} HTTP/1.1\r\nHost: a\r\nContent-Type: audio/midi\r\nContent-Length: 5000\r\n\r\n"
    with ExitStack() as kept:
        for _ in range(40):
            kept.enter_context(socket.create_connection(("127.0.0.1", service.port)))
            stalled = kept.enter_context(socket.create_connection(("127.0.0.1", service.port)))
            stalled.sendall(head.encode() + b"MThd")
        time.sleep(0.3)
        took_s = []
        for _ in range(8):  # 2 processes: that all went to one is all but ruled out
            begun_s = time.monotonic()
            assert service.ask("GET", "/healthz").status == 200
            took_s.append(time.monotonic() - begun_s)

        assert max(took_s) < 1
        stalled.settimeout(20)
        assert stalled.recv(100).startswith(b"HTTP/1.1 408 Request Timeout\r\n")


def test_a_body_for_an_address_where_nothing_is_gets_its_answer(service: Service) -> None:
    assert service.ask("POST", "/v1/nothing", bytes(MIB), MIDI).status == 404
