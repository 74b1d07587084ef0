"""What a course measured, as tables, and what did not hold of it, as sentences."""

from collections import Counter, defaultdict
from collections.abc import Iterator, Sequence

from tests.bench.opponents.table import say, say_table, told
from tests.load.judging import LEAST_JUDGED, MB, share, slope_of
from tests.load.loops import Told
from tests.load.mix import FIRST_DRAWING, HEALTH, KINDS, NEW_LAYOUT
from tests.load.phases import Course, Measured

TAIL_TIMES_MEDIAN = 5.0
HEALTH_WITHIN_S = 0.2
BACK_WITHIN_S = 10.0
AS_BEFORE = 1.5  # times the median of the steady load
MEMORY_RISE_SHARE = 0.01  # of all memory, in the time of the steady load; less is no leak that anybody would meet
LEAST_LOOKS = 24  # at memory; two minutes, else nothing is said of its slope
SHOWN_FAULTS = 5
MINUTE_S = 60.0
COMPUTED = frozenset({NEW_LAYOUT.name, FIRST_DRAWING.name})


def tell_course(course: Course) -> list[str]:
    """Print all tables; gives what did not hold."""
    _tell_steps(course)
    for name, part in (
        ("steady load", course.steady),
        ("twice the capacity", course.overload),
        ("after", course.after),
    ):
        say(f"{name}: {part.wanted_per_s:.1f} arrivals a second, {part.served_per_s:.1f} served, {_taken(part)}")
        _tell_kinds(part)
    _tell_minutes(course.steady)
    _tell_memory(course.steady)
    _tell_held(course)
    return list(_missed(course))


def _tell_steps(course: Course) -> None:
    rows = [
        [
            str(clients),
            f"{step.served_per_s:.1f}",
            f"{1000 * share([one.took_s for one in step.told], 50):.0f}",
            _taken(step),
        ]
        for clients, step in course.steps.items()
    ]
    say_table(["clients who wait", "served a second", "median ms", "processors"], rows)
    longest = course.longest_step
    say(
        f"the best of these for {longest.took_s:.0f} s: {longest.served_per_s:.1f} a second, {_taken(longest)}; "
        f"its orders were planned {course.planned_after_s:.0f} s later"
    )
    say(f"capacity: {course.capacity_per_s:.1f} a second\n")


def _taken(part: Measured) -> str:
    return f"service {part.service_share:.2f}, client {part.client_share:.2f}, machine {part.machine_share:.2f}"


def _tell_kinds(part: Measured) -> None:
    rows = []
    for kind in KINDS:
        of_kind = [one for one in part.told if one.kind == kind.name]
        took_ms = [1000 * one.took_s for one in served(of_kind)]
        if not of_kind:
            continue
        cells = [kind.name, str(len(of_kind)), str(sum(one.is_refused for one in of_kind))]
        if took_ms:
            p50, p99 = share(took_ms, 50), share(took_ms, 99)
            cells += [f"{p50:.1f}", f"{p99:.1f}", f"{max(took_ms):.1f}", f"{p99 / p50:.1f}"]
        rows.append([*cells, *[""] * (7 - len(cells))])
    say_table(["kind", "asked", "refused", "p50 ms", "p99 ms", "worst ms", "p99/p50"], rows)
    late_ms = 1000 * share([one.late_s for one in part.told], 99)
    say(f"of which the client itself was late, 99 of 100: at most {late_ms:.1f} ms\n")


def _tell_minutes(part: Measured) -> None:
    """The same load minute by minute: whether what was slow was slow all the time, or once."""
    begun_s = min(one.due_s for one in part.told)
    minutes: dict[int, list[Told]] = defaultdict(list)
    for one in part.told:
        minutes[int((one.due_s - begun_s) / MINUTE_S)].append(one)
    rows = []
    for minute, asked in sorted(minutes.items()):
        cells = []
        for is_computed in (True, False):
            took_ms = [1000 * one.took_s for one in served(asked) if (one.kind in COMPUTED) is is_computed]
            cells += [f"{share(took_ms, of_hundred):.0f}" if took_ms else "" for of_hundred in (50, 99)]
        rows.append([str(minute + 1), str(len(asked)), str(sum(one.is_refused for one in asked)), *cells])
    say_table(["minute", "asked", "refused", "computed: p50 ms", "p99 ms", "at hand: p50 ms", "p99 ms"], rows)


def _tell_memory(part: Measured) -> None:
    if len(part.memory_bytes) < LEAST_LOOKS:
        say(f"memory: {len(part.memory_bytes)} looks are too few for a slope; {_range(part.memory_bytes)}")
        return
    slope = slope_of(part.memory_at_s, part.memory_bytes)
    say(
        f"memory under the steady load: {_range(part.memory_bytes)}; it rises by {slope.per_hour / MB:.1f} MB an hour, "
        f"and by chance alone would seem to by up to {slope.noise_per_hour / MB:.1f}"
    )


