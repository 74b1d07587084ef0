"""Tables on standard output, and the ratios of all timings in one list at the end of a run."""

import json
import os
import sys
from collections.abc import Sequence
from pathlib import Path

RATIOS = "BENCH_RATIOS"  # names the file that collects them; unset where one script runs by itself


def say(text: str = "") -> None:
    sys.stdout.write(text + "\n")
    sys.stdout.flush()


def say_table(heads: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Columns as wide as their widest cell, the first to the left and the others to the right."""
    widths = [max(len(row[column]) for row in (heads, *rows)) for column in range(len(heads))]
    for row in (heads, ["-" * width for width in widths], *rows):
        first, *others = (
            cell.rjust(width) if column else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(row, widths, strict=True))
        )
        say("  ".join([first, *others]).rstrip())
    say()


def told(name: str, measured: float, goal: float | None, *, most: bool) -> None:
    """Say a figure beside its goal, and keep it for the list at the end: nothing fails where it is missed.

    Args:
        name: What was measured, with its unit.
        measured: The figure.
        goal: What it is to reach; None where none is set.
        most: Whether the goal is the most it may be; else it is the least.
    """
    met = None if goal is None else (measured <= goal if most else measured >= goal)
    wanted = "" if goal is None else f"{'at most' if most else 'at least'} {goal:g}"
    row = [name, f"{measured:.2f}", wanted, {None: "", True: "met", False: "missed"}[met]]
    say(f"{name}: {row[1]}" + (f" (goal: {wanted}; {row[3]})" if wanted else ""))
    if path := os.environ.get(RATIOS):
        with Path(path).open("a", encoding="utf-8") as kept:
            kept.write(json.dumps(row) + "\n")


def say_all_told(path: Path) -> None:
    """The list of what the scripts of a run told."""
    rows = [json.loads(line) for line in path.read_text(encoding="utf-8").splitlines()]
    say_table(["figure", "measured", "goal", ""], rows)


if __name__ == "__main__":
    say_all_told(Path(sys.argv[1]))
