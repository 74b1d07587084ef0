"""A web process that is killed or told to stop while its child searches: no child is left, and others serve on."""

import os
import signal
import threading
import time
from contextlib import suppress
from http.client import HTTPException
from pathlib import Path
from urllib.request import Request, urlopen

from tests.faults.fleet import children_of, wait_for
from tests.load.watching import processor_s
from tests.service.api.running import Running, running
from tests.service.hard_tune import hard_tune
from tests.service.processes import is_alive

WITHIN_S = 60.0  # far more than it takes


def computing_below(pid: int) -> dict[int, int]:
    """The computing children below a process, each with its parent."""
    found = {}
    for child in children_of(pid):
        with suppress(OSError):
            if b"service.computing.child" in Path(f"/proc/{child}/cmdline").read_bytes():
                found[child] = pid
        found |= computing_below(child)
    return found


def two_rest() -> bool:
    """Whether there are two children, which have imported what they need and wait."""
    children = list(computing_below(os.getpid()))
    before_s = processor_s(children)
    time.sleep(0.5)
    return len(children) == 2 and before_s > 0.2 and processor_s(children) == before_s


def search_for_long(service: Running) -> dict[int, int]:
    """Ask for what is searched for longer than a second, and give the child that has begun to, with its parent."""
    before_s = {child: processor_s([child]) for child in computing_below(os.getpid())}
    path = "/v1/layouts?movement=mossbrook-67"
    asked = Request(f"{service.url}{path}", data=hard_tune(), headers={"Content-Type": "audio/midi"})

    def ask() -> None:
        with suppress(OSError, HTTPException), urlopen(asked, timeout=WITHIN_S):
            pass

    threading.Thread(target=ask, daemon=True).start()
    busy: dict[int, int] = {}

    def is_busy() -> bool:
        below = computing_below(os.getpid()).items()
        busy.update({one: of for one, of in below if processor_s([one]) - before_s.get(one, 0.0) > 0.5})
        return bool(busy)

    wait_for(is_busy, within_s=WITHIN_S)
    return busy


def test_a_web_process_that_is_killed_or_told_to_stop_leaves_no_child(tmp_path: Path) -> None:
    with running(tmp_path, None, with_worker=False) as service:
        wait_for(two_rest, within_s=WITHIN_S)
        [(child, web), *_] = search_for_long(service).items()
        lived = is_alive(child)

        os.kill(web, signal.SIGKILL)

        wait_for(lambda: not is_alive(child), within_s=WITHIN_S)
        wait_for(two_rest, within_s=WITHIN_S)  # one of them of the web process that took its place
        with urlopen(f"{service.url}/healthz", timeout=WITHIN_S) as answer:
            assert (lived, answer.status) == (True, 200)
        left = list(search_for_long(service))
    assert left
    for child in left:
        wait_for(lambda child=child: not is_alive(child), within_s=WITHIN_S)  # type: ignore[misc]  # of a default
