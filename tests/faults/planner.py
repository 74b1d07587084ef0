"""A planner that does what its tune's name says: plans at once or slowly, fills memory, spins, or ends processes.

Given to a worker by its import path, in tests alone.
"""

import ctypes
import hashlib
import os
import re
import signal
import sys
import time
from dataclasses import replace
from typing import Any

from tests.service.fake_planner import FakeLayout, FakePlanner


class QuietPlanner(FakePlanner):
    """Plans at once, and names the tune in every file, so that no two orders have the same."""

    def lay_out_discs(
        self, tune: bytes, movement: Any, cutter: Any, settings: Any, clock: Any = None, *, most_s: float | None = None
    ) -> tuple[FakeLayout, ...]:
        layouts = super().lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)
        name = hashlib.sha256(tune).hexdigest()
        return tuple(replace(layout, title=name, record={**layout.record, "title": name}) for layout in layouts)


_PLANNER = QuietPlanner()
fingerprint_of = _PLANNER.fingerprint_of
files_of = _PLANNER.files_of
told_of = _PLANNER.told_of
check_drawing = _PLANNER.check_drawing


def lay_out_discs(
    tune: bytes, movement: Any, cutter: Any, settings: Any, clock: Any = None, *, most_s: float | None = None
) -> tuple[Any, ...]:
    """Do first what the tune is called, such as `do:sleep 0.5;`, if it is called anything of the kind."""
    asked = re.search(rb"do:([a-z-]+) ?([\d.]*);", tune)
    if asked is not None:
        _DEEDS[asked[1]](asked[2])
    laid_out = _PLANNER.lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)
    return tuple(replace(one, stopped="time") for one in laid_out) if b"do:stop;" in tune else laid_out


def _fill_memory(_: bytes) -> None:
    kept = []
    while True:
        kept.append(b"x" * 8_000_000)


def _spin(_: bytes) -> None:
    while True:
        pass


def _print(_: bytes) -> None:
    sys.stdout.write("a library says hello\n")
    sys.stdout.buffer.write(b"\0" * 64)
    sys.stdout.flush()
    libc = ctypes.CDLL(None)
    libc.puts(b"and so does one in C")
    libc.fflush(None)


def _grow(mib: bytes) -> None:
    _GROWN.append(b"x" * (int(mib) * 1024 * 1024))


def _grow_too_large(mib: bytes) -> None:
    _grow(mib)
    raise MemoryError


def _divide(_: bytes) -> None:
    raise ZeroDivisionError("of the test")


_GROWN: list[bytes] = []
_DEEDS: dict[bytes, Any] = {
    b"sleep": lambda seconds: time.sleep(float(seconds)),
    b"exit": lambda code: os._exit(int(code)),
    b"segfault": lambda _: os.kill(os.getpid(), signal.SIGSEGV),
    b"kill-worker": lambda _: os.kill(os.getppid(), signal.SIGKILL),
    b"fill": _fill_memory,
    b"spin": _spin,
    b"print": _print,
    b"grow": _grow,
    b"grow-too-large": _grow_too_large,
    b"divide": _divide,
    b"stop": lambda _: None,  # the search, as time does; told of what is laid out
}
