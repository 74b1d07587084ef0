import os
import subprocess
import sys
import threading
import time
from collections import Counter
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from service.hooks import telling as telling_module
from service.hooks.deliveries import count_deliveries
from service.hooks.telling import tell_hooks
from service.limits import HOOK_LIMITS
from service.parts import Parts
from service.settings import WorkSettings
from service.store.faults import StoreBusyError
from tests.service.conftest import environment_of
from tests.service.hooks.receivers import Got, Receiver, listening
from tests.service.hooks.rows import add_owner, make_hook, place, reaching_loopback


@contextmanager
def telling(parts: Parts, loops: int = 1) -> Iterator[None]:
    """Loops that tell hooks, as workers run them."""
    stop = threading.Event()
    threads = [threading.Thread(target=tell_hooks, args=(parts, stop)) for _ in range(loops)]
    for thread in threads:
        thread.start()
    try:
        yield
    finally:
        stop.set()
        for thread in threads:
            thread.join(30)
    assert not any(thread.is_alive() for thread in threads)


def becomes_true(said: Callable[[], bool], within_s: float = 20) -> bool:
    until = time.monotonic() + within_s
    while time.monotonic() < until:
        if said():
            return True
        time.sleep(0.02)
    return False


def counts(parts: Parts) -> dict[str, int]:
    with parts.store.reading() as session:
        return count_deliveries(session)


def test_every_message_goes_out_once_though_two_loops_look_for_them(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    with listening(Receiver()) as receiver:
        make_hook(parts, shop, receiver.url)
        with telling(parts, loops=2):
            for _ in range(30):
                place(parts, shop)
            assert becomes_true(lambda: counts(parts)["delivered"] == 30)

    assert len({got.headers["webhook-id"] for got in receiver.got}) == 30 == len(receiver.got)


def test_a_message_goes_out_within_about_a_second(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    with listening(Receiver()) as receiver:
        make_hook(parts, shop, receiver.url)
        with telling(parts):
            time.sleep(1.2)
            started = time.monotonic()
            place(parts, shop)
            assert becomes_true(lambda: len(receiver.got) == 1)
            assert time.monotonic() - started < 4  # a second, and what a busy machine takes


def test_hooks_that_hang_hold_up_no_others(parts: Parts) -> None:
    parts = reaching_loopback(parts, timeout_s=25)
    shop = add_owner(parts, "the shop", is_shop=True)
    never = threading.Event()

    def hang(_got: Got) -> tuple[int, dict[str, str]]:
        never.wait(30)
        return 200, {}

    with listening(Receiver(answer=hang)) as hanging, listening(Receiver()) as receiver:
        for number in range(5):
            make_hook(parts, shop, f"{hanging.url}&number={number}")
        for _ in range(20):
            place(parts, shop)  # a hundred messages to those that hang
        with telling(parts):
            assert becomes_true(lambda: len(hanging.got) >= 5 * HOOK_LIMITS.per_hook_at_a_time)
            make_hook(parts, shop, receiver.url)
            started = time.monotonic()
            for _ in range(10):
                place(parts, shop)
            assert becomes_true(lambda: len(receiver.got) == 10)
            assert time.monotonic() - started < 6
            at_a_time = Counter(got.path for got in hanging.got)
            never.set()

    assert set(at_a_time.values()) == {HOOK_LIMITS.per_hook_at_a_time}


def test_a_hook_gets_a_few_messages_at_a_time(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    lock, now, most = threading.Lock(), [0], [0]

    def count(_got: Got) -> tuple[int, dict[str, str]]:
        with lock:
            now[0] += 1
            most[0] = max(most[0], now[0])
        time.sleep(0.1)
        with lock:
            now[0] -= 1
        return 200, {}

    with listening(Receiver(answer=count)) as receiver:
        make_hook(parts, shop, receiver.url)
        for _ in range(16):
            place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: counts(parts)["delivered"] == 16)

    assert 1 < most[0] <= HOOK_LIMITS.per_hook_at_a_time


def test_told_to_stop_it_ends_in_time_though_a_hook_hangs_and_the_message_goes_out_later(parts: Parts) -> None:
    parts = reaching_loopback(parts, timeout_s=30)
    parts = replace(parts, settings=replace(parts.settings, work=WorkSettings(stop_within_s=2)))
    shop = add_owner(parts, "the shop", is_shop=True)
    never = threading.Event()

    def hang(_got: Got) -> tuple[int, dict[str, str]]:
        never.wait(30)
        return 200, {}

    with listening(Receiver(answer=hang)) as receiver:
        make_hook(parts, shop, receiver.url)
        place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: len(receiver.got) == 1)
            started = time.monotonic()
        assert time.monotonic() - started < 5
        assert counts(parts)["waiting"] == 1
        never.set()
        assert becomes_true(lambda: counts(parts)["delivered"] == 1)


def test_a_process_that_is_told_to_stop_ends_though_a_hook_hangs(parts: Parts, tmp_path: Path) -> None:
    lines = (
        "import os, signal, threading; from service.hooks.telling import tell_hooks;"
        "from service.parts import open_parts; from service.settings import settings_from;"
        "stop = threading.Event(); signal.signal(signal.SIGTERM, lambda *_: stop.set());"
        "tell_hooks(open_parts(settings_from(os.environ)), stop)"
    )
    variables = environment_of(tmp_path, parts.settings.places.database_url) | {
        "DISCWRIGHT_HOOK_NETWORKS": "127.0.0.0/8",
        "DISCWRIGHT_HOOK_HTTP": "yes",
        "DISCWRIGHT_HOOK_TIMEOUT_S": "60",
        "DISCWRIGHT_STOP_WITHIN_S": "2",
    }
    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    never = threading.Event()

    def hang(_got: Got) -> tuple[int, dict[str, str]]:
        never.wait(60)
        return 200, {}

    with listening(Receiver(answer=hang)) as receiver:
        make_hook(parts, shop, receiver.url)
        place(parts, shop)
        with subprocess.Popen([sys.executable, "-c", lines], env=os.environ | variables) as process:
            try:
                assert becomes_true(lambda: len(receiver.got) == 1, within_s=60)
                process.terminate()
                assert process.wait(timeout=15) == 0
            finally:
                process.kill()
                never.set()

    assert counts(parts)["waiting"] == 1


def test_what_is_being_sent_is_seen_to_its_end(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)

    def think(_got: Got) -> tuple[int, dict[str, str]]:
        time.sleep(1)
        return 200, {}

    with listening(Receiver(answer=think)) as receiver:
        make_hook(parts, shop, receiver.url)
        place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: len(receiver.got) == 1)

    assert counts(parts)["delivered"] == 1


