"""Which mutants no type checker lets pass: they count as caught, and no test is run on them."""

import json
from bisect import bisect_right
from pathlib import Path
from shutil import copytree
from subprocess import run
from sys import executable
from tempfile import TemporaryDirectory

MUTATED = Path("mutants")


def caught_by_types(sampled: dict[Path, list[str]]) -> set[str]:
    """The mutants among these with an error of mypy, seen in one run over files that hold no others."""
    caught: set[str] = set()
    with TemporaryDirectory() as folder:
        top = Path(folder)
        copytree("layout", top / "layout", ignore=lambda _, names: [name for name in names if name == "__pycache__"])
        (top / "pyproject.toml").write_text(Path("pyproject.toml").read_text())
        first_lines = {module: write_with(top / module, module, mutants) for module, mutants in sampled.items()}
        told = run(
            [executable, "-m", "mypy", "--output=json", "-p", "layout"],
            cwd=top,
            capture_output=True,
            text=True,
            check=False,
        )
        for line in told.stdout.splitlines():
            fault = json.loads(line)
            starts, mutants = first_lines.get(Path(fault["file"]), ([], []))
            place = bisect_right(starts, fault["line"]) - 1
            if fault["severity"] == "error" and place >= 0 and mutants[place]:
                caught.add(mutants[place])
    return caught


def write_with(path: Path, module: Path, mutants: list[str]) -> tuple[list[int], list[str]]:
    """Writes a mutated module with these of its mutants alone; the lines where each begins, and "" where it ends."""
    kept = {name.rpartition(".")[2]: name for name in mutants}
    lines = (MUTATED / module).read_text().splitlines()
    spans = json.loads((MUTATED / f"{module}.spans").read_text())["spans"]
    written: list[str] = []
    starts, names = [], []
    upto = 0
    for function, (first, last) in sorted(spans.items(), key=lambda item: item[1]):
        written += lines[upto : first - 1]
        upto = last
        if function in kept or function.endswith("_orig"):
            starts += [len(written) + 1, len(written) + last - first + 2]
            names += [kept.get(function, ""), ""]
            written += lines[first - 1 : last]
    written += lines[upto:]
    path.write_text("\n".join(line for line in written) + "\n")
    return starts, names
