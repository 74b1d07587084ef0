"""The child of a worker: a real process that plans, fails, is killed, and never says a word out of turn."""

import os
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from layout.documents import read_settings, shipped_cutter, shipped_movement
from service.background import child as child_module
from service.background import planning_child
from service.background.messages import ChildAnswer, ChildSetup, Kind, PlanRequest, answer_from_json, as_json
from service.background.planning_child import CHILD, PlanningChild
from service.background.stage_watch import StageWatch, TimedKeeper, TimedPlanner
from service.children import child_process
from service.children.child_process import ChildEndedError, ChildTooLongError, ChildUnwantedError
from service.children.frames import read_frame, write_frame
from service.orders.test_tunes import Deed, state_tunes
from service.parts import Parts
from service.store.faults import StoreBusyError
from service.store.holds import FileKeeper
from tests.faults.fleet import wait_for
from tests.faults.ordering import CUTTER, MOVEMENT, PlansHere, tune_called
from tests.faults.planner import QuietPlanner
from tests.service.conftest import parts_of, sqlite_first
from tests.service.processes import is_alive

MEMORY_MIB = 300
LONG_S = 30.0
of_a_process = sqlite_first("what becomes of a process, whatever it asked")


@pytest.fixture(scope="module")
def shared_parts(tmp_path_factory: pytest.TempPathFactory, module_database_url: str | None) -> Iterator[Parts]:
    opened = parts_of(tmp_path_factory.mktemp("shop"), module_database_url)
    yield opened
    opened.store.close()


@pytest.fixture(scope="module")
def setup(shared_parts: Parts) -> ChildSetup:
    return ChildSetup(
        database_url=shared_parts.settings.database_url,
        files_url=shared_parts.settings.files_url,
        planner="tests.faults.planner",
        memory_mib=MEMORY_MIB,
        parent_pid=os.getpid(),
    )


@pytest.fixture
def child(setup: ChildSetup) -> Iterator[PlanningChild]:
    """One of the test's own, to be killed or grown."""
    started = PlanningChild(setup)
    yield started
    started.end()


@pytest.fixture(scope="module")
def kept_child(setup: ChildSetup) -> Iterator[PlanningChild]:
    """One that many tests use, for starting takes a second."""
    started = PlanningChild(setup)
    yield started
    started.end()


@pytest.fixture
def request_for(shared_parts: Parts) -> Callable[[bytes], PlanRequest]:
    def made(tune: bytes) -> PlanRequest:
        digests = FileKeeper(shared_parts.store, shared_parts.files).keep([tune, MOVEMENT, CUTTER, b"{}"])
        names = ("tune", "movement", "cutter", "settings")
        return PlanRequest(order_id="order_1", not_good=None, **dict(zip(names, digests, strict=True)))

    return made


Requests = Callable[[bytes], PlanRequest]


def plan(child: PlanningChild, request: PlanRequest, within_s: float = LONG_S) -> ChildAnswer:
    return child.plan(request, within_s, lambda: True)


def test_a_child_gives_the_plan_that_this_process_would_make(
    kept_child: PlanningChild, request_for: Requests, tmp_path: Path
) -> None:
    tune = tune_called("Harvest")

    answer = plan(kept_child, request_for(tune))

    assert answer.kind is Kind.PLANNED
    assert answer.planned == PlansHere(tmp_path).of(tune)


def test_one_child_serves_many_orders(kept_child: PlanningChild, request_for: Requests) -> None:
    answers = [plan(kept_child, request_for(tune_called(f"Tune {number}"))) for number in range(20)]

    assert {answer.kind for answer in answers} == {Kind.PLANNED}
    assert len({answer.planned.told["discs"][0]["fingerprint"] for answer in answers if answer.planned}) == 20


@of_a_process
def test_what_libraries_print_is_no_answer(
    capfd: pytest.CaptureFixture[str], setup: ChildSetup, request_for: Requests
) -> None:
    child = PlanningChild(setup)  # here, so that it writes where this test reads
    answer = plan(child, request_for(tune_called("do:print;")))
    child.end()

    assert answer.kind is Kind.PLANNED
    printed = capfd.readouterr()
    assert printed.out == ""
    assert "a library says hello" in printed.err
    assert "and so does one in C" in printed.err


def test_a_plan_that_fills_memory_is_refused_and_the_child_lives_on(
    kept_child: PlanningChild, request_for: Requests
) -> None:
    answer = plan(kept_child, request_for(tune_called("do:fill;")))

    assert answer.kind is Kind.REFUSED
    assert answer.reason == (
        "planning needs more than 300 MiB of memory; shorten the tune or split it over discs, "
        "or ask the shop to raise DISCWRIGHT_PLAN_MEMORY_MIB"
    )
    assert plan(kept_child, request_for(tune_called("Harvest"))).kind is Kind.PLANNED


