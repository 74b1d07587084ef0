"""Looks the pinned packages up among known faults, with pip-audit; where its data cannot be had, says so.

`python tests/audit.py` ends with 1 where a fault of a package we pin is known, and with 0 otherwise.
"""

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

TOP = Path(__file__).parents[1]
PINNED = "docker/requirements-many.txt"
WITHIN_S = 120


def main() -> int:
    """Ask, and tell; gives the exit code."""
    command = [sys.executable, "-m", "pip_audit", "--disable-pip", "--require-hashes", "--format", "json"]
    try:
        asked = subprocess.run(
            [*command, "--requirement", PINNED], cwd=TOP, capture_output=True, text=True, check=False, timeout=WITHIN_S
        )
        packages: list[dict[str, Any]] = json.loads(asked.stdout)["dependencies"]
    except (subprocess.TimeoutExpired, ValueError, KeyError):
        return _say("skipped: no data of known faults can be had from here")
    faults = [
        f"{one['name']} {one['version']}: {fault['id']}, mended in {', '.join(fault['fix_versions']) or 'none yet'}"
        for one in packages
        for fault in one.get("vulns", ())
    ]
    looked_up = sum("skip_reason" not in one for one in packages)
    for fault in faults:
        _say(fault)
    if not looked_up:
        return _say(f"skipped: of none of the {len(packages)} packages any data can be had from here")
    _say(f"{looked_up} of {len(packages)} packages were looked up, {len(faults)} faults are known")
    return 1 if faults else 0


def _say(line: str) -> int:
    sys.stdout.write(f"pip-audit: {line}\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
