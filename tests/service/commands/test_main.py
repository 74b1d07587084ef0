import os
import re
import socket
import subprocess
import sys

import pytest

from layout.version import ENGINE_VERSION
from service.commands.main import COMMANDS, main
from tests.service.commands.conftest import Discwright
from tests.service.fakes import FakePlanner


def run_piped(*arguments: str, shell_end: str = "", **environment: str) -> subprocess.CompletedProcess[str]:
    """The command in a process of its own, its output piped on."""
    command = " ".join([sys.executable, "-m", "service.commands.main", *arguments]) + shell_end
    return subprocess.run(
        ["bash", "-c", command],
        check=False,
        capture_output=True,
        text=True,
        timeout=60,
        env={**os.environ, **environment},
    )


def test_the_version_is_the_engine_s(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as end:
        main(["--version"])

    assert end.value.code == 0
    assert capsys.readouterr().out == f"discwright {ENGINE_VERSION}\n"


@pytest.mark.parametrize("command", COMMANDS)
def test_help_ends_with_an_example_of_the_command(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as end:
        main([command, "--help"])

    told = capsys.readouterr().out
    assert end.value.code == 0
    assert f" discwright {command}" in told.partition("example:\n")[2]
    assert max(map(len, told.splitlines())) <= 120


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ([], "the following arguments are required: COMMAND; see discwright --help"),
        (["paln"], "argument COMMAND: invalid choice: 'paln'"),
        (["movement"], "the following arguments are required: ID_OR_FILE; see discwright movement --help"),
    ],
)
def test_a_wrong_command_line_is_one_line_and_exit_2(
    discwright: Discwright, capsys: pytest.CaptureFixture[str], arguments: list[str], message: str
) -> None:
    code = discwright(*arguments)

    told = capsys.readouterr()
    assert (code, told.out, told.err.count("\n")) == (2, "", 1)
    assert message in told.err


def test_a_reader_that_goes_away_gets_no_trace() -> None:
    # The list of movements is printed after `true` has closed the pipe.
    ended = run_piped("movement", "mossbrook-67", shell_end=' | true; exit "${PIPESTATUS[0]}"')

    assert ended.stderr == ""
    assert ended.returncode == 141


def test_letters_the_terminal_does_not_know_are_written_as_escapes(tmp_path: object) -> None:
    tune = f"{tmp_path}/t.mid"
    track = b"\x00\xff\x03\x04D\xc3\xbcn\x00\x90\x48\x40\x60\x80\x48\x40\x00\xff\x2f\x00"  # title "Dün"
    with open(tune, "wb") as file:
        header = b"MThd\x00\x00\x00\x06\x00\x00\x00\x01\x00\x60MTrk"
        file.write(header + len(track).to_bytes(4, "big") + track)

    ended = run_piped(
        *("plan", tune, "--movement", "fernhollow-31", "--out", f"{tmp_path}/out"), PYTHONIOENCODING="ascii"
    )

    assert ended.stderr == ""
    assert ended.returncode == 0
    assert ended.stdout.splitlines()[0] == "D\\xfcn"


def test_an_interrupt_ends_without_a_trace(capsys: pytest.CaptureFixture[str]) -> None:
    class Interrupted(FakePlanner):
        def check_drawing(self, *_: object) -> None:
            raise KeyboardInterrupt

    code = main(["check", __file__, "--movement", "tarnlight-17"], planner=Interrupted())

    told = capsys.readouterr()
    assert (code, told.out, told.err) == (130, "", "")


@pytest.fixture
def own_environment(monkeypatch: pytest.MonkeyPatch) -> None:
    """What `web` sets for the program it becomes is set no more after the test."""
    set_by_it = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MALLOC_ARENA_MAX")
    for name in ("DISCWRIGHT_ON_LOOPBACK", "PROMETHEUS_MULTIPROC_DIR", *set_by_it):
        monkeypatch.setenv(name, "")


class Executed(Exception):
    """Stands for the program that would take over."""


def web(*arguments: str) -> list[str]:
    """The command line that `web` turns into."""
    seen: list[str] = []

    def execute(_: str, command: list[str]) -> None:
        seen.extend(command)
        raise Executed

    with pytest.raises(Executed):
        main(["web", *arguments], execute=execute)
    return seen


def free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def test_web_becomes_gunicorn_on_the_loopback_address(
    capsys: pytest.CaptureFixture[str], own_environment: None
) -> None:
    port = free_port()

    command = web("--port", str(port), "--workers", "3", "--threads", "5")

    assert command[:5] == [sys.executable, "-m", "gunicorn", "--config", "python:service.web_process"]
    told = dict(zip(command[5::2], command[6::2], strict=True))
    # 18 s of 20 s to stop: two are left for processes to end in
    assert told == {
        "--bind": f"127.0.0.1:{port}",
        "--workers": "3",
        "--threads": "5",
        "--graceful-timeout": "18",
    }
    assert os.environ["DISCWRIGHT_ON_LOOPBACK"] == "yes"
    assert capsys.readouterr().err == f"serving on http://127.0.0.1:{port} until Ctrl-C\n"


def test_web_on_another_address_says_that_it_is_not_on_loopback(own_environment: None) -> None:
    web("--host", "0.0.0.0", "--port", str(free_port()))

    assert os.environ["DISCWRIGHT_ON_LOOPBACK"] == "no"


@pytest.mark.parametrize("command", ["serve", "web"])
@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["--port", "0"], "--port is 0; it must be a whole number from 1 to 65535"),
        (["--port", "65536"], "--port is 65536; it must be"),
        (["--port", "http"], "argument --port: invalid int value: 'http'"),
        (["--workers", "0"], "--workers is 0; it must be a whole number from 1 to 64"),
        (["--threads", "201"], "--threads is 201; it must be a whole number from 1 to 200"),
        (["--host", "203.0.113.7"], "nothing can listen on 203.0.113.7 port 8000: .*; choose another --port or --host"),
    ],
)
def test_an_address_that_cannot_be_served_is_one_line_and_exit_2(
    discwright: Discwright, capsys: pytest.CaptureFixture[str], command: str, arguments: list[str], message: str
) -> None:
    code = discwright(command, *arguments)

    _match(message, code, capsys)


def test_a_taken_port_is_one_line_and_exit_2(discwright: Discwright, capsys: pytest.CaptureFixture[str]) -> None:
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        port = taken.getsockname()[1]

        code = discwright("serve", "--port", port)

    _match(f"nothing can listen on 127.0.0.1 port {port}: Address already in use; choose another --port", code, capsys)


def test_settings_that_cannot_be_used_are_told_before_serving(
    discwright: Discwright, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("DISCWRIGHT_CACHE_BYTES", "lots")

    code = discwright("serve", "--port", free_port())

    _match("DISCWRIGHT_CACHE_BYTES is 'lots'; it must be a whole number", code, capsys)


def _match(message: str, code: int, capsys: pytest.CaptureFixture[str]) -> None:
    told = capsys.readouterr()
    assert (code, told.out, told.err.count("\n")) == (2, "", 1)
    assert re.search(message, told.err), told.err
