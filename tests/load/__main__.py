"""The service under load: `sh tests/run load [MINUTES]`, ten by default; ends with 1 where a bound does not hold.

All on loopback, the service as `discwright serve` starts it, its rates by address set so high that they refuse nobody.
First its capacity for mixed traffic: clients who wait for each answer, more and more of them, until no more is served;
then the best number of them for a minute or a tenth of MINUTES, and until the orders they placed are planned: what
can go on. Then MINUTES of arrivals at fixed times, 80 of a hundred of that capacity; then twice the capacity, for a
minute or a tenth of MINUTES; then the 80 of a hundred once more. The client shares the processors with the service: how
much it takes, and how much all else on the machine, stands beside each figure. Judged are times on a quiet machine
alone.
"""

import asyncio
import gc
import random
import sys
import tempfile
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.bench.opponents.table import say, say_table
from tests.load.loops import Client
from tests.load.mix import KINDS, Shelf
from tests.load.phases import Lengths, run_course
from tests.load.serving import serving
from tests.load.telling import tell_course

DEFAULT_MINUTES = 10.0
SEED = 1


def lengths_of(minutes: float) -> Lengths:
    """How long the parts take, for a steady load of so many minutes."""
    steady_s = 60 * minutes
    return Lengths(
        step_s=min(10.0, max(2.0, steady_s / 20)),
        capacity_s=min(60.0, max(5.0, steady_s / 10)),
        steady_s=steady_s,
        overload_s=min(60.0, max(5.0, steady_s / 10)),
        after_s=min(30.0, max(5.0, steady_s / 10)),
    )


def main(minutes: float) -> int:
    """1 where a bound does not hold."""
    say(__doc__ or "")
    say_table(["kind", "of 100", "why"], [[kind.name, str(kind.weight), kind.why] for kind in KINDS])
    with tempfile.TemporaryDirectory() as folder, serving(Path(folder)) as service:
        gc.freeze()
        client = Client(service.port, Shelf(service.key), random.Random(SEED))
        course = asyncio.run(run_course(service, client, lengths_of(minutes)))
        missed = tell_course(course) + [f"the log says: {line}" for line in service.faults()]
    for one in missed:
        say(f"DOES NOT HOLD: {one}")
    say("" if missed else "every bound holds")
    return int(bool(missed))


if __name__ == "__main__":
    sys.exit(main(float(sys.argv[1]) if len(sys.argv) > 1 else DEFAULT_MINUTES))
