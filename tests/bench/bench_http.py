"""HTTP: a layout by POST against the same work in a process, and a repeat with If-None-Match against an empty route.

One web worker of the service, and one of gunicorn's own threaded workers with a Flask app of one empty route, on
loopback; a client that asks for one thing after the other, a connection for each, as the service has it. In turn.
"""

import json
import os
import socket
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from flask import Flask

from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.walk import lay_out
from layout.write.layout_json import write_layout_json
from tests.bench.opponents.table import say, say_table, told
from tests.service.access.free_port import free_port

TOP = Path(__file__).resolve().parents[2]
TUNE = (TOP / "service" / "demo" / "tune.mid").read_bytes()
MOVEMENT = "mossbrook-67"
POSTS, ROUNDS, REPEATS = 15, 7, 150
GIVE_UP_S = 60.0
POST_GOAL, REPEAT_GOAL = 1.25, 0.5

empty = Flask(__name__)


@empty.get("/")
def nothing() -> bytes:
    """The least there is."""
    return b""


def asked(port: int, head: str, body: bytes = b"") -> tuple[int, dict[str, str], bytes]:
    """One request over a connection of its own."""
    lines = f"{head}\r\nHost: 127.0.0.1:{port}\r\nConnection: close\r\nContent-Length: {len(body)}\r\n\r\n"
    with socket.create_connection(("127.0.0.1", port), timeout=GIVE_UP_S) as line:
        line.sendall(lines.encode() + body)
        parts = []
        while part := line.recv(1 << 16):
            parts.append(part)
    start, _, content = b"".join(parts).partition(b"\r\n\r\n")
    first, *fields = start.decode("latin-1").split("\r\n")
    return (
        int(first.split()[1]),
        {name.lower(): value for name, value in (one.split(": ", 1) for one in fields)},
        content,
    )


@contextmanager
def running(command: list[str], environment: Mapping[str, str], port: int) -> Iterator[None]:
    """A server, from when it answers."""
    process = subprocess.Popen(command, cwd=TOP, env={**os.environ, **environment}, stderr=subprocess.DEVNULL)
    give_up_s = time.monotonic() + GIVE_UP_S
    try:
        while True:
            try:
                asked(port, "GET / HTTP/1.1")
                break
            except (OSError, IndexError, ValueError):
                if time.monotonic() > give_up_s or process.poll() is not None:
                    raise
                time.sleep(0.05)
        time.sleep(3)  # the computation is imported a moment after the start
        yield
    finally:
        process.terminate()
        process.wait()


def form(title: str) -> tuple[str, bytes]:
    """Content type and body of a layout with a title of its own, so that none is known yet."""
    parts = [("settings", None, json.dumps({"title": title}).encode()), ("tune", "tune.mid", TUNE)]
    body = b"".join(
        b'--edge\r\nContent-Disposition: form-data; name="%s"%s\r\n\r\n%s\r\n'
        % (name.encode(), b'; filename="%s"' % file.encode() if file else b"", content)
        for name, file, content in parts
    )
    return "multipart/form-data; boundary=edge", body + b"--edge--\r\n"


def posted(port: int, title: str) -> dict[str, str]:
    kind, body = form(title)
    status, _, content = asked(
        port, f"POST /v1/layouts?movement={MOVEMENT} HTTP/1.1\r\nContent-Type: {kind}\r\nAccept: application/json", body
    )
    if status not in (200, 201):
        raise SystemExit(f"{status}: {content[:300]!r}")
    links: dict[str, str] = json.loads(content)["links"]
    return links


def in_process(title: str) -> bytes:
    """The same work: laid out, and told as the answer tells it."""
    settings = read_settings(json.dumps({"title": title}))
    laid_out = lay_out(TUNE, shipped_movement(MOVEMENT), shipped_cutter("fibre-laser"), settings)
    return write_layout_json(laid_out, despite_findings=None)


def took_ms(job: Callable[[], object]) -> float:
    begun_s = time.perf_counter()
    job()
    return 1000 * (time.perf_counter() - begun_s)


def post_rows(port: int) -> list[list[str]]:
    """A layout over HTTP and in a process, in turn."""
    over, within = [], []
    for number in range(POSTS):
        over.append(took_ms(lambda number=number: posted(port, f"over {number} {os.getpid()}")))  # type: ignore[misc]
        within.append(took_ms(lambda number=number: in_process(f"within {number}")))  # type: ignore[misc]
    over_ms, within_ms = statistics.median(over[2:]), statistics.median(within[2:])
    told(
        f"POST /v1/layouts of the demo tune on {MOVEMENT}: times of the same in a process",
        over_ms / within_ms,
        POST_GOAL,
        most=True,
    )
    return [["POST /v1/layouts", f"{over_ms:.1f} ms"], ["the same in a process", f"{within_ms:.1f} ms"]]


def repeat_rows(port: int, empty_port: int) -> list[list[str]]:
    """What a client has already, and an empty route, in turn: requests a second."""
    links = posted(port, "repeated")
    heads = {}
    whole = links["layout.json"].rpartition("/")[0]  # the layout itself, with its links
    for name, path in (("the layout", whole), *((name, links[name]) for name in ("layout.json", "disc.dxf"))):
        _, fields, _ = asked(port, f"GET {path} HTTP/1.1")
        heads[name] = f"GET {path} HTTP/1.1\r\nIf-None-Match: {fields['etag']}"
        status, _, _ = asked(port, heads[name])
        if status != 304:
            raise SystemExit(f"{path}: {status} instead of 304")
    took: dict[str, list[float]] = {name: [] for name in (*heads, "an empty route")}
    for _ in range(ROUNDS):
        for name, (to, head) in {
            **{name: (port, head) for name, head in heads.items()},
            "an empty route": (empty_port, "GET / HTTP/1.1"),
        }.items():
            took[name].append(took_ms(lambda to=to, head=head: [asked(to, head) for _ in range(REPEATS)]))  # type: ignore[misc]
    per_s = {name: 1000 * REPEATS / statistics.median(times) for name, times in took.items()}
    for name in heads:
        told(
            f"GET of {name} answered 304: part of the requests a second of an empty route",
            per_s[name] / per_s["an empty route"],
            REPEAT_GOAL,
            most=False,
        )
    return [[name, f"{rate:.0f} a second"] for name, rate in per_s.items()]


def main() -> None:
    """Print the table."""
    say(__doc__ or "")
    port, empty_port = free_port(), free_port()
    with tempfile.TemporaryDirectory() as text:
        environment = {
            "DISCWRIGHT_DATA": f"{text}/data",
            "DISCWRIGHT_CACHE": f"{text}/layouts",
            "DISCWRIGHT_READ_RATE": "1000000/60",
            "DISCWRIGHT_WRITE_RATE": "1000000/60",
        }
        web = [sys.executable, "-m", "service.commands.main", "web", "--port", str(port), "--workers", "1"]
        other = [sys.executable, "-m", "gunicorn", "--bind", f"127.0.0.1:{empty_port}", "--workers", "1"]
        other += ["--threads", "8", "--keep-alive", "0", "--log-level", "error", "tests.bench.bench_http:empty"]
        with running(web, environment, port), running(other, {}, empty_port):
            rows = post_rows(port) + repeat_rows(port, empty_port)
    say_table(["what", "median"], rows)


if __name__ == "__main__":
    main()
