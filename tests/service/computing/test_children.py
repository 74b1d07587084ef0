"""The children of a process: lent to one thread each, few, and no more than are of use."""

import threading
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from contextlib import ExitStack

import pytest

from service.children.child_process import ChildEndedError, ChildTooLongError
from service.computing import children as children_module
from service.computing.at_hand import AT_HAND_DISCS, SetsAtHand
from service.computing.children import MOST_CHILDREN, SPARE_S, Children, NoChildError
from service.computing.messages import ChildSetup

SETUP = ChildSetup(planner="layout.walk", memory_mib=300)
WAIT_S = 10.0  # for what must come; far more than it takes


class Child:
    """A child without a process."""

    started: list["Child"]
    fault: Exception | None

    def __init__(self, setup: ChildSetup) -> None:
        if Child.fault is not None:
            raise Child.fault
        self.setup = setup
        self.is_of_use = True
        self.idle_since_s = 0.0
        self.has_ended = False
        Child.started.append(self)

    def end(self) -> None:
        self.has_ended = True


class LaterTimer:
    """A timer whose time comes when a test says so."""

    waiting: list["LaterTimer"]

    def __init__(self, after_s: float, work: Callable[[], None]) -> None:
        self.after_s = after_s
        self.work = work
        self.daemon = False

    def start(self) -> None:
        assert self.daemon
        LaterTimer.waiting.append(self)


@pytest.fixture(autouse=True)
def _no_processes(monkeypatch: pytest.MonkeyPatch) -> None:
    Child.started, Child.fault, LaterTimer.waiting = [], None, []
    monkeypatch.setattr(children_module, "ComputingChild", Child)
    monkeypatch.setattr(threading, "Timer", LaterTimer)


@pytest.fixture
def children() -> Children:
    return Children(SETUP)


def test_one_child_serves_all_who_come_one_after_the_other(children: Children) -> None:
    lent = []
    for _ in range(5):
        with children.one() as child:
            lent.append(child)

    assert lent == Child.started * 5
    assert Child.started[0].setup == SETUP


def test_who_comes_while_one_is_lent_gets_another_up_to_the_most(children: Children) -> None:
    with ExitStack() as stack, ThreadPoolExecutor(max_workers=1) as pool:
        lent = [stack.enter_context(children.one()) for _ in range(MOST_CHILDREN)]
        got = threading.Event()

        def one_more() -> object:
            with children.one() as child:
                got.set()
                return child

        waiting = pool.submit(one_more)
        had_to_wait = not got.wait(0.2)
        stack.close()
        last = waiting.result(WAIT_S)

    assert lent == Child.started
    assert had_to_wait
    assert last in lent


def test_the_one_preferred_is_lent_where_it_is_idle_and_else_the_one_that_worked_last(children: Children) -> None:
    with children.one() as first, children.one() as second:
        pass
    with children.one(second) as preferred:
        pass
    with children.one(first) as the_other, children.one(first) as instead:
        pass

    assert (preferred, the_other, instead) == (second, first, second)
    with children.one() as last:
        assert last is first  # the last given back of the two


def test_a_child_that_is_of_no_more_use_is_ended_and_another_started(children: Children) -> None:
    with children.one() as child:
        child.is_of_use = False
    with children.one() as another:
        pass

    assert [one.has_ended for one in Child.started] == [True, False]
    assert another is Child.started[1]


def test_a_place_is_free_again_after_a_child_of_no_more_use(children: Children) -> None:
    for _ in range(MOST_CHILDREN + 1):
        with children.one() as child:
            child.is_of_use = False

    assert len(Child.started) == MOST_CHILDREN + 1


def test_a_child_is_given_back_though_its_user_failed(children: Children) -> None:
    with pytest.raises(ValueError, match="of the test"), children.one():
        raise ValueError("of the test")
    with children.one():
        pass

    assert len(Child.started) == 1


@pytest.mark.parametrize(
    ("fault", "why"),
    [
        (ChildEndedError("its process ended with code 1"), "its process ended with code 1"),
        (ChildTooLongError(), "it did not get ready in time"),
        (OSError(11, "Resource temporarily unavailable"), "Resource temporarily unavailable"),
    ],
)
def test_where_none_can_be_started_it_is_told_why_and_the_next_tries_again(
    children: Children, caplog: pytest.LogCaptureFixture, fault: Exception, why: str
) -> None:
    Child.fault = fault
    for _ in range(MOST_CHILDREN + 1):  # none of them takes a place for ever
        with pytest.raises(NoChildError, match=why), children.one():
            pass
    children.warm()
    Child.fault = None

    with children.one() as child:
        assert child is Child.started[0]
    assert f"no computing child could be started: {str(fault) or why}" in caplog.text