@of_a_process
def test_a_child_that_keeps_memory_is_seen_to_have_grown(child: PlanningChild, request_for: Requests) -> None:
    plan(child, request_for(tune_called(f"do:grow {MEMORY_MIB // 2 - 30};")))
    before = child.has_grown
    plan(child, request_for(tune_called("do:grow 60;")))

    assert (before, child.has_grown) == (False, True)


@of_a_process
def test_each_plan_may_take_as_much_memory_as_the_first(child: PlanningChild, request_for: Requests) -> None:
    kinds = [plan(child, request_for(tune_called(f"do:grow {200 + number};"))).kind for number in range(3)]

    assert kinds == [Kind.PLANNED] * 3  # 600 MiB are kept in the end, though one plan may take 300


@of_a_process
def test_a_child_that_ends_is_told_by_its_code(child: PlanningChild, request_for: Requests) -> None:
    with pytest.raises(ChildEndedError, match=r"^its process ended with code 3$"):
        plan(child, request_for(tune_called("do:exit 3;")))


@of_a_process
def test_a_child_that_is_killed_is_told_by_its_signal(child: PlanningChild, request_for: Requests) -> None:
    with pytest.raises(ChildEndedError, match=r"^its process was ended by SIGSEGV$"):
        plan(child, request_for(tune_called("do:segfault;")))


@of_a_process
def test_a_plan_that_takes_too_long_is_killed_in_time(child: PlanningChild, request_for: Requests) -> None:
    begun_s = time.monotonic()

    with pytest.raises(ChildTooLongError):
        plan(child, request_for(tune_called("do:spin;")), within_s=1.0)

    assert 1.0 <= time.monotonic() - begun_s < 3.0
    assert not is_alive(child.pid)


@of_a_process
def test_a_plan_that_nobody_wants_any_more_is_killed(child: PlanningChild, request_for: Requests) -> None:
    with pytest.raises(ChildUnwantedError):
        child.plan(request_for(tune_called("do:spin;")), LONG_S, lambda: False)

    assert not is_alive(child.pid)


def test_a_fault_of_the_program_is_told_without_its_trace(kept_child: PlanningChild, request_for: Requests) -> None:
    answer = plan(kept_child, request_for(tune_called("do:divide;")))

    assert answer.kind is Kind.REFUSED
    assert answer.reason == (
        "planning met a fault of the program itself (ZeroDivisionError), logged under this order's id; "
        "tell the shop, and order again when it is mended"
    )
    assert "ZeroDivisionError: of the test" in answer.trace


def test_a_tune_that_cannot_be_read_is_refused_with_the_reason(
    kept_child: PlanningChild, request_for: Requests
) -> None:
    answer = plan(kept_child, request_for(b"no tune"))

    assert answer.kind is Kind.REFUSED
    assert answer.reason.startswith("tune, byte 0: found")


def test_an_input_that_was_lost_is_refused_with_what_to_do(kept_child: PlanningChild, request_for: Requests) -> None:
    lost = "0" * 64

    answer = plan(kept_child, replace(request_for(tune_called("Harvest")), tune=lost))

    assert answer.kind is Kind.REFUSED
    assert answer.reason == f"the file {lost} is not in the store of files; restore it from a backup"


@of_a_process
def test_a_planner_that_is_not_there_never_gets_warm(setup: ChildSetup) -> None:
    with pytest.raises(ChildEndedError, match=r"^its process ended with code 1$"):
        PlanningChild(replace(setup, planner="tests.faults.no_planner"))


@of_a_process
def test_a_child_whose_pipe_is_let_go_ends_by_itself_with_code_0(setup: ChildSetup, request_for: Requests) -> None:
    tunes = [tune_called("Harvest"), tune_called("do:fill;"), tune_called("do:divide;"), b"no tune"]

    kinds, code = answers_of_one_let_go(as_json(setup), *[as_json(request_for(tune)) for tune in tunes])

    assert kinds == [Kind.WARM, Kind.PLANNED, Kind.REFUSED, Kind.REFUSED, Kind.REFUSED]
    assert code == 0


def test_a_child_that_is_let_go_before_it_is_told_anything_ends_too() -> None:
    assert answers_of_one_let_go() == ([], 0)


