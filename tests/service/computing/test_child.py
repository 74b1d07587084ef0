"""A computing child: a real process that lays out, fails, is killed, and never says a word out of turn."""

import os
import signal
import struct
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest

from layout import walk
from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.errors import MidiReadError
from service.children.child_process import ChildEndedError, ChildProcess, ChildTooLongError
from service.children.frames import read_frame, write_frame
from service.computing import children
from service.computing.children import CHILD, GROWN_MIB, LEAST_SHARE, ComputingChild
from service.computing.messages import (
    Answer,
    Asked,
    ChildSetup,
    Kind,
    Want,
    Work,
    answer_from_bytes,
    asked_as_bytes,
    setup_as_bytes,
)
from tests.faults.fleet import wait_for
from tests.faults.ordering import tune_called
from tests.service.processes import is_alive
from tests.service.shop import TUNE

MEMORY_MIB = 300
LONG_S = 30.0
DISCS = read_settings('{"discs": 2, "speed": {"mode": "fit", "least": 0.5}}')
SETUP = ChildSetup(planner="tests.faults.planner", memory_mib=MEMORY_MIB)


@pytest.fixture
def child() -> Iterator[ComputingChild]:
    """One of the test's own, to be killed or grown."""
    started = ComputingChild(SETUP)
    yield started
    started.end()


@pytest.fixture(scope="module")
def kept_child() -> Iterator[ComputingChild]:
    """One that many tests use, for starting takes a second."""
    started = ComputingChild(SETUP)
    yield started
    started.end()


@pytest.fixture(scope="module")
def walking_child() -> Iterator[ComputingChild]:
    """One that computes."""
    started = ComputingChild(ChildSetup(planner="layout.walk", memory_mib=2000))
    yield started
    started.end()


def work_of(tune: bytes) -> Work:
    return Work(
        tune=tune,
        movement=shipped_movement("mossbrook-67"),
        cutter=shipped_cutter("fibre-laser"),
        settings=read_settings("{}"),
        is_timed=True,
        most_s=LONG_S,
    )


def discs_of(tune: bytes, name: str = "") -> Asked:
    return Asked(want=Want.DISCS, work=work_of(tune), name=name or tune.hex())


def ask(child: ComputingChild, tune: bytes, within_s: float = LONG_S) -> Answer:
    return child.ask(discs_of(tune), within_s)


def test_a_child_lays_out_what_this_process_would(walking_child: ComputingChild) -> None:
    work = replace(work_of(TUNE), settings=DISCS)

    answer = walking_child.ask(Asked(want=Want.DISCS, work=work, name="two"), LONG_S)

    here = walk.lay_out_discs(TUNE, work.movement, work.cutter, DISCS, time.monotonic)
    assert answer.kind is Kind.DONE
    assert [dict(disc.told) for disc in answer.discs] == [walk.told_of(disc) for disc in here]
    for name in ("title", "fingerprint", "disc_number", "disc_count", "good_to_cut", "stopped"):
        assert [getattr(disc, name) for disc in answer.discs] == [getattr(disc, name) for disc in here]


@pytest.mark.parametrize("name", ["two", "another"])
def test_its_files_are_those_this_process_would_make_at_hand_or_laid_out_anew(
    walking_child: ComputingChild, name: str
) -> None:
    work = replace(work_of(TUNE), settings=DISCS)
    walking_child.ask(Asked(want=Want.DISCS, work=work, name="two"), LONG_S)

    asked = Asked(want=Want.FILES, work=work, name=name, disc_number=2, not_good="for the wall")
    answer = walking_child.ask(asked, LONG_S)

    here = walk.lay_out_discs(TUNE, work.movement, work.cutter, DISCS, time.monotonic)
    assert dict(answer.files) == walk.files_of(here[1], not_good="for the wall")
    assert [dict(disc.told) for disc in answer.discs] == ([] if name == "two" else [walk.told_of(here[1])])


