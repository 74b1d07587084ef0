import socket
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from service.demo.free_port import why_not_free

UP = Path(__file__).parents[2] / "service" / "up"


@pytest.fixture
def taken_port() -> Iterator[int]:
    with socket.create_server(("127.0.0.1", 0)) as listener:
        yield listener.getsockname()[1]


def run_up(tmp_path: Path, *arguments: str, port: str = "8000") -> "subprocess.CompletedProcess[str]":
    command = ["/bin/sh", str(UP), *arguments]
    surroundings = {"PATH": "/usr/bin:/bin", "PORT": port, "PYTHON": sys.executable}
    return subprocess.run(
        command, check=False, cwd=tmp_path, env=surroundings, capture_output=True, text=True, timeout=60
    )


@pytest.mark.parametrize("port", ["abc", "0", "65536", "1000000", "-1", "080", "80.5", "8000 "])
def test_a_port_that_is_no_port_is_a_clear_error(tmp_path: Path, port: str) -> None:
    ended = run_up(tmp_path, port=port)

    assert ended.returncode == 2
    assert ended.stderr == (
        f"PORT is '{port}'; it must be a whole number from 1 to 65535, e.g.  PORT=8001 sh service/up\n"
    )


def test_a_taken_port_is_a_clear_error_before_anything_is_installed(tmp_path: Path, taken_port: int) -> None:
    ended = run_up(tmp_path, "--once", port=str(taken_port))

    assert ended.returncode == 1
    assert ended.stdout == ""
    assert ended.stderr == (
        f"port {taken_port} is taken: another program listens on it; "
        "choose another one with PORT, e.g.  PORT=8001 sh service/up\n"
    )


@pytest.mark.parametrize("arguments", [("--twice",), ("--once", "--once"), ("once",)])
def test_an_unknown_option_shows_the_usage(tmp_path: Path, arguments: tuple[str, ...]) -> None:
    ended = run_up(tmp_path, *arguments)

    assert ended.returncode == 2
    assert ended.stderr.startswith("usage: sh service/up [--once]\n")


def test_a_free_port_is_free(taken_port: int) -> None:
    with socket.create_server(("127.0.0.1", 0)) as listener:
        freed = listener.getsockname()[1]

    assert why_not_free(freed) is None
    assert why_not_free(taken_port) == f"port {taken_port} is taken: another program listens on it"


def test_a_port_held_by_a_program_that_does_not_listen_cannot_be_used() -> None:
    with socket.socket() as holder:
        holder.bind(("127.0.0.1", 0))
        port = holder.getsockname()[1]

        assert why_not_free(port) == f"port {port} cannot be used (Address already in use)"
