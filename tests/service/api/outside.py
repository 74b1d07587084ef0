"""schemathesis let loose on the service as it runs, knowing its API document alone."""

import os
import subprocess
import sys
from pathlib import Path

from tests.service.api.running import Running

HOOKS = "tests.service.api.outside_hooks"
CONFIG = Path(__file__).with_name("outside.toml")
TOP = Path(__file__).parents[3]


def try_from_outside(service: Running, *asked: str, with_key: bool, within_s: float) -> str:
    """Run every check of schemathesis; gives what it told, "" where nothing was found.

    Args:
        service: What is tried.
        asked: Further arguments: phases, how many examples, the seed.
        with_key: Whether requests show a key that may do everything.
        within_s: How long it may take.
    """
    key = ("--header", f"Authorization: Bearer {service.key}") if with_key else ()
    command = [
        *(str(Path(sys.executable).with_name("schemathesis")), "--config-file", str(CONFIG)),
        *("run", f"{service.url}/openapi.json", *key),
        *("--checks", "all", "--continue-on-failure", "--no-shrink", "--workers", "2", "--warnings", "off"),
        *("--request-timeout", "30", *asked),
    ]
    environment = {**os.environ, "SCHEMATHESIS_HOOKS": HOOKS, "PYTHONPATH": str(TOP), "COLUMNS": "120"}
    done = subprocess.run(
        command, env=environment, capture_output=True, text=True, timeout=within_s, cwd=service.log.parent, check=False
    )
    return "" if done.returncode == 0 else done.stdout[-20_000:] + done.stderr[-2_000:]


def failures_in(service: Running) -> list[str]:
    """Lines of the log that tell that the service failed."""
    return [line for line in service.log.read_text().splitlines() if "Traceback" in line or " failed" in line]