def out_of_order(sender: Any, name: str, fault: Exception, times: int = 1) -> None:
    """Let a method of something fail so many times."""
    real, left = getattr(sender, name), [fault] * times

    def fail_first(*arguments: Any, **named: Any) -> Any:
        if left:
            raise left.pop()
        return real(*arguments, **named)

    setattr(sender, name, fail_first)


@pytest.mark.parametrize(
    ("fault", "told"),
    [
        (StoreBusyError("the database does not answer"), "hooks are not told at the moment: the database does not"),
        (ZeroDivisionError(), "looking for messages to hooks failed; it is tried again"),
    ],
)
def test_hooks_are_told_after_looking_for_messages_has_failed(
    parts: Parts, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture, fault: Exception, told: str
) -> None:
    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    monkeypatch.setattr(telling_module, "due", telling_module.due)  # put back after the test
    out_of_order(telling_module, "due", fault)
    with listening(Receiver()) as receiver:
        make_hook(parts, shop, receiver.url)
        place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: counts(parts)["delivered"] == 1)

    assert told in caplog.text


@pytest.mark.parametrize(
    ("fault", "told"),
    [
        (StoreBusyError("it does not answer"), "could not be written, so it will be sent again: it does not answer"),
        (ZeroDivisionError(), "failed; it will be tried again"),
    ],
)
def test_a_message_whose_sending_went_wrong_is_told_and_others_go_out(
    parts: Parts, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture, fault: Exception, told: str
) -> None:
    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    monkeypatch.setattr(telling_module, "send", telling_module.send)  # put back after the test
    out_of_order(telling_module, "send", fault)
    with listening(Receiver()) as receiver:
        make_hook(parts, shop, receiver.url)
        place(parts, shop)
        place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: counts(parts)["delivered"] == 1)

    assert told in caplog.text
    assert counts(parts)["waiting"] == 1


def test_a_hook_that_asked_for_none_any_more_is_off_though_that_cannot_be_noted(
    parts: Parts, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    def no_answer(*_: object) -> None:
        raise StoreBusyError("the folder of files is not there")

    parts = reaching_loopback(parts)
    shop = add_owner(parts, "the shop", is_shop=True)
    monkeypatch.setattr(telling_module, "note_stopped", no_answer)
    with listening(Receiver(answer=lambda _got: (410, {}))) as receiver:
        made = make_hook(parts, shop, receiver.url)
        place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: counts(parts)["waiting"] == 0)

    assert f"it is noted with the next backup alone that hook {made.hook.id} is off" in caplog.text


def test_no_more_messages_are_sent_at_a_time_than_there_are_places(
    parts: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(telling_module, "HOOK_LIMITS", replace(HOOK_LIMITS, at_a_time=1, look_every_s=1))
    parts = reaching_loopback(parts, timeout_s=30)
    shop = add_owner(parts, "the shop", is_shop=True)
    never = threading.Event()

    def hang(_got: Got) -> tuple[int, dict[str, str]]:
        never.wait(30)
        return 200, {}

    with listening(Receiver(answer=hang)) as receiver:
        make_hook(parts, shop, receiver.url)
        place(parts, shop)
        place(parts, shop)
        with telling(parts):
            assert becomes_true(lambda: len(receiver.got) == 1)
            assert not becomes_true(lambda: len(receiver.got) > 1, within_s=1.5)
            never.set()
            assert becomes_true(lambda: counts(parts)["delivered"] == 2)