def answers_of_one_let_go(*messages: bytes) -> tuple[list[Kind], int]:
    """What a child answers to each message, and the code it ends with when its pipe is closed after them."""
    with subprocess.Popen(CHILD, stdin=subprocess.PIPE, stdout=subprocess.PIPE) as process:
        assert process.stdin is not None
        assert process.stdout is not None
        answers = []
        for message in messages:
            write_frame(process.stdin, message)
            answers.append(read_frame(process.stdout))
        process.stdin.close()
        code = process.wait(LONG_S)
        assert read_frame(process.stdout) is None
    return [answer_from_json(answer).kind for answer in answers if answer is not None], code


@of_a_process
def test_a_child_dies_with_its_worker_even_while_it_computes(setup: ChildSetup, request_for: Requests) -> None:
    request = request_for(tune_called("do:spin;"))
    parent = subprocess.Popen(
        [sys.executable, "-c", _PARENT, repr(setup), repr(request)], stdout=subprocess.PIPE, text=True
    )
    assert parent.stdout is not None
    pid = int(parent.stdout.readline())
    time.sleep(0.5)  # the order is on its way, or being planned
    lived = is_alive(pid)

    parent.kill()
    parent.wait()
    parent.stdout.close()

    assert lived
    wait_for(lambda: not is_alive(pid), within_s=2.0)


_PARENT = """
import os, sys
from dataclasses import replace
from service.background.messages import ChildSetup, PlanRequest
from service.background.planning_child import PlanningChild
child = PlanningChild(replace(eval(sys.argv[1]), parent_pid=os.getpid()))
sys.stdout.write(f"{child.pid}\\n")
sys.stdout.flush()
child.plan(eval(sys.argv[2]), 60.0, lambda: True)
"""


def test_a_child_whose_store_does_not_answer_says_that_the_order_can_be_planned_later(request_for: Requests) -> None:
    class Away:
        def read(self, digest: str) -> bytes:
            raise StoreBusyError("the file could not be read")

    answer = child_module._planned(request_for(tune_called("Harvest")), QuietPlanner(), Away())  # type: ignore[arg-type]

    assert (answer.kind, answer.reason) == (Kind.AWAY, "the file could not be read")


def test_a_child_that_closes_its_pipe_and_lives_on_is_gone(setup: ChildSetup, monkeypatch: pytest.MonkeyPatch) -> None:
    lines = "import os, time; os.close(0); os.close(1); time.sleep(60)"
    monkeypatch.setattr(planning_child, "CHILD", (sys.executable, "-c", lines))
    monkeypatch.setattr(child_process, "ENDING_S", 0.2)

    with pytest.raises(ChildEndedError, match=r"^its process broke its pipe off and lived on$"):
        PlanningChild(setup)


class Telling:
    """A planner that tells what it is asked."""

    def __getattr__(self, name: str) -> Callable[..., Any]:
        return lambda *arguments, **named: (name, arguments, named)


def test_a_planner_that_is_watched_answers_as_it_does_and_each_stage_is_timed() -> None:
    watch = StageWatch()
    watched, planner = TimedPlanner(Telling(), watch), Telling()  # type: ignore[arg-type]
    movement, cutter, settings = shipped_movement("fernhollow-31"), shipped_cutter("fibre-laser"), read_settings("{}")
    asked = (b"tune", movement, cutter, settings)

    assert watched.fingerprint_of(*asked, 2) == planner.fingerprint_of(*asked, 2)
    assert watched.check_drawing(b"dxf", movement, cutter) == planner.check_drawing(b"dxf", movement, cutter)
    assert watch.took_s == {}
    assert watched.lay_out_discs(*asked, None, most_s=5.0) == planner.lay_out_discs(*asked, None, most_s=5.0)
    assert watched.files_of("disc", not_good="why") == planner.files_of("disc", not_good="why")
    assert watched.told_of("disc", not_good="why") == planner.told_of("disc", not_good="why")
    assert watch.took_s.keys() == {"laying-out", "files"}


def test_a_keeper_that_is_watched_reads_as_it_does(shared_parts: Parts) -> None:
    keeper = FileKeeper(shared_parts.store, shared_parts.files)
    watch = StageWatch()
    watched = TimedKeeper(keeper, watch)

    [digest] = watched.keep([b"kept and timed"])

    assert watched.read(digest) == b"kept and timed"
    assert watch.took_s.keys() == {"keeping"}


@of_a_process
def test_a_child_refuses_the_tune_that_asks_for_it_where_a_test_key_ordered_it_and_plans_it_for_others(
    setup: ChildSetup, request_for: Requests
) -> None:
    [tune] = [one.content for one in state_tunes() if one.deed is Deed.REFUSE]
    asked = request_for(tune)

    kinds, _ = answers_of_one_let_go(as_json(setup), as_json(asked), as_json(replace(asked, is_test=True)))

    assert kinds == [Kind.WARM, Kind.PLANNED, Kind.REFUSED]
