"""schemathesis let loose on the service as it runs, knowing its API document alone."""

import os
import re
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

from tests.service.api.running import Running

HOOKS = "tests.service.api.outside_hooks"
CONFIG = Path(__file__).with_name("outside.toml")
# More threads that parse at a time now and then break Python 3.11 itself (its issue 106905: AST recursion depth).
WORKERS = "1"
TOP = Path(__file__).parents[3]


@dataclass(frozen=True, slots=True, kw_only=True)
class Tried:
    """What came of a try.

    Attributes:
        told: What schemathesis told; "" where nothing was found.
        cases: How many requests it made up and judged.
    """

    told: str
    cases: int


def try_from_outside(service: Running, *asked: str, key: str | None, within_s: float) -> Tried:
    """Run every check of schemathesis.

    Args:
        service: What is tried.
        asked: Further arguments: phases, how many examples, the seed.
        key: The secret of the key that requests show; None for no key.
        within_s: How long it may take.
    """
    shown = () if key is None else ("--header", f"Authorization: Bearer {key}")
    command = [
        *(str(Path(sys.executable).with_name("schemathesis")), "--config-file", str(CONFIG)),
        *("run", f"{service.url}/openapi.json", *shown),
        *("--checks", "all", "--continue-on-failure", "--no-shrink", "--workers", WORKERS, "--warnings", "off"),
        *("--request-timeout", "30", *asked),
    ]
    environment = {**os.environ, "SCHEMATHESIS_HOOKS": HOOKS, "PYTHONPATH": str(TOP), "COLUMNS": "120"}
    done = subprocess.run(
        command, env=environment, capture_output=True, text=True, timeout=within_s, cwd=service.log.parent, check=False
    )
    told = "" if done.returncode == 0 else done.stdout[-20_000:] + done.stderr[-2_000:]
    counted = re.search(r"(\d+) generated", done.stdout)
    return Tried(told=told, cases=int(counted[1]) if counted else 0)


def failures_in(service: Running) -> list[str]:
    """Lines of the log that tell that the service failed."""
    return [line for line in service.log.read_text().splitlines() if "Traceback" in line or " failed" in line]
