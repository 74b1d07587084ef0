"""Windows of requests counted in a process: against a plain reckoning, and without a thread of their own."""

import threading
from concurrent.futures import ThreadPoolExecutor

from hypothesis import given
from hypothesis import strategies as st

from service.access.windows import SWEEP_EVERY_S, WindowsInMemory

KEYS = st.sampled_from(["a", "b"])
QUARTERS_S = st.integers(0, 8).map(lambda quarters: quarters / 4)  # exact, and shorter than a sweep or longer
# (s since the last, whose, s that its window lasts if it begins one)
REQUESTS = st.lists(st.tuples(QUARTERS_S, KEYS, QUARTERS_S.map(lambda lasts_s: lasts_s + 0.25)), max_size=30)


@given(requests=REQUESTS)
def test_counts_are_those_of_a_plain_reckoning(requests: list[tuple[float, str, float]]) -> None:
    now_s = [1000.0]
    windows = WindowsInMemory(clock=lambda: now_s[0])
    plain: dict[str, list[float]] = {}  # the end of the window in force, once for each request in it

    for pause_s, key, lasts_s in requests:
        now_s[0] += pause_s
        begun = [end_s for end_s in plain.get(key, []) if now_s[0] < end_s]
        plain[key] = [*begun, begun[0] if begun else now_s[0] + lasts_s]

        assert windows.incr(key, lasts_s) == len(plain[key])
        for each in ("a", "b"):
            open_ends_s = [end_s for end_s in plain.get(each, []) if now_s[0] < end_s]
            assert windows.get(each) == len(open_ends_s)
            assert windows.get_expiry(each) == (open_ends_s or now_s)[0]


def test_windows_that_have_ended_are_not_kept() -> None:
    now_s = [1000.0]
    windows = WindowsInMemory(clock=lambda: now_s[0])
    for number in range(1000):  # as many addresses
        windows.incr(f"address {number}", 60)

    now_s[0] += 60 + SWEEP_EVERY_S
    windows.incr("address new", 60)

    assert windows.reset() == 1


def test_a_clock_that_is_set_back_does_not_stop_the_sweeping() -> None:
    now_s = [1_000_000.0]
    windows = WindowsInMemory(clock=lambda: now_s[0])
    windows.incr("before", 60)
    now_s[0] = 1000.0
    windows.incr("after", 1)

    now_s[0] += 1 + SWEEP_EVERY_S
    windows.incr("later", 60)

    # "before" ends in the time to come by this clock, and is kept; "after" has ended
    assert windows.reset() == 2


def test_counting_starts_no_thread() -> None:
    before = set(threading.enumerate())
    windows = WindowsInMemory()

    for _ in range(100):
        windows.incr("a", 60)

    assert set(threading.enumerate()) <= before


def test_threads_that_count_at_a_time_lose_nothing() -> None:
    windows = WindowsInMemory()

    with ThreadPoolExecutor(8) as pool:
        came = list(pool.map(lambda _: windows.incr("a", 600), range(4000)))

    assert sorted(came) == list(range(1, 4001))


def test_a_window_that_is_forgotten_begins_anew() -> None:
    windows = WindowsInMemory()
    windows.incr("a", 60, amount=3)

    windows.clear("a")

    assert windows.check()
    assert windows.incr("a", 60) == 1
