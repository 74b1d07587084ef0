"""The walk's profile: each stage's share of it, the ten functions that take most, and instructions counted.

    .venv-tests/bin/python tests/bench/profile_walk.py [NOTES [CUTTER]] [--instructions]     by default 2000 fibre-laser

Stages are in processor time, medians of TIMES. cProfile makes calls dear, so its table says where to look, not how
long it takes. With --instructions, valgrind's callgrind counts those of both sides of the comparison with the plain
way, less what their set-up takes: they do not depend on what else the machine does. It takes some minutes.
"""

import argparse
import cProfile
import pstats
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from statistics import median

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import Cutter, Movement, shipped_cutter
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.plain_way import plain_from_bytes
from tests.bench.opponents.table import say, say_table
from tests.bench.opponents.walk_stages import our_drawings, stages_of, whole_walk

TOP = Path(__file__).resolve().parents[2]
TIMES = 5
MOST_SHOWN = 10
MILLION = 1_000_000
WARM_NOTES = 40
SIDES = ("neither", "plain", "ours")
COUNTED_S = 1_800  # callgrind runs a program some fifty times slower


def say_stages(tune: bytes, movement: Movement, cutter: Cutter) -> None:
    """A row for each stage, the dearest first."""
    took_ms = {}
    for name, job in stages_of(tune, movement, cutter).items():
        times_ms = []
        for _ in range(TIMES + 1):
            begun_s = time.process_time()
            job()
            times_ms.append(1000 * (time.process_time() - begun_s))
        took_ms[name] = median(times_ms[1:])
    whole_ms = sum(took_ms.values())
    dearest = sorted(took_ms.items(), key=lambda one: -one[1])
    rows = [[name, f"{each:.1f} ms", f"{each / whole_ms:.1%}"] for name, each in [*dearest, ("together", whole_ms)]]
    say_table(["stage", "takes", "of all"], rows)


def say_functions(tune: bytes, movement: Movement, cutter: Cutter) -> None:
    """The functions that take most by themselves, without what they call."""
    profile = cProfile.Profile(time.process_time)
    profile.runcall(whole_walk, tune, movement, cutter)
    stats = pstats.Stats(profile).stats  # type: ignore[attr-defined]
    rows = []
    for (file, line, name), (_, calls, own_s, all_s, _) in sorted(stats.items(), key=lambda one: -one[1][2])[
        :MOST_SHOWN
    ]:
        place = f"{_short(file)}:{line} {name}" if line else name
        rows.append([place, f"{calls}", f"{1000 * own_s:.0f} ms", f"{1000 * all_s:.0f} ms"])
    say_table(["function", "calls", "itself", "with what it calls"], rows)


def _short(file: str) -> str:
    """A file as the project or its library knows it."""
    path = Path(file)
    if path.is_relative_to(TOP) and "site-packages" not in path.parts:
        return str(path.relative_to(TOP))
    return "/".join(path.parts[-2:])


def run_side(side: str, count: int, cutter: Cutter) -> None:
    """One side, from the tune to disc.dxf and disc.svg, in a process whose instructions are counted.

    A small disc first, by both ways: what is imported late is set-up.
    """
    plain_from_bytes(large_tune(WARM_NOTES), large_movement(WARM_NOTES), cutter)
    our_drawings(large_tune(WARM_NOTES), large_movement(WARM_NOTES), cutter)
    tune, movement = large_tune(count), large_movement(count)
    if side == "plain":
        plain_from_bytes(tune, movement, cutter)
    if side == "ours":
        our_drawings(tune, movement, cutter)


def instructions(side: str, count: int, cutter_id: str) -> int:
    """What callgrind counts of a process that does one side, or only sets up."""
    with tempfile.TemporaryDirectory() as folder:
        kept = Path(folder) / "counted"
        counting = ["valgrind", "--tool=callgrind", f"--callgrind-out-file={kept}"]
        command = [*counting, sys.executable, __file__, str(count), cutter_id, "--side", side]
        subprocess.run(command, check=True, capture_output=True, timeout=COUNTED_S, env=_same_each_time())
        lines = kept.read_text(encoding="utf-8", errors="replace").splitlines()
        return sum(int(line.split()[1]) for line in lines if line.startswith("totals:"))


def _same_each_time() -> dict[str, str]:
    """Sets in the same order and no threads of numpy's own, or counts would differ from run to run."""
    return {"PYTHONHASHSEED": "0", "OPENBLAS_NUM_THREADS": "1", "PATH": "/usr/bin:/bin"}


def say_instructions(count: int, cutter_id: str) -> None:
    """Both sides' instructions, and their ratio."""
    if shutil.which("valgrind") is None:
        say("instructions are not counted: valgrind is not on the PATH (Debian: apt-get install valgrind)")
        return
    set_up, plain, ours = (instructions(side, count, cutter_id) for side in SIDES)
    rows = [
        ["the plain way", f"{(plain - set_up) / MILLION:.0f}"],
        ["ours", f"{(ours - set_up) / MILLION:.0f}"],
        ["set-up, which neither holds", f"{set_up / MILLION:.0f}"],
    ]
    say_table(["tune to DXF and SVG", "million instructions"], rows)
    say(f"the plain way takes {(plain - set_up) / (ours - set_up):.2f} times ours")


def main(count: int, cutter_id: str) -> None:
    """Print stages and functions."""
    tune, movement, cutter = large_tune(count), large_movement(count), shipped_cutter(cutter_id)
    say(f"{count} notes, {cutter_id}")
    say_stages(tune, movement, cutter)
    say_functions(tune, movement, cutter)


if __name__ == "__main__":
    asked = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    asked.add_argument("notes", nargs="?", type=int, default=2_000)
    asked.add_argument("cutter", nargs="?", default="fibre-laser")
    asked.add_argument("--instructions", action="store_true")
    asked.add_argument("--side", choices=SIDES, help=argparse.SUPPRESS)
    given = asked.parse_args()
    if given.side:
        run_side(given.side, given.notes, shipped_cutter(given.cutter))
    else:
        main(given.notes, given.cutter)
        if given.instructions:
            say_instructions(given.notes, given.cutter)
