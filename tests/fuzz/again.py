"""A process that judges one input once more: `python -m tests.fuzz.again DOOR SECONDS`, the input on standard input.

What atheris watches takes twice the time and more memory, so what is slow or large there is judged without it.
SECONDS is what it may take of the processor's time. Writes the fault as JSON, or null.
"""

import json
import subprocess
import sys
from dataclasses import asdict

from tests.fuzz.door import MOST_CPU_S, Fault, fault_of

GIVE_UP_S = 50.0  # before libFuzzer's own watch ends whoever waits for it


def judged_again(name: str, data: bytes, most_cpu_s: float = MOST_CPU_S) -> Fault | None:
    """The fault of an input of a door where nothing watches."""
    command = [sys.executable, "-m", "tests.fuzz.again", name, str(most_cpu_s)]
    told = json.loads(subprocess.run(command, input=data, capture_output=True, check=True, timeout=GIVE_UP_S).stdout)
    return None if told is None else Fault(**told)


def main() -> None:
    """Judge it when everything is imported."""
    from tests.fuzz.doors import DOORS  # noqa: PLC0415 -- whoever asks must not have imported what atheris watches

    door = DOORS[sys.argv[1]]
    for seed in door.seeds:
        door.answer(seed)
    fault = fault_of(door, sys.stdin.buffer.read(), float(sys.argv[2]))
    sys.stdout.write(json.dumps(None if fault is None else asdict(fault)))


if __name__ == "__main__":
    main()
