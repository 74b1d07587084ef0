"""The image's steps without a container: its RUN lines in a clean folder, then what it would start.

`python tests/faults/long_image.py` prints what it did, and ends with 1 where a step or an answer is wrong. What only
a container has (its user, its own root, its volume) stays unproved here.
"""

import json
import os
import re
import shutil
import socket
import subprocess
import sys
import tempfile
import time
import urllib.error
import urllib.request
from pathlib import Path
from typing import Any

TOP = Path(__file__).resolve().parents[2]
RECIPE = (TOP / "docker" / "Dockerfile").read_text()
HOME_IN_IMAGE = "/opt/discwright"
STEP_WITHIN_S = 1200
START_WITHIN_S = 90.0
STOP_WITHIN_S = 25.0  # s; 20 to stop, and a busy machine
IGNORED = shutil.ignore_patterns("__pycache__", "*.egg-info")


def main() -> int:
    """Follow the steps; gives the exit code."""
    with tempfile.TemporaryDirectory() as text:
        folder = Path(text)
        _copy(folder / "build")
        for step in _steps():
            _say(f"RUN {step}")
            told = step.replace("python -m venv", f"{sys.executable} -m venv").replace(
                HOME_IN_IMAGE, str(folder / "opt")
            )
            ran = subprocess.run(
                ["sh", "-euc", told], cwd=folder / "build", check=False, capture_output=True, timeout=STEP_WITHIN_S
            )
            if ran.returncode:
                _say(ran.stderr.decode()[-2000:])
                return 1
        return _start(folder)


def _copy(build: Path) -> None:
    for line in re.findall(r"^COPY (?!--)(.+) \S+$", RECIPE, re.MULTILINE):
        for name in line.split():
            target = build / name
            target.parent.mkdir(parents=True, exist_ok=True)
            if (TOP / name).is_dir():
                shutil.copytree(TOP / name, target, ignore=IGNORED)
            else:
                shutil.copy(TOP / name, target)


def _steps() -> list[str]:
    """The RUN lines of the first stage, each as one line."""
    joined = RECIPE.replace("\\\n", " ")
    first = joined[: joined.index("FROM", joined.index("FROM") + 1)]
    return [" ".join(line.split()) for line in re.findall(r"^RUN (.+)$", first, re.MULTILINE)]


def _start(folder: Path) -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    entry, arguments = (json.loads(found) for found in re.findall(r"^(?:ENTRYPOINT|CMD) (\[.+\])$", RECIPE, re.M)[-2:])
    command = [str(folder / "opt" / "bin" / entry[0]), *arguments, "--port", str(port)]
    environment = {
        "PATH": f"{folder / 'opt' / 'bin'}{os.pathsep}{os.environ['PATH']}",
        "PYTHONDONTWRITEBYTECODE": "1",
        "DISCWRIGHT_DATA": str(folder / "data"),
        "TMPDIR": str(folder / "tmp"),
    }
    (folder / "tmp").mkdir()
    _say(" ".join(command[1:]))
    with (folder / "log").open("w+") as log:
        begun_s = time.monotonic()
        process = subprocess.Popen(command, cwd=folder, env=environment, stdout=log, stderr=log)
        try:
            alive = _answer(port, "/healthz", process)
            _say(f"/healthz after {time.monotonic() - begun_s:.1f} s: {alive}")
            ready = _answer(port, "/readyz", process)
            _say(f"/readyz: {ready}")
            asked_s = time.monotonic()
        finally:
            process.terminate()
            code = process.wait(STOP_WITHIN_S)
        _say(f"stopped within {time.monotonic() - asked_s:.1f} s, code {code}")
        log.seek(0)
        text = log.read()
    if "Traceback" in text or alive != "ok" or ready != "ready" or code:
        _say(text[-2000:])
        return 1
    return 0


def _answer(port: int, path: str, process: "subprocess.Popen[bytes]") -> str:
    give_up_at_s = time.monotonic() + START_WITHIN_S
    while time.monotonic() < give_up_at_s and process.poll() is None:
        try:
            with urllib.request.urlopen(f"http://127.0.0.1:{port}{path}", timeout=10) as answer:
                told: Any = json.load(answer)
                return str(told["status"])
        except urllib.error.HTTPError as refusal:
            return f"status {refusal.code}"
        except OSError:
            time.sleep(0.1)
    return "no answer"


def _say(line: str) -> None:
    sys.stdout.write(line + "\n")
    sys.stdout.flush()


if __name__ == "__main__":
    sys.exit(main())