def test_a_fault_that_nobody_thought_of_takes_no_place_for_ever(children: Children) -> None:
    Child.fault = KeyError("of the test")
    for _ in range(MOST_CHILDREN + 1):
        with pytest.raises(KeyError), children.one():
            pass
    Child.fault = None

    with children.one() as child:
        assert child is Child.started[0]


def test_a_child_that_something_else_has_ended_while_it_was_idle_is_lent_to_nobody(children: Children) -> None:
    with children.one() as first, children.one() as second:
        pass
    first.is_of_use = False

    with children.one(first) as instead, children.one() as new:
        pass

    assert (instead, new) == (second, Child.started[2])
    assert first.has_ended


def test_a_child_is_given_back_though_no_thread_can_be_had_to_look_for_spare_ones(
    children: Children, monkeypatch: pytest.MonkeyPatch
) -> None:
    def no_thread(timer: LaterTimer) -> None:
        raise RuntimeError("can't start new thread")

    with monkeypatch.context() as patch:
        patch.setattr(LaterTimer, "start", no_thread)
        with children.one(), children.one():
            pass
    with children.one():
        pass

    assert len(Child.started) == 2
    assert len(LaterTimer.waiting) == 1  # whoever came next tried again


def test_a_warm_child_is_there_before_the_first_who_asks(children: Children) -> None:
    children.warm()
    before = list(Child.started)

    with children.one() as child:
        assert [child] == before


def test_spare_children_go_after_a_while_and_one_stays(children: Children, monkeypatch: pytest.MonkeyPatch) -> None:
    now_s = [100.0]
    monkeypatch.setattr(children_module.time, "monotonic", lambda: now_s[0])
    with children.one(), children.one(), children.one():
        pass
    [looking] = LaterTimer.waiting  # one, though three were given back

    now_s[0] += SPARE_S - 1
    looking.work()
    too_soon = [child.has_ended for child in Child.started]
    now_s[0] += 1
    looking_again = LaterTimer.waiting[-1]
    looking_again.work()
    in_time = [child.has_ended for child in Child.started]

    assert looking.after_s == SPARE_S
    assert looking_again is not looking
    assert len(LaterTimer.waiting) == 2  # and one child alone is not looked at
    assert too_soon == [False] * 3
    assert sorted(in_time) == [False, True, True]
    assert [child.has_ended for child in Child.started] == in_time


def test_a_child_alone_is_not_looked_at(children: Children) -> None:
    with children.one():
        pass

    assert LaterTimer.waiting == []


def test_a_spare_child_that_is_lent_is_not_let_go(children: Children, monkeypatch: pytest.MonkeyPatch) -> None:
    now_s = [100.0]
    monkeypatch.setattr(children_module.time, "monotonic", lambda: now_s[0])
    with children.one(), children.one():
        pass
    now_s[0] += SPARE_S

    with children.one() as lent:
        LaterTimer.waiting[0].work()

    assert not lent.has_ended
    assert [child.has_ended for child in Child.started].count(True) == 1


def test_those_with_nothing_to_do_are_ended_at_the_end(children: Children) -> None:
    with children.one() as lent:
        with children.one():
            pass
        children.end()
        assert [child.has_ended for child in Child.started] == [False, True]
    children.end()

    assert lent.has_ended


def test_sets_of_discs_are_held_by_their_name_the_last_first() -> None:
    at_hand: SetsAtHand[int] = SetsAtHand()
    at_hand.add("a", [1, 2])
    at_hand.add("b", [3])

    assert (at_hand.called("a"), at_hand.called("b"), at_hand.called("c")) == ((1, 2), (3,), ())
    assert at_hand.sets == ((3,), (1, 2))


@pytest.mark.parametrize(
    ("counts", "held"),
    [
        ([AT_HAND_DISCS - 1, 1], [1, AT_HAND_DISCS - 1]),
        ([AT_HAND_DISCS, 1], [1]),
        ([1, AT_HAND_DISCS + 5], [AT_HAND_DISCS + 5]),
        ([3] * 8, [3] * 5),  # 5 · 3 = 15 of 16
    ],
)
def test_so_many_discs_are_held_or_the_last_set_alone(counts: list[int], held: list[int]) -> None:
    at_hand: SetsAtHand[int] = SetsAtHand()
    for number, count in enumerate(counts):
        at_hand.add(str(number), range(count))

    assert [len(discs) for discs in at_hand.sets] == held
