"""The supervisor, with small programs: what dies is started again, what cannot run ends all."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from service.supervisor import KILL_AFTER_S, Program, supervise

TOP = Path(__file__).parents[2]
# Each program writes its number into a file of its own, then does what its line says.
STARTS = 'echo $$ >> "$0"; '


def program(folder: Path, name: str, line: str) -> Program:
    return Program(name=name, command=["sh", "-c", STARTS + line, str(folder / name)])


def starts(folder: Path, name: str) -> list[int]:
    path = folder / name
    return [int(pid) for pid in path.read_text().split()] if path.exists() else []


def supervisor(folder: Path, *lines: str, kill_after_s: float = KILL_AFTER_S) -> "subprocess.Popen[bytes]":
    """A supervisor in a process of its own, of programs a, b, … that do what their lines say."""
    source = (
        "import sys; from pathlib import Path; from tests.service.test_supervisor import program; "
        f"from service import supervisor; supervisor.KILL_AFTER_S = {kill_after_s}; "
        "folder = Path(sys.argv[1]); "
        "programs = [program(folder, 'abc'[n], line) for n, line in enumerate(sys.argv[2:])]; "
        "sys.exit(supervisor.supervise(programs, stop_within_s=2))"
    )
    return subprocess.Popen([sys.executable, "-c", source, str(folder), *lines], cwd=TOP)


def wait_for_starts(folder: Path, name: str, count: int) -> list[int]:
    give_up_at_s = time.monotonic() + 60
    while len(found := starts(folder, name)) < count:
        assert time.monotonic() < give_up_at_s, found
        time.sleep(0.05)
    return found


def test_a_program_that_cannot_run_ends_the_others_and_tells_its_code(tmp_path: Path) -> None:
    begun_s = time.monotonic()

    code = supervise([program(tmp_path, "a", "exec sleep 60"), program(tmp_path, "b", "exit 2")], stop_within_s=5)

    assert code == 2
    assert time.monotonic() - begun_s < 30
    assert len(starts(tmp_path, "b")) == 1


def test_one_that_dies_is_started_again_after_pauses_that_grow(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    running = supervisor(tmp_path, "exit 1")
    begun_s = time.monotonic()

    wait_for_starts(tmp_path, "a", 4)

    # pauses of 0.5, 1 and 2 s stand between four starts
    assert time.monotonic() - begun_s >= 3.5
    running.send_signal(signal.SIGTERM)
    assert running.wait(30) == 0


def test_a_program_that_ran_before_is_started_again_whatever_its_code(tmp_path: Path) -> None:
    running = supervisor(
        tmp_path, 'test $(wc -l < "$0") -eq 1 && exit 1; test $(wc -l < "$0") -eq 2 && exit 2; sleep 60'
    )

    wait_for_starts(tmp_path, "a", 3)

    running.send_signal(signal.SIGINT)
    assert running.wait(30) == 0


def test_a_signal_reaches_each_program_once_and_all_end_before_the_supervisor(tmp_path: Path) -> None:
    line = "trap 'echo 0 >> \"$0\"; sleep 1; exit 0' TERM; while :; do sleep 0.1; done"
    running = supervisor(tmp_path, line, line)
    pids = [wait_for_starts(tmp_path, name, 1)[0] for name in "ab"]

    running.send_signal(signal.SIGTERM)

    assert running.wait(30) == 0
    assert [starts(tmp_path, name)[1:] for name in "ab"] == [[0], [0]]
    for pid in pids:
        with pytest.raises(ProcessLookupError):
            os.kill(pid, 0)


def test_one_that_will_not_stop_is_killed_after_its_time(tmp_path: Path) -> None:
    running = supervisor(tmp_path, "trap '' TERM; while :; do sleep 0.1; done", kill_after_s=1.5)
    wait_for_starts(tmp_path, "a", 1)
    begun_s = time.monotonic()

    running.send_signal(signal.SIGTERM)

    assert running.wait(60) == 0
    assert time.monotonic() - begun_s >= 3.5  # 2 s to stop, and 1.5 more
    assert KILL_AFTER_S == 10  # and 20 s to stop: what compose.yaml waits before it kills all


def test_the_first_program_starts_before_what_is_prepared_and_the_others_after(tmp_path: Path) -> None:
    seen: list[tuple[int, int]] = []

    def prepare() -> None:
        wait_for_starts(tmp_path, "a", 1)
        seen.append((len(starts(tmp_path, "a")), len(starts(tmp_path, "b"))))

    programs = [program(tmp_path, "a", "exec sleep 60"), program(tmp_path, "b", "exit 2")]
    code = supervise(programs, stop_within_s=5, prepare=prepare)

    assert (seen, code) == ([(1, 0)], 2)
    assert len(starts(tmp_path, "b")) == 1


def test_where_preparing_fails_the_first_program_is_stopped_and_no_other_starts(tmp_path: Path) -> None:
    def prepare() -> None:
        wait_for_starts(tmp_path, "a", 1)
        raise LookupError("no database")

    programs = [program(tmp_path, name, "exec sleep 60") for name in "ab"]
    begun_s = time.monotonic()
    with pytest.raises(LookupError, match=r"^no database$"):
        supervise(programs, stop_within_s=30, prepare=prepare)

    assert time.monotonic() - begun_s < 20  # it was told to stop, and waited for
    assert starts(tmp_path, "b") == []