def test_what_is_told_with_a_reason_is_what_this_process_would_tell(walking_child: ComputingChild) -> None:
    work = work_of(TUNE)

    answer = walking_child.ask(Asked(want=Want.TOLD, work=work, name="why", not_good="for the wall"), LONG_S)

    [here] = walk.lay_out_discs(TUNE, work.movement, work.cutter, work.settings, time.monotonic)
    assert dict(answer.files) == walk.told_of(here, not_good="for the wall")


def test_a_message_that_is_none_is_told_as_a_fault_and_the_child_goes_on(kept_child: ComputingChild) -> None:
    answer = answer_from_bytes(kept_child._process.ask(b"no message", LONG_S))

    assert answer.kind is Kind.FAILED
    assert answer.trace.startswith("Traceback")
    assert ask(kept_child, tune_called("Harvest")).kind is Kind.DONE


def test_a_tune_that_cannot_be_read_is_refused_with_the_error_itself(walking_child: ComputingChild) -> None:
    answer = ask(walking_child, b"no tune")

    with pytest.raises(MidiReadError) as raised:
        walk.lay_out_discs(b"no tune", *documents())
    assert answer.kind is Kind.REFUSED
    assert isinstance(answer.error, MidiReadError)
    assert vars(answer.error) == vars(raised.value)


def documents() -> tuple[object, ...]:
    work = work_of(b"")
    return work.movement, work.cutter, work.settings


def test_a_fault_of_the_program_is_told_with_its_trace_and_the_child_goes_on(kept_child: ComputingChild) -> None:
    answer = ask(kept_child, tune_called("do:divide;"))

    assert answer.kind is Kind.FAILED
    assert "ZeroDivisionError: of the test" in answer.trace
    assert ask(kept_child, tune_called("Harvest")).kind is Kind.DONE


def test_work_that_fills_memory_is_told_as_too_large_and_the_child_goes_on(kept_child: ComputingChild) -> None:
    assert ask(kept_child, tune_called("do:fill;")).kind is Kind.TOO_LARGE
    assert ask(kept_child, tune_called("Harvest")).kind is Kind.DONE


def test_a_child_whose_memory_stays_full_after_work_that_was_too_large_is_of_no_more_use(child: ComputingChild) -> None:
    answer = ask(child, tune_called(f"do:grow-too-large {int(GROWN_MIB) + 50};"))

    assert (answer.kind, child.is_of_use) == (Kind.TOO_LARGE, False)


def test_an_idle_child_that_something_else_has_ended_is_of_no_more_use(child: ComputingChild) -> None:
    os.kill(child.pid, signal.SIGKILL)

    wait_for(lambda: not child.is_of_use, within_s=LONG_S)


def test_a_stopped_child_is_given_up_though_its_pipe_has_no_room_for_what_is_asked(child: ComputingChild) -> None:
    os.kill(child.pid, signal.SIGSTOP)

    with pytest.raises(ChildTooLongError):  # a pipe holds 64 KiB (pipe(7))
        ask(child, tune_called("Harvest") + bytes(4_000_000), within_s=0.5)


def test_a_stopped_child_is_taken_to_compute_a_little(child: ComputingChild) -> None:
    os.kill(child.pid, signal.SIGSTOP)
    computed_s = child.stopwatch()
    time.sleep(0.5)

    assert computed_s() >= LEAST_SHARE * 0.5


def test_children_that_end_in_any_way_leave_no_file_open() -> None:
    before = len(list(Path("/proc/self/fd").iterdir()))
    for deed in ("exit 3", "segfault", "spin"):
        child = ComputingChild(SETUP)
        with pytest.raises((ChildEndedError, ChildTooLongError)):
            ask(child, tune_called(f"do:{deed};"), within_s=1.0 if deed == "spin" else LONG_S)

    assert len(list(Path("/proc/self/fd").iterdir())) == before


def test_a_child_that_says_what_is_no_message_at_its_start_is_ended(monkeypatch: pytest.MonkeyPatch) -> None:
    started: list[int] = []
    lines = "import sys, time; sys.stdout.buffer.write(bytes(7) + b'\\x01?'); sys.stdout.flush(); time.sleep(60)"
    monkeypatch.setattr(children, "CHILD", (sys.executable, "-c", lines))
    monkeypatch.setattr(children, "ChildProcess", lambda command: noted(ChildProcess(command), started))

    with pytest.raises(struct.error):
        ComputingChild(SETUP)

    assert not is_alive(started[0])


