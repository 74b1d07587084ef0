"""`discwright serve` told to stop while many clients ask for layouts: real processes, the real computation."""

import signal
import socket
import subprocess
import sys
import threading
import time
from dataclasses import dataclass
from http.client import HTTPException
from pathlib import Path
from typing import Any, Self

from tests.service.conftest import environment_of
from tests.service.test_running_service import DEMO, FERNHOLLOW, MIDI, Service, wait_until_it_answers

PLANNING, READING = 3, 6  # clients
LOAD_S = 3.0
STOP_WITHIN_S = 20.0  # as DISCWRIGHT_STOP_WITHIN_S has it
TAKEN_WITHIN_S = 0.5  # s; a connection is taken by then, however busy the processes are
MANY = "1000000/60"


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """What came of one request; status 0 where no answer came."""

    at_s: float
    status: int


class Load:
    """Clients that ask again and again."""

    def __init__(self, service: Service) -> None:
        self.told: list[Asked] = []
        self._service = service
        self._stop = threading.Event()
        asks: list[tuple[Any, ...]] = [("POST", FERNHOLLOW, DEMO, MIDI)] * PLANNING + [
            ("GET", "/v1/limits", None, {})
        ] * READING
        self._threads = [threading.Thread(target=self._ask_on, args=ask) for ask in asks]

    def __enter__(self) -> Self:
        for thread in self._threads:
            thread.start()
        return self

    def __exit__(self, *_: object) -> None:
        self._stop.set()
        for thread in self._threads:
            thread.join()

    def _ask_on(self, *ask: Any) -> None:
        while not self._stop.is_set():
            at_s = time.monotonic()
            try:
                status = self._service.ask(*ask).status
            except (OSError, HTTPException):
                status = 0
                time.sleep(0.1)
            self.told.append(Asked(at_s=at_s, status=status))


def test_told_to_stop_under_load_it_answers_every_request_it_took_and_ends_in_time(tmp_path: Path) -> None:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        service = Service(probe.getsockname()[1])
    environment = {**environment_of(tmp_path), "DISCWRIGHT_WRITE_RATE": MANY, "DISCWRIGHT_READ_RATE": MANY}
    command = [sys.executable, "-m", "service.commands.main", "serve", "--port", str(service.port)]
    with (tmp_path / "log").open("w") as log:
        process = subprocess.Popen(command, env=environment, stdout=log, stderr=log)
    try:
        wait_until_it_answers(service, process)
        with Load(service) as load:
            time.sleep(LOAD_S)
            told_at_s = time.monotonic()
            process.send_signal(signal.SIGTERM)
            code = process.wait(2 * STOP_WITHIN_S)
            took_s = time.monotonic() - told_at_s
    finally:
        process.kill()
        process.wait()

    taken = [one for one in load.told if one.at_s < told_at_s - TAKEN_WITHIN_S]
    assert code == 0
    assert took_s < STOP_WITHIN_S
    assert len(taken) >= PLANNING + READING
    assert {one.status for one in taken} == {200, 201}
    assert any(one.status == 0 for one in load.told)  # the load went on until nobody answered any more
    assert "Traceback" not in (tmp_path / "log").read_text()
