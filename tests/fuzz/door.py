"""What a door of the program is to a fuzzer, and how one input is judged.

An input is answered well when the answer is a value or an error of layout/errors.py, within the time and the memory
that one input may take. Time is the processor's, so that a busy machine makes nothing fail.
"""

import random
import re
import time
import traceback
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from layout.errors import LayoutError

MOST_CPU_S = 2.0
MOST_MIB = 300.0
OURS = "/layout/"
SLOW, LARGE = "slow", "large"  # kinds of faults
FULL = 3  # what a process ends with that has no fault and no room for more inputs


@dataclass(frozen=True, slots=True, kw_only=True)
class Door:
    """One way into the program.

    Attributes:
        name: As in the names of modules and files.
        suffix: Of files of such inputs.
        seeds: Good inputs to begin with.
        answer: What is tried: bytes in, a value or an exception out.
        mutate: A changed input from an input, at most so many bytes where it grows by chance.
        errors: The exceptions that the door may raise.
    """

    name: str
    suffix: str
    seeds: tuple[bytes, ...]
    answer: Callable[[bytes], object]
    mutate: Callable[[bytes, random.Random], bytes]
    errors: tuple[type[LayoutError], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """An input answered badly: what happened, and a short name that the same fault always gets."""

    kind: str
    told: str


def fault_of(door: Door, data: bytes, most_cpu_s: float = MOST_CPU_S) -> Fault | None:
    """What is wrong with the answer to an input; None where nothing is."""
    Path("/proc/self/clear_refs").write_text("5")  # the peak is counted anew from here: proc(5)
    begun_s, held_mib = time.process_time(), memory_mib("VmRSS")
    try:
        door.answer(data)
    except door.errors as error:
        if not str(error).strip():
            return Fault(kind="error-without-words", told=repr(error))
    except Exception as error:  # noqa: BLE001 -- whatever comes out is what is looked for
        return Fault(kind=f"{type(error).__name__}-{_place_of(error)}", told="".join(traceback.format_exception(error)))
    took_s, took_mib = time.process_time() - begun_s, memory_mib("VmHWM") - held_mib
    if took_s > most_cpu_s:
        return Fault(kind=SLOW, told=f"{took_s:.2f} s of the processor's time, allowed are {most_cpu_s:g}")
    if took_mib > MOST_MIB:
        return Fault(kind=LARGE, told=f"{took_mib:.0f} MiB more than before, allowed are {MOST_MIB:g}")
    return None


def memory_mib(field: str) -> float:
    """Of this process, by a field of /proc/self/status: proc(5)."""
    found = re.search(rf"{field}:\s*(\d+) kB", Path("/proc/self/status").read_text())
    assert found is not None
    return int(found[1]) / 1024


def _place_of(error: BaseException) -> str:
    """The innermost function of ours that the error went through."""
    ours = [frame for frame in traceback.extract_tb(error.__traceback__) if OURS in frame.filename]
    return f"{ours[-1].name}-{ours[-1].lineno}" if ours else "outside"
