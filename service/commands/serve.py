"""`discwright serve`: the web service, run by gunicorn."""

import argparse
import os
import socket
import sys

from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import CommandError
from service.settings import SettingsError, settings_from

ABOUT = "Start the web service and keep serving until Ctrl-C."
EXAMPLE = """example:
  discwright serve --port 8001
      then  curl --data-binary @dance.mid -H 'Content-Type: audio/midi' -H 'Accept: image/vnd.dxf' \\
                 'http://127.0.0.1:8001/v1/layouts?movement=fernhollow-31' -o dance.dxf

The service has no keys yet: on any host but 127.0.0.1 everyone who reaches the port can use it."""
ANSWER_WITHIN_S = 120  # s; what a worker may take for one answer before it is replaced
MOST_PORT = 65535  # ports have 16 bits (RFC 9293)
MOST_WORKERS = 64  # workers; each is a process of its own


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("--host", default="127.0.0.1", help="the address to listen on (default: %(default)s)")
    parser.add_argument("--port", type=int, default=8000, help="the port to listen on (default: %(default)s)")
    parser.add_argument("--workers", type=int, default=2, help="how many requests at a time (default: %(default)s)")


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Become the service; returns only where it cannot start.

    Raises:
        CommandError: A number is out of range, or nothing can listen on that address and port.
    """
    for name, value, most in (("--port", asked.port, MOST_PORT), ("--workers", asked.workers, MOST_WORKERS)):
        if not 1 <= value <= most:
            raise CommandError(f"{name} is {value}; it must be a whole number from 1 to {most}")
    _check_settings()
    _check_free(asked.host, asked.port)
    host = f"[{asked.host}]" if ":" in asked.host else asked.host
    sys.stderr.write(f"serving on http://{host}:{asked.port} until Ctrl-C\n")
    sys.stderr.flush()
    tools.execute(
        sys.executable,
        [
            *(sys.executable, "-m", "gunicorn"),
            *("--bind", f"{host}:{asked.port}"),
            *("--workers", str(asked.workers)),
            *("--timeout", str(ANSWER_WITHIN_S)),
            *("--log-level", "warning"),
            "--no-control-socket",
            "service.app:create_app()",
        ],
    )


def _check_settings() -> None:
    try:
        settings_from(os.environ)
    except SettingsError as error:
        raise CommandError(str(error)) from error


def _check_free(host: str, port: int) -> None:
    try:
        family, kind, protocol, _, address = socket.getaddrinfo(host, port, type=socket.SOCK_STREAM)[0]
        with socket.socket(family, kind, protocol) as listener:
            listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            listener.bind(address)
    except OSError as refusal:
        raise CommandError(
            f"nothing can listen on {host} port {port}: {refusal.strerror}; choose another --port or --host"
        ) from refusal
