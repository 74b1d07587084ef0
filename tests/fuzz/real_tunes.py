"""Mutation fuzz of real music: `python -m tests.fuzz.real_tunes [COUNT [SEED]]`, 20,000 inputs by default.

The public-domain pieces of tests/outside/pieces.py and the demo tune, changed as tests/fuzz/mutated_tunes.py does.
Every input is read; of those that can be, each twentieth is laid out too, with every file. What is wrong is told with
the number of the input, which with the seed is all it takes to have it again; ends 1 then.
"""

import random
import sys
import time
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass, field, replace

from layout.errors import MidiReadError
from layout.read import read_score
from service.demo.compose import demo_tune
from tests.fuzz.answering import walked
from tests.fuzz.door import Door, fault_of
from tests.fuzz.mutated_tunes import mutated_tune
from tests.fuzz.tune_door import DOOR
from tests.outside.pieces import ALL_PIECE_NAMES, public_domain_piece

DEFAULT_COUNT, DEFAULT_SEED = 20_000, 1
WALKED_EVERY = 20
WALKED_S = 15.0  # a quarter of what a search may take in the service


@dataclass(frozen=True, slots=True, kw_only=True)
class Tally:
    """What came of a run: the faults by the number of their input, and how many were answered how."""

    faults: dict[int, str] = field(default_factory=dict)
    counts: Counter[str] = field(default_factory=Counter)


def input_of(pieces: tuple[bytes, ...], seed: int, number: int) -> bytes:
    """The changed piece that a seed and a number name."""
    dice = random.Random(seed * 1_000_003 + number)
    return mutated_tune(dice.choice(pieces), dice)


def tally_of(pieces: tuple[bytes, ...], seed: int, numbers: Iterable[int]) -> Tally:
    """Every input of the numbers answered."""
    tally = Tally()
    whole_walk = replace(DOOR, answer=walked)
    for number in numbers:
        tune = input_of(pieces, seed, number)
        _answer(tally, DOOR, number, tune)
        is_read = _is_read(tune)
        tally.counts["read" if is_read else "refused"] += 1
        if is_read and tally.counts["read"] % WALKED_EVERY == 0:
            _answer(tally, whole_walk, number, tune, WALKED_S)
            tally.counts["laid out"] += 1
    return tally


def _answer(tally: Tally, door: Door, number: int, tune: bytes, most_cpu_s: float = 2.0) -> None:
    fault = fault_of(door, tune, most_cpu_s)
    if fault is not None:
        tally.faults[number] = f"{fault.kind}: {fault.told}"


def _is_read(tune: bytes) -> bool:
    try:
        read_score(tune)
    except MidiReadError:
        return False
    return True


def main() -> int:
    """The whole run; 1 where something is wrong."""
    count, seed = (
        int(sys.argv[place]) if len(sys.argv) > place else default
        for place, default in ((1, DEFAULT_COUNT), (2, DEFAULT_SEED))
    )
    pieces = (demo_tune(), *map(public_domain_piece, ALL_PIECE_NAMES))
    begun_s = time.process_time()
    tally = tally_of(pieces, seed, range(count))
    for number, told in tally.faults.items():
        sys.stdout.write(f"input {number} of seed {seed}: {told}\n")
    counted = ", ".join(f"{many} {what}" for what, many in sorted(tally.counts.items()))
    took_s = time.process_time() - begun_s
    sys.stdout.write(f"{count} inputs of {len(pieces)} pieces, seed {seed}: {counted}; {len(tally.faults)} faults")
    sys.stdout.write(f"; {took_s:.0f} s of the processor's time\n")
    return int(bool(tally.faults))


if __name__ == "__main__":
    sys.exit(main())