def _range(memory: Sequence[int]) -> str:
    if not memory:
        return "none"
    return f"{memory[0] / MB:.0f} MB at first, {memory[-1] / MB:.0f} at last, {max(memory) / MB:.0f} at most"


def _tell_held(course: Course) -> None:
    rows = [
        [when, *(str(count) for count in (len(one.pids), one.threads, one.handles, one.sockets, one.connections))]
        for when, one in (("before", course.before), ("after all", course.rested))
    ]
    say_table(["at rest", "processes", "threads", "open files", "sockets", "database connections"], rows)


def _missed(course: Course) -> Iterator[str]:
    yield from missed_by_steady(course.steady)
    yield from _missed_by_overload(course)
    yield from _missed_by_what_is_held(course)


def missed_by_steady(steady: Measured) -> Iterator[str]:
    """What does not hold of the steady load."""
    yield from _faults("under the steady load", steady.told)
    refused = sum(one.is_refused for one in steady.told)
    if refused:
        yield f"under the steady load {refused} requests were refused"
    for name, of_kind in _by_kind(served(steady.told)).items():
        took_s = [one.took_s for one in of_kind]
        times = share(took_s, 99) / share(took_s, 50)
        if len(took_s) >= LEAST_JUDGED:
            told(f"steady load, {name}: 99th percentile in medians", times, TAIL_TIMES_MEDIAN, most=True)
            if times > TAIL_TIMES_MEDIAN:
                yield f"{name}: the 99th percentile is {times:.1f} medians"
    if len(steady.memory_bytes) >= LEAST_LOOKS:
        slope = slope_of(steady.memory_at_s, steady.memory_bytes)
        rise = slope.per_hour * steady.took_s / 3600 / (sum(steady.memory_bytes) / len(steady.memory_bytes))
        if slope.rises and rise > MEMORY_RISE_SHARE:
            yield f"memory rose by {rise:.1%}, {slope.per_hour / MB:.0f} MB an hour"


def _missed_by_overload(course: Course) -> Iterator[str]:
    yield from _faults("at twice the capacity", course.overload.told)
    yield from _faults("after twice the capacity", course.after.told)
    health_s = [one.took_s for one in course.overload.told if one.kind == HEALTH.name]
    told("twice the capacity, health: 99th percentile, s", share(health_s, 99), HEALTH_WITHIN_S, most=True)
    if any(one.is_refused for one in course.overload.told if one.kind == HEALTH.name):
        yield "health was refused at twice the capacity"
    if share(health_s, 99) > HEALTH_WITHIN_S:
        yield f"health took {share(health_s, 99):.2f} s at twice the capacity"
    back_s = back_after_s(course.steady.told, course.after.told)
    if back_s is None:
        yield "after twice the capacity it did not come back to what it was"
        return
    told("after twice the capacity: seconds until all is as before", back_s, BACK_WITHIN_S, most=True)
    if back_s > BACK_WITHIN_S:
        yield f"after twice the capacity it took {back_s:.0f} s to come back"


def _missed_by_what_is_held(course: Course) -> Iterator[str]:
    before, rested = course.before, course.rested
    if before.pids != rested.pids:
        yield f"processes ended or were started: {sorted(before.pids ^ rested.pids)}"
    for what in ("threads", "handles", "sockets", "connections"):
        was, now = getattr(before, what), getattr(rested, what)
        if now > was:
            yield f"{what} were {was} at rest, and are {now}"


def back_after_s(steady: Sequence[Told], after: Sequence[Told]) -> float | None:
    """Seconds from the begin of `after` until answers take as long as in the steady load and none is refused.

    The median of each second is looked at, of each kind as a part of the kind's steady median. None where they never
    do, or the last second does not.
    """
    usual_s = {name: share([one.took_s for one in told], 50) for name, told in _by_kind(served(steady)).items()}
    begun_s = min(one.due_s for one in after)
    seconds: dict[int, list[Told]] = defaultdict(list)
    for one in after:
        if one.kind in usual_s:
            seconds[int(one.due_s - begun_s)].append(one)
    back_s = None
    for second in sorted(seconds):
        times = [one.took_s / usual_s[one.kind] for one in seconds[second]]
        is_usual = share(times, 50) <= AS_BEFORE and not any(one.is_refused or one.fault for one in seconds[second])
        back_s = (second if back_s is None else back_s) if is_usual else None
    return None if back_s is None else float(back_s)


def served(answers: Sequence[Told]) -> list[Told]:
    """Those that were what was asked for."""
    return [one for one in answers if not (one.fault or one.is_refused)]


def _by_kind(answers: Sequence[Told]) -> dict[str, list[Told]]:
    kinds: dict[str, list[Told]] = defaultdict(list)
    for one in answers:
        kinds[one.kind].append(one)
    return kinds


def _faults(when: str, answers: Sequence[Told]) -> Iterator[str]:
    faults = Counter(f"{one.kind}: {one.fault}" for one in answers if one.fault)
    for fault, count in faults.most_common(SHOWN_FAULTS):
        yield f"{when} {count} times {fault}"
