"""Whether a port is free, asked as `sh service/up` asks: by the file's path, with the standard library alone."""

import socket
import subprocess
import sys
from pathlib import Path

from service.demo import free_port
from tests.service.access.free_port import free_port as some_free_port


def asked(port: int) -> "subprocess.CompletedProcess[str]":
    path = Path(free_port.__file__)
    return subprocess.run([sys.executable, path, str(port)], capture_output=True, text=True, timeout=60, check=False)


def test_a_port_that_is_free_is_taken_without_a_word() -> None:
    told = asked(some_free_port())

    assert (told.returncode, told.stdout, told.stderr) == (0, "", "")


def test_a_port_on_which_another_listens_is_told_with_what_to_do() -> None:
    with socket.create_server(("127.0.0.1", 0)) as listener:
        port = listener.getsockname()[1]

        told = asked(port)

    assert told.returncode == 1
    assert told.stderr == (
        f"port {port} is taken: another program listens on it; choose another one with PORT, e.g.  "
        "PORT=8001 sh service/up\n"
    )


def test_a_port_that_is_bound_and_not_listened_on_cannot_be_used() -> None:
    with socket.socket() as bound:
        bound.bind(("127.0.0.1", 0))
        port = bound.getsockname()[1]

        told = asked(port)

    assert told.returncode == 1
    assert told.stderr.startswith(f"port {port} cannot be used (Address already in use); choose another one")
