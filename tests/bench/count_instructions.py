"""Instructions of each stage of the walk, counted by valgrind's callgrind: two versions compared on a busy machine.

    .venv-tests/bin/python tests/bench/count_instructions.py [NOTES [CUTTER]] [--keep FILE] [--beside FILE]

By default 300 fibre-laser. --keep writes the counts of this version, --beside tells those of another version beside
them. What else the machine does, and how fast it is, do not count: the same version gives the same to a part in some
thousands. Instructions are not time: memory that is waited for is not in them. It takes some minutes; valgrind must be
there (Debian: apt-get install valgrind).
"""

import argparse
import gc
import json
import os
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import shipped_cutter
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.table import say, say_table
from tests.bench.opponents.walk_stages import stages_of

NOTES, CUTTER_ID = 300, "fibre-laser"
# A function of the C library that nothing else here calls. callgrind writes what it counted when it is entered, and
# counts from nothing again: the only word that a Python program has with it. Python must call it without ctypes, whose
# calls callgrind takes for jumps.
MARK = "getsid"
# Sets in the same order, no threads of numpy's own, or counts would differ from run to run.
ENVIRONMENT = {"PYTHONHASHSEED": "0", "OPENBLAS_NUM_THREADS": "1", "PATH": "/usr/bin:/bin"}
MOST_S = 1_800  # callgrind runs a program some fifty times slower
MILLION = 1_000_000


def run_all(notes: int, cutter_id: str) -> None:
    """Every stage once, with a mark before and behind it, in the process that is counted.

    What a stage imports late or keeps was done by a layout before. The names of the stages go to standard output.
    """
    stages = stages_of(large_tune(notes), large_movement(notes), shipped_cutter(cutter_id))
    gc.disable()  # garbage is looked for at moments that another version moves
    for job in stages.values():
        job()
        os.getsid(0)
        job()
        os.getsid(0)
    say(json.dumps(list(stages)))


def counted(notes: int, cutter_id: str) -> dict[str, int]:
    """Instructions of each stage."""
    with tempfile.TemporaryDirectory() as folder:
        kept = Path(folder) / "counted"
        counting = ["valgrind", "--tool=callgrind", f"--callgrind-out-file={kept}", f"--dump-before={MARK}"]
        command = [*counting, sys.executable, __file__, str(notes), cutter_id, "--counted"]
        ran = subprocess.run(command, check=True, capture_output=True, text=True, timeout=MOST_S, env=ENVIRONMENT)
        names = json.loads(ran.stdout)
        # The first mark of a stage ends what was before it, the second the stage.
        return {name: total(kept.with_suffix(f".{2 * place + 2}")) for place, name in enumerate(names)}


def total(written: Path) -> int:
    """The instructions of one file of callgrind's."""
    lines = written.read_text(encoding="utf-8", errors="replace").splitlines()
    return sum(int(line.split()[1]) for line in lines if line.startswith("totals:"))


def say_counts(counts: dict[str, int], beside: dict[str, int] | None) -> None:
    """A row for each stage in the order of the walk, and one for all of them."""
    heads = ["stage", "million instructions"] + (["beside", "ratio"] if beside else [])
    rows = []
    for name, count in [*counts.items(), ("together", sum(counts.values()))]:
        row = [name, f"{count / MILLION:.2f}"]
        if beside:
            other = sum(beside.values()) if name == "together" else beside.get(name, 0)
            row += [f"{other / MILLION:.2f}", f"{count / other:.3f}" if other else "new"]
        rows.append(row)
    say_table(heads, rows)


def main(given: argparse.Namespace) -> None:
    """Count, tell, and keep where asked."""
    if shutil.which("valgrind") is None:
        sys.exit("instructions are not counted: valgrind is not on the PATH (Debian: apt-get install valgrind)")
    beside = json.loads(given.beside.read_text(encoding="utf-8")) if given.beside else None
    counts = counted(given.notes, given.cutter)
    say(f"{given.notes} notes, {given.cutter}")
    say_counts(counts, beside)
    if given.keep:
        given.keep.write_text(json.dumps(counts) + "\n", encoding="utf-8")


if __name__ == "__main__":
    asked = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    asked.add_argument("notes", nargs="?", type=int, default=NOTES)
    asked.add_argument("cutter", nargs="?", default=CUTTER_ID)
    asked.add_argument("--keep", type=Path, metavar="FILE")
    asked.add_argument("--beside", type=Path, metavar="FILE")
    asked.add_argument("--counted", action="store_true", help=argparse.SUPPRESS)
    whole = asked.parse_args()
    if whole.counted:
        run_all(whole.notes, whole.cutter)
    else:
        main(whole)
