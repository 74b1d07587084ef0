"""What the load test says does not hold."""

from dataclasses import replace

import pytest

from tests.load.loops import Told
from tests.load.phases import Course, Measured
from tests.load.telling import back_after_s, tell_course
from tests.load.watching import Held

HELD = Held(pids=frozenset({1, 2}), threads=20, handles=40, sockets=4, connections=6)


def told(kind: str = "health", took_s: float = 0.01, due_s: float = 0.0, status: int = 200, fault: str = "") -> Told:
    return Told(kind=kind, status=status, fault=fault, due_s=due_s, late_s=0.0, took_s=took_s)


def part(*answers: Told, memory_mb: tuple[int, ...] = ()) -> Measured:
    return Measured(
        told=list(answers),
        wanted_per_s=10,
        took_s=5.0 * max(len(memory_mb), 2),
        client_share=0.1,
        service_share=1.0,
        machine_share=1.5,
        memory_at_s=[5.0 * number for number in range(len(memory_mb))],
        memory_bytes=[1_000_000 * one for one in memory_mb],
    )


def a_minute(took_s: float = 0.01) -> list[Told]:
    return [told(took_s=took_s, due_s=0.2 * number) for number in range(300)]


WELL = Course(
    steps={1: part(told())},
    longest_step=part(*a_minute()),
    planned_after_s=0.0,
    before=HELD,
    steady=part(*a_minute(), memory_mb=(500,) * 120),
    overload=part(*a_minute(), told(kind="page", status=503)),
    after=part(*a_minute()),
    rested=HELD,
)


def missed(course: Course) -> str:
    return "\n".join(tell_course(course))


def test_a_course_without_fault_holds() -> None:
    assert missed(WELL) == ""


def test_the_capacity_is_what_is_served_by_the_time_all_orders_are_planned() -> None:
    course = replace(WELL, longest_step=part(*a_minute()), planned_after_s=5.0)

    assert course.capacity_per_s == pytest.approx(300 / (10 + 5))


def test_the_steady_load_is_told_minute_by_minute_with_what_is_computed_apart(
    capsys: pytest.CaptureFixture[str],
) -> None:
    slow = [told("new layout", took_s=0.2), told("first drawing", took_s=0.3), told("page", due_s=59.9)]
    later = [told("new layout", took_s=4.0, due_s=60.0), told("page", took_s=0.02, due_s=61.0), told(status=503)]
    tell_course(replace(WELL, steady=part(*slow, *later, told(due_s=130.0))))

    printed = capsys.readouterr().out.splitlines()
    head = next(number for number, line in enumerate(printed) if line.startswith("minute"))
    assert [line.split() for line in printed[head + 2 : head + 5]] == [
        ["1", "4", "1", "200", "300", "10", "10"],
        ["2", "2", "0", "4000", "4000", "20", "20"],
        ["3", "1", "0", "10", "10"],  # none was computed
    ]


def test_a_refusal_under_the_steady_load_does_not_hold() -> None:
    course = replace(WELL, steady=part(*a_minute(), told(status=503)))

    assert missed(course) == "under the steady load 1 requests were refused"


def test_a_fault_is_told_wherever_it_happens() -> None:
    broken = told(kind="page", status=0, fault="ConnectionResetError")
    faulty = part(*a_minute(), broken, broken)

    fault = "2 times page: ConnectionResetError"
    assert missed(replace(WELL, steady=faulty)) == f"under the steady load {fault}"
    assert missed(replace(WELL, overload=faulty)) == f"at twice the capacity {fault}"
    assert f"after twice the capacity {fault}" in missed(replace(WELL, after=faulty))


def test_a_tail_of_more_than_five_medians_does_not_hold() -> None:
    longest = [told(took_s=0.06) for _ in range(4)]  # of 304: the 301st is the 99th percentile

    assert missed(replace(WELL, steady=part(*a_minute(), *longest))) == "health: the 99th percentile is 6.0 medians"


def test_memory_that_rises_does_not_hold() -> None:
    course = replace(WELL, steady=part(*a_minute(), memory_mb=tuple(range(500, 620))))

    # 1 MB each 5 s are 720 MB an hour, and 120 MB in all, of 559.5 MB on the average
    assert missed(course) == "memory rose by 21.4%, 720 MB an hour"


def test_memory_that_goes_up_and_down_holds() -> None:
    assert missed(replace(WELL, steady=part(*a_minute(), memory_mb=(500, 560, 520, 480) * 30))) == ""


def test_health_that_takes_long_or_is_refused_at_twice_the_capacity_does_not_hold() -> None:
    assert missed(replace(WELL, overload=part(*a_minute(took_s=0.3)))) == "health took 0.30 s at twice the capacity"
    assert missed(replace(WELL, overload=part(*a_minute(), told(status=429)))) == (
        "health was refused at twice the capacity"
    )


@pytest.mark.parametrize("what", ["threads", "handles", "sockets", "connections"])
def test_what_is_held_in_the_end_and_was_not_before_does_not_hold(what: str) -> None:
    was = getattr(HELD, what)

    assert (
        missed(replace(WELL, rested=replace(HELD, **{what: was + 1})))
        == f"{what} were {was} at rest, and are {was + 1}"
    )
    assert missed(replace(WELL, rested=replace(HELD, **{what: was - 1}))) == ""


def test_a_process_that_was_started_again_does_not_hold() -> None:
    rested = replace(HELD, pids=frozenset({1, 3}))

    assert missed(replace(WELL, rested=rested)) == "processes ended or were started: [2, 3]"


def test_it_is_back_from_the_second_on_whose_answers_and_all_later_are_as_before() -> None:
    slow = [told(took_s=0.1, due_s=0.2 * number) for number in range(10)]  # two seconds
    usual = [told(due_s=2 + 0.2 * number) for number in range(10)]

    assert back_after_s(a_minute(), slow + usual) == 2
    assert back_after_s(a_minute(), [*usual, told(status=503, due_s=5)]) is None
    assert back_after_s(a_minute(), usual) == 0


def test_what_never_comes_back_does_not_hold() -> None:
    assert missed(replace(WELL, after=part(*a_minute(took_s=0.1)))) == (
        "after twice the capacity it did not come back to what it was"
    )
