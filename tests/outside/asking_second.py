"""Problems as JSON for the second opinion of tests.outside.second_formulation, in its own process."""

import json
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import fields
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np

from layout.arrange.problem import Problem

_SCRIPT = Path(__file__).with_name("second_formulation.py")


class Opinion(NamedTuple):
    """The worth of the best choice found and the bound; None for both where no choice keeps the rules."""

    worth: int | None
    bound: int | None


class SecondOpinion:
    """The other process, asked one problem after the other."""

    def __init__(self, process: "subprocess.Popen[str]") -> None:
        self._process = process

    def of(self, problem: Problem) -> Opinion:
        assert self._process.stdin is not None
        assert self._process.stdout is not None
        self._process.stdin.write(json.dumps(_as_json(problem)) + "\n")
        self._process.stdin.flush()
        return Opinion(*json.loads(self._process.stdout.readline()))


@contextmanager
def second_opinion() -> Iterator[SecondOpinion]:
    """The other process, running; it ends with the block."""
    with subprocess.Popen(
        [sys.executable, str(_SCRIPT)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True
    ) as process:
        try:
            yield SecondOpinion(process)
        finally:
            process.terminate()


def _as_json(problem: Problem) -> dict[str, Any]:
    named: dict[str, Any] = {field.name: getattr(problem, field.name) for field in fields(problem)}
    drive = problem.drive
    return {
        **{name: value.tolist() if isinstance(value, np.ndarray) else value for name, value in named.items()},
        "besides": [[pair.inner_index, pair.outer_index, pair.from_ns, pair.to_ns] for pair in problem.besides],
        "drive": None
        if drive is None
        else {
            "lifts": [[[lift.load, lift.window_ns] for lift in lifts] for lifts in drive.lifts],
            "limit": drive.limit,
        },
    }
