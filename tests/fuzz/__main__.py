"""Every door fuzzed, one after the other: `sh tests/run fuzz [SECONDS [FOLDER]]`, half an hour each by default.

What is found lies in FOLDER/DOOR/found, .fuzz by default, each input beside its story, and FOLDER/DOOR/corpus goes on
growing from run to run. A fault that is mended leaves its input, made small, in tests/fuzz/kept.
"""

import subprocess
import sys
import time
from pathlib import Path

from tests.fuzz.door import FULL
from tests.fuzz.doors import DOORS

DEFAULT_S = 30 * 60
FOLDER = ".fuzz"
ENDS_AFTER_S = 120  # past its time a door is stopped: reading a large corpus takes a while


def main() -> int:
    """0 where no door has a fault."""
    seconds = int(sys.argv[1]) if len(sys.argv) > 1 else DEFAULT_S
    folder = sys.argv[2] if len(sys.argv) > 2 else FOLDER
    return max([fuzzed(name, seconds, folder) for name in DOORS])


def fuzzed(name: str, seconds: int, folder: str) -> int:
    """One door, in a process of its own, the next where that is full; 1 where a fault is kept, or it did not end."""
    sys.stdout.write(f"{name}: {seconds} s\n")
    ends_s = time.monotonic() + seconds
    codes: list[int] = []
    while not codes or (codes[-1] == FULL and time.monotonic() < ends_s):
        sys.stdout.flush()
        codes.append(_fuzzed_once(name, max(1, round(ends_s - time.monotonic())), folder))
    has_fault = any((Path(folder) / name / "found").glob("*.txt"))
    return int(has_fault or any(code not in (0, FULL) for code in codes))


def _fuzzed_once(name: str, seconds: int, folder: str) -> int:
    command = [sys.executable, "-m", "tests.fuzz.fuzzing", name, str(seconds), folder]
    try:
        done = subprocess.run(
            command, stderr=subprocess.PIPE, text=True, errors="replace", check=False, timeout=seconds + ENDS_AFTER_S
        )
    except subprocess.TimeoutExpired:
        sys.stdout.write(f"{name}: did not end\n")
        return 1
    told = [line for line in done.stderr.splitlines() if not line.startswith(("#", "INFO: Instrumenting"))]
    sys.stdout.write("\n".join(told[-1 if done.returncode in (0, FULL) else -40 :]) + "\n")
    return done.returncode


if __name__ == "__main__":
    sys.exit(main())
