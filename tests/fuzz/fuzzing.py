"""One door fuzzed by atheris, led by what of layout/ an input reaches.

`python -m tests.fuzz.fuzzing DOOR SECONDS FOLDER`, in the environment that `sh tests/run fuzz` makes.
What is found does not stop the run: the first input of each kind of fault is kept in FOLDER/found with its story, and
the run goes on. The corpus grows in FOLDER/corpus. Ends with FULL where the process has grown, by some 15 kB an input,
till it must begin anew, from what is in the corpus by then; else with 1 where something was found.
"""

import logging
import os
import random
import sys
import time
from importlib import import_module
from pathlib import Path
from typing import Any

import atheris  # type: ignore[import-untyped,import-not-found,unused-ignore]  # in an environment of its own

from tests.fuzz.again import judged_again
from tests.fuzz.door import FULL, LARGE, SLOW, Door, Fault, fault_of, memory_mib

LONGEST_BYTES = 400_000
HANGS_AFTER_S = 60  # libFuzzer's own watch, on the clock of the wall: for what never ends
FULL_MIB = 1500.0  # below libFuzzer's own limit, so that an input that is too large is still seen
OURS_OF_TEN = 7  # of ten changes so many know the format; the others are libFuzzer's


def main() -> None:
    """Fuzz until the time is over."""
    name, seconds, folder = sys.argv[1], int(sys.argv[2]), Path(sys.argv[3]) / sys.argv[1]
    with atheris.instrument_imports(include=["layout"]):
        door: Door = import_module(f"tests.fuzz.{name}_door").DOOR
    found, corpus = folder / "found", folder / "corpus"
    for made in (found, corpus):
        made.mkdir(parents=True, exist_ok=True)
    logging.getLogger("ezdxf").setLevel(logging.CRITICAL)
    for number, seed in enumerate(door.seeds):
        (corpus / f"seed-{number}").write_bytes(seed)
    ends_s = time.monotonic() + seconds
    tried = 0

    def try_one(data: bytes) -> None:
        nonlocal tried
        is_full = memory_mib("VmRSS") > FULL_MIB
        if is_full or time.monotonic() > ends_s:
            _end(name, tried, found, ends_with=FULL if is_full else 0)
        tried += 1
        fault = fault_of(door, data)
        if fault is not None and fault.kind in (SLOW, LARGE):
            fault = judged_again(name, data)
        if fault is not None:
            _keep(found, door.suffix, data, fault)

    def changed(data: bytes, most: int, seed: int) -> bytes:
        dice = random.Random(seed)
        if dice.randrange(10) >= OURS_OF_TEN:
            return bytes(atheris.Mutate(data, most))
        return door.mutate(data, dice)[:most]

    options = [f"-max_len={LONGEST_BYTES}", f"-timeout={HANGS_AFTER_S}", "-rss_limit_mb=2000", "-len_control=0"]
    atheris.Setup(
        [sys.argv[0], str(corpus), *options, f"-artifact_prefix={found}/", "-print_final_stats=1"],
        try_one,
        custom_mutator=changed,
    )
    atheris.Fuzz()


def _keep(found: Path, suffix: str, data: bytes, fault: Fault) -> None:
    """The first input of a kind; of later ones the shortest."""
    kept = found / f"{fault.kind}{suffix}"
    if not kept.exists() or len(data) < kept.stat().st_size:
        if not kept.exists():
            sys.stderr.write(f"FOUND {fault.kind}\n{fault.told}\n")
        kept.write_bytes(data)
        kept.with_suffix(".txt").write_text(fault.told)


def _end(name: str, tried: int, found: Path, *, ends_with: int) -> Any:
    kinds = sorted(path.stem for path in found.glob("*.txt"))
    sys.stderr.write(f"{name}: {tried} inputs, {time.process_time():.0f} s of the processor's time, ")
    sys.stderr.write(f"found: {', '.join(kinds) or 'nothing'}\n")
    sys.stderr.flush()
    os._exit(ends_with or bool(kinds))  # libFuzzer's loop knows no other way out


if __name__ == "__main__":
    main()
