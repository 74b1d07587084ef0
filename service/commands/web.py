"""`discwright web`: the web service alone, run by gunicorn."""

import argparse
import os
import secrets
import socket
import sys
import tempfile
from dataclasses import dataclass
from pathlib import Path

from service.access.loopback import is_loopback
from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import CommandError
from service.settings import ServiceSettings, SettingsError, settings_from

ABOUT = "Answer requests until Ctrl-C or SIGTERM; orders are planned by `discwright work`."
EXAMPLE = """example:
  DATABASE_URL=postgresql://discs@db/discs discwright web --host 0.0.0.0 --workers 4

Start it on as many machines as you like, behind one address. Before the first start on PostgreSQL run
`discwright migrate`; `discwright check-setup` says what else is missing."""
MOST_PORT = 65535  # ports have 16 bits (RFC 9293)
MOST_WORKERS = 64  # workers; each is a process of its own
MOST_THREADS = 200
WORKERS = 2
# Requests that wait (Prefer: wait, or for their turn to compute) and streams of events hold a thread each, and cost
# next to nothing meanwhile.
THREADS = 32
STOP_MARGIN_S = 2  # s; between the last answer and the end, for processes to end in
COUNTS_OF_PROCESSES = "PROMETHEUS_MULTIPROC_DIR"
GATE = "DISCWRIGHT_GATE"  # a file descriptor that ends when the web may open the database; set by `serve` alone
LISTEN_BACKLOG = 2048  # connections that wait for a free thread; as gunicorn itself has it


@dataclass(frozen=True, slots=True, kw_only=True)
class WebAsked:
    """How the web is to run.

    Attributes:
        host: The address to listen on.
        port: The port.
        workers: Processes.
        threads: Requests at a time of each.
    """

    host: str
    port: int
    workers: int
    threads: int

    @property
    def shown_host(self) -> str:
        """The host as it stands in a URL (RFC 3986 section 3.2.2)."""
        return f"[{self.host}]" if ":" in self.host else self.host

    @property
    def address(self) -> str:
        """Where it serves."""
        return f"http://{self.shown_host}:{self.port}"


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("--host", default="127.0.0.1", help="the address to listen on (default: %(default)s)")
    parser.add_argument("--port", type=int, default=8000, help="the port to listen on (default: %(default)s)")
    parser.add_argument("--workers", type=int, default=WORKERS, help="how many processes (default: %(default)s)")
    parser.add_argument(
        "--threads",
        type=int,
        default=THREADS,
        help="how many requests of each at a time; one that waits or streams events holds one (default: %(default)s)",
    )


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Become the service; returns only where it cannot start.

    Raises:
        CommandError: A number is out of range, or nothing can listen on that address and port.
    """
    web = web_asked(asked)
    settings = read_settings()
    listening(web).close()
    sys.stderr.write(f"serving on {web.address} until Ctrl-C\n")
    sys.stderr.flush()
    os.environ.update(web_environment(web, new_counts()))
    tools.execute(sys.executable, gunicorn_command(web, f"{web.shown_host}:{web.port}", settings))


def web_asked(asked: argparse.Namespace) -> WebAsked:
    """What the arguments ask for.

    Raises:
        CommandError: A number is out of range.
    """
    for name, value, most in (
        ("--port", asked.port, MOST_PORT),
        ("--workers", asked.workers, MOST_WORKERS),
        ("--threads", asked.threads, MOST_THREADS),
    ):
        if not 1 <= value <= most:
            raise CommandError(f"{name} is {value}; it must be a whole number from 1 to {most}")
    return WebAsked(host=asked.host, port=asked.port, workers=asked.workers, threads=asked.threads)


def read_settings() -> ServiceSettings:
    """The settings of the environment.

    Raises:
        CommandError: One is wrong.
    """
    try:
        return settings_from(os.environ)
    except SettingsError as error:
        raise CommandError(str(error)) from error


def listening(web: WebAsked) -> socket.socket:
    """A socket that listens there.

    Raises:
        CommandError: Nothing can.
    """
    try:
        family, kind, protocol, _, address = socket.getaddrinfo(web.host, web.port, type=socket.SOCK_STREAM)[0]
        listener = socket.socket(family, kind, protocol)
        try:
            listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            listener.bind(address)
            listener.listen(LISTEN_BACKLOG)
        except BaseException:
            listener.close()
            raise
    except OSError as refusal:
        raise CommandError(
            f"nothing can listen on {web.host} port {web.port}: {refusal.strerror}; choose another --port or --host"
        ) from refusal
    return listener


def web_environment(web: WebAsked, counts: str) -> dict[str, str]:
    """What gunicorn's environment has beside what is set.

    Args:
        web: How it runs.
        counts: The folder by which its processes share their counts.
    """
    loopback = {} if os.environ.get("DISCWRIGHT_ON_LOOPBACK") else _on_loopback(web)
    # Requests are its threads; a library that starts more for each would only stand in their way. And what each thread
    # has freed is there for the others: with a heap for each, memory rises till all of them have computed.
    alone = {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1", "MALLOC_ARENA_MAX": "2"}
    return {COUNTS_OF_PROCESSES: counts, **alone, **loopback}


def new_counts() -> str:
    """A name for the folder of counts; the first process to need it makes it."""
    return str(Path(tempfile.gettempdir()) / f"discwright-counts-{secrets.token_hex(8)}")


def gunicorn_command(web: WebAsked, bind: str, settings: ServiceSettings) -> list[str]:
    """The command line of gunicorn; what does not differ from start to start stands in `service.web_process`.

    Args:
        web: How it runs.
        bind: Where it listens, as gunicorn writes it.
        settings: Read for the time to stop.
    """
    return [
        *(sys.executable, "-m", "gunicorn"),
        *("--config", "python:service.web_process"),
        *("--bind", bind),
        *("--workers", str(web.workers)),
        *("--threads", str(web.threads)),
        *("--graceful-timeout", str(max(1, settings.work.stop_within_s - STOP_MARGIN_S))),
    ]


def _on_loopback(web: WebAsked) -> dict[str, str]:
    return {"DISCWRIGHT_ON_LOOPBACK": "yes" if is_loopback(web.host) else "no"}
