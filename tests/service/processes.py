"""Processes as tests look at them."""

import time
from collections.abc import Callable
from pathlib import Path


def is_alive(pid: int) -> bool:
    """Whether there is such a process, and it has not ended."""
    try:
        state = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0]
    except (FileNotFoundError, ProcessLookupError):
        return False
    return state != "Z"


def wait_until(true: Callable[[], bool], within_s: float = 10.0) -> bool:
    """Whether something comes true within some time."""
    last_s = time.monotonic() + within_s
    while not true():
        if time.monotonic() > last_s:
            return False
        time.sleep(0.02)
    return True