def noted(process: ChildProcess, started: list[int]) -> ChildProcess:
    started.append(process.pid)
    return process


def test_a_child_that_keeps_memory_is_of_no_more_use(child: ComputingChild) -> None:
    ask(child, tune_called(f"do:grow {int(GROWN_MIB) - 50};"))
    before = child.is_of_use
    ask(child, tune_called("do:grow 100;"))

    assert (before, child.is_of_use) == (True, False)


@pytest.mark.parametrize(("deed", "how"), [("exit 3", "ended with code 3"), ("segfault", "was ended by SIGSEGV")])
def test_a_child_that_ends_is_told_by_how_it_did_and_is_of_no_more_use(
    child: ComputingChild, deed: str, how: str
) -> None:
    with pytest.raises(ChildEndedError, match=rf"^its process {how}$"):
        ask(child, tune_called(f"do:{deed};"))

    assert not child.is_of_use


def test_work_that_takes_too_long_is_killed_in_time(child: ComputingChild) -> None:
    begun_s = time.monotonic()

    with pytest.raises(ChildTooLongError):
        ask(child, tune_called("do:spin;"), within_s=1.0)

    assert 1.0 <= time.monotonic() - begun_s < LONG_S
    assert not is_alive(child.pid)
    assert not child.is_of_use


def test_what_libraries_print_is_no_answer(capfd: pytest.CaptureFixture[str]) -> None:
    child = ComputingChild(SETUP)  # here, so that it writes where this test reads
    answer = ask(child, tune_called("do:print;"))
    child.end()

    assert answer.kind is Kind.DONE
    printed = capfd.readouterr()
    assert printed.out == ""
    assert "and so does one in C" in printed.err


def test_signals_to_the_group_do_not_end_a_child(child: ComputingChild) -> None:
    for number in (signal.SIGINT, signal.SIGTERM):
        os.kill(child.pid, number)

    assert ask(child, tune_called("Harvest")).kind is Kind.DONE


def test_the_seconds_that_a_child_computes_are_told_by_its_own_processor_time(child: ComputingChild) -> None:
    sleeping = child.stopwatch()
    ask(child, tune_called("do:sleep 0.6;"))
    slept_s = sleeping()
    spinning = child.stopwatch()
    with pytest.raises(ChildTooLongError):
        ask(child, tune_called("do:spin;"), within_s=1.0)

    assert slept_s < 0.5
    assert spinning() >= 1.0  # by the time that passes, as the child is gone


def test_a_child_ends_with_its_parent_even_while_it_computes() -> None:
    lines = (
        "import sys\n"
        "from service.computing.children import ComputingChild\n"
        "from tests.service.computing.test_child import SETUP, discs_of, tune_called\n"
        "child = ComputingChild(SETUP)\n"
        "print(child.pid, flush=True)\n"
        "child.ask(discs_of(tune_called('do:spin;')), 60.0)\n"
    )
    with subprocess.Popen([sys.executable, "-c", lines], stdout=subprocess.PIPE, text=True) as parent:
        assert parent.stdout is not None
        pid = int(parent.stdout.readline())
        time.sleep(0.5)  # what is asked is on its way, or computed
        lived = is_alive(pid)
        parent.kill()

    assert lived
    wait_for(lambda: not is_alive(pid), within_s=LONG_S)


def test_a_child_whose_pipe_is_let_go_ends_with_code_0_between_its_answers() -> None:
    with subprocess.Popen(CHILD, stdin=subprocess.PIPE, stdout=subprocess.PIPE) as process:
        assert process.stdin is not None
        assert process.stdout is not None
        answers = []
        for message in (setup_as_bytes(SETUP), asked_as_bytes(discs_of(tune_called("Harvest")))):
            write_frame(process.stdin, message)
            answers.append(answer_from_bytes(read_frame(process.stdout) or b""))
        process.stdin.close()
        code = process.wait(LONG_S)

    assert ([answer.kind for answer in answers], code) == ([Kind.WARM, Kind.DONE], 0)
