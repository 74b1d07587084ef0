"""Whose turn it is among threads."""

import socket
import threading
import time
from collections.abc import Callable
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from service.api.computing_queue import ComputingQueue
from service.api.waiting_room import WaitingRoom
from service.web_gathering import Pace
from service.web_turns import AT_A_TIME, LONG_S, Turns, give_up_turn
from service.web_worker import GatheringWorker, _PacedBody
from tests.service.conftest import parts_of

SOON_S = 10.0  # on a busy machine
A_WHILE_S = 0.1  # in which a thread that may begin has begun


class Threads:
    """Threads that take turns, each of which works until it is let go."""

    def __init__(self) -> None:
        self.turns = Turns(lambda: self.at_s)
        self.begun: list[int] = []
        self._let_go: list[threading.Event] = []
        self._running: list[threading.Thread] = []
        self.at_s = 0.0

    def come(self, many: int, then: Callable[[], object] = lambda: None) -> None:
        for _ in range(many):
            number, let_go = len(self._running), threading.Event()
            thread = threading.Thread(target=self._work, args=(number, let_go, then), daemon=True)
            self._let_go.append(let_go)
            self._running.append(thread)
            thread.start()
            time.sleep(A_WHILE_S / 10)  # so that they come in this order

    def _work(self, number: int, let_go: threading.Event, then: Callable[[], object]) -> None:
        with self.turns.turn():
            self.begun.append(number)
            then()
            let_go.wait()

    def finish(self, number: int) -> None:
        self._let_go[number].set()
        self._running[number].join(SOON_S)
        assert not self._running[number].is_alive()

    def have_begun(self, many: int) -> bool:
        """Whether so many begin, and not one more within a while."""
        until_s = time.perf_counter() + SOON_S
        while len(self.begun) < many and time.perf_counter() < until_s:
            time.sleep(A_WHILE_S / 10)
        time.sleep(A_WHILE_S)
        return len(self.begun) == many

    def end(self) -> None:
        for let_go in self._let_go:
            let_go.set()
        for thread in self._running:
            thread.join(SOON_S)


@pytest.fixture
def threads() -> Threads:
    return Threads()


def test_so_many_work_at_a_time_and_the_next_begins_when_one_ends_in_the_order_they_came(threads: Threads) -> None:
    threads.come(AT_A_TIME + 2)
    assert threads.have_begun(AT_A_TIME)

    threads.finish(1)
    assert threads.have_begun(AT_A_TIME + 1)
    threads.finish(0)
    assert threads.have_begun(AT_A_TIME + 2)
    assert threads.begun == list(range(AT_A_TIME + 2))
    threads.end()


def test_who_works_for_long_counts_no_longer_and_everybody_behind_gets_a_turn(threads: Threads) -> None:
    threads.come(2 * AT_A_TIME + 1)
    assert threads.have_begun(AT_A_TIME)

    threads.at_s = LONG_S - 0.001  # and those who wait look again, by the wall's clock
    time.sleep(LONG_S)
    assert threads.have_begun(AT_A_TIME)
    threads.at_s = LONG_S
    assert threads.have_begun(2 * AT_A_TIME)
    threads.end()


@pytest.mark.parametrize(
    "then",
    [
        give_up_turn,
        lambda: ComputingQueue().place().__enter__(),
        lambda: WaitingRoom(1).enter("a key"),
    ],
    ids=["of itself", "to compute", "to wait"],
)
def test_who_waits_for_something_else_gives_its_turn_to_the_next(threads: Threads, then: Callable[[], object]) -> None:
    threads.come(AT_A_TIME, then)
    threads.come(AT_A_TIME + 1)

    assert threads.have_begun(2 * AT_A_TIME)
    threads.finish(0)  # it has none to give any more
    assert threads.have_begun(2 * AT_A_TIME)
    threads.end()


def working(turns: Turns) -> int:
    """How many have a turn."""
    return len(turns._begun_s)


def test_who_fails_gives_its_turn_back_as_well() -> None:
    turns = Turns()

    with pytest.raises(ZeroDivisionError), turns.turn():
        raise ZeroDivisionError

    assert working(turns) == 0


def test_a_turn_is_given_up_once_and_without_one_there_is_none_to_give_up() -> None:
    give_up_turn()
    turns = Turns()

    with turns.turn():
        give_up_turn()
        assert working(turns) == 0
        give_up_turn()
    assert working(turns) == 0
    with turns.turn():
        assert working(turns) == 1


def test_a_web_process_answers_within_a_turn() -> None:
    worker: Any = GatheringWorker.__new__(GatheringWorker)
    worker._turns = Turns()
    seen: list[tuple[object, int]] = []
    worker.handle = lambda connection: seen.append((connection, working(worker._turns)))

    worker._handle("a connection")

    assert seen == [("a connection", 1)]
    assert working(worker._turns) == 0


def test_who_waits_for_the_rest_of_a_body_or_to_write_gives_its_turn_up(tmp_path: Path) -> None:
    turns = Turns()
    ours, theirs = socket.socketpair()
    with closing(ours), closing(theirs), closing(parts_of(tmp_path).store) as store:
        theirs.sendall(b"rest")
        pace = Pace(begun_s=time.monotonic(), pause_s=SOON_S, bytes_per_s=1000)
        with turns.turn():
            assert _PacedBody(ours, pace, 0, 1.0).recv(10) == b"rest"
            assert working(turns) == 0
        with turns.turn():
            with store.reading():
                assert working(turns) == 1
            with store.writing():
                assert working(turns) == 0
