"""What every child does for itself: keeps its pipes clear of what libraries print, and its memory within a limit.

Memory is limited by RLIMIT_AS (setrlimit(2)), set anew before each piece of work to what the process has plus what
that work may take: the kernel itself keeps to it, so that no burst between two looks can fill the machine, and what is
refused is a MemoryError here, which can be told, and not a process that is suddenly gone. What a process reserves
is never less than what it uses, so the limit is on the safe side.
"""

import logging
import os
import resource
import signal
from collections.abc import Iterator
from contextlib import contextmanager
from typing import BinaryIO

MIB = 1024 * 1024
SIZE_FIELD, RESIDENT_FIELD = 0, 1  # of /proc/self/statm, in pages: proc(5)


def own_pipes() -> tuple[BinaryIO, BinaryIO]:
    """The pipes of the parent, under numbers of their own: what a library prints goes where errors go.

    Signals are left to the parent from here on: sent to a whole group of processes, it decides what ends when.
    """
    orders = os.fdopen(os.dup(0), "rb")
    answers = os.fdopen(os.dup(1), "wb")
    nothing = os.open(os.devnull, os.O_RDONLY)
    os.dup2(nothing, 0)
    os.close(nothing)
    os.dup2(2, 1)
    for number in (signal.SIGINT, signal.SIGTERM):
        signal.signal(number, signal.SIG_IGN)
    logging.getLogger("ezdxf").setLevel(logging.CRITICAL)  # its remarks about a damaged file; ours is the reason
    return orders, answers


@contextmanager
def within_memory(most_mib: int) -> Iterator[None]:
    """Let what is done in here take so many MiB more than the process has; beyond is a MemoryError."""
    usual, most = resource.getrlimit(resource.RLIMIT_AS)
    wanted = _pages_bytes(SIZE_FIELD) + most_mib * MIB
    resource.setrlimit(resource.RLIMIT_AS, (wanted if most == resource.RLIM_INFINITY else min(wanted, most), most))
    try:
        yield
    finally:
        resource.setrlimit(resource.RLIMIT_AS, (usual, most))


def resident_mib() -> float:
    """MiB of memory that this process holds."""
    return _pages_bytes(RESIDENT_FIELD) / MIB


def _pages_bytes(which: int) -> int:
    with open("/proc/self/statm", encoding="ascii") as file:
        return int(file.read().split()[which]) * resource.getpagesize()
