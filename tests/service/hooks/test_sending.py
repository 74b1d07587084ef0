import json
import os
import signal
import subprocess
import sys
import threading
from collections.abc import Callable, Sequence
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from ipaddress import ip_network
from pathlib import Path

import pytest
from sqlalchemy import select
from standardwebhooks import Webhook

from service.hooks.deliveries import Holder, HookOffError, count_deliveries, redeliver
from service.hooks.keeping import ask_for_test, change_hook, delete_hook, enable_hook, find_hook, rotate_secret
from service.hooks.posting import Answer
from service.hooks.sending import WAITS, Result, Taken, Ways, lease_of, retry_after, send, take, write_result
from service.hooks.telling import deliver_due
from service.parts import Parts
from service.settings import HookSettings
from service.store.tables import Delivery, Hook
from tests.service.conftest import environment_of
from tests.service.hooks.receivers import Got, Receiver, listening
from tests.service.hooks.rows import NOW, add_owner, make_hook, only_delivery, place, reaching_loopback

SECOND = timedelta(seconds=1)
WITHOUT_JITTER = Ways(jitter=lambda: 0.0)


def answering(status: int, **headers: str) -> Callable[[Got], tuple[int, dict[str, str]]]:
    return lambda _got: (status, {name.replace("_", "-"): value for name, value in headers.items()})


def shop_with_hook(parts: Parts, url: str) -> tuple[str, str, str]:
    """The shop, its hook and the hook's secret."""
    shop = add_owner(parts, "the shop", is_shop=True)
    made = make_hook(parts, shop, url)
    return shop, made.hook.id, made.secret


def hook_row(parts: Parts, hook_id: str) -> Hook:
    with parts.store.reading() as session:
        return session.get_one(Hook, hook_id)


def take_only(parts: Parts, now: datetime) -> Taken | None:
    with parts.store.writing() as session:
        delivery_id = session.scalars(select(Delivery.id)).one()
        return take(session, delivery_id, now=now, lease=lease_of(parts))


def test_a_message_that_is_taken_is_delivered_and_the_reference_library_believes_it(any_parts: Parts) -> None:
    parts, now = reaching_loopback(any_parts), datetime.now(UTC)
    with listening(Receiver()) as receiver:
        shop, _, secret = shop_with_hook(parts, receiver.url)
        order_id = place(parts, shop)
        assert deliver_due(parts, now) == 1

    (got,) = receiver.got
    told = Webhook(secret).verify(got.body, got.headers)
    assert told["type"] == "order.received"
    assert told["data"]["order"] == order_id
    delivery = only_delivery(parts)
    assert got.headers["webhook-id"] == delivery.id
    assert got.headers["content-type"] == "application/json"
    assert (delivery.state, delivery.tries, delivery.last_status, delivery.next_try_at) == ("delivered", 1, 204, None)
    assert delivery.finished_at is not None
    assert deliver_due(parts, now + timedelta(days=9)) == 0


def test_a_message_is_tried_ten_times_over_three_days_with_one_id_and_new_signatures(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    waited = []
    with listening(Receiver(answer=answering(500))) as receiver:
        shop, *_ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        due = NOW
        while deliver_due(parts, due, ways=WITHOUT_JITTER) == 1:
            delivery = only_delivery(parts)
            if delivery.next_try_at is None:
                break
            assert deliver_due(parts, delivery.next_try_at - SECOND) == 0
            waited.append(round((delivery.next_try_at - due).total_seconds()))
            due = delivery.next_try_at

    # Standard Webhooks 1.0.0: at once, 5 s, 5 min, 30 min, 2 h, 5 h, 10 h, 14 h, 20 h, 24 h.
    assert waited == [5, 300, 1800, 7200, 18_000, 36_000, 50_400, 72_000, 86_400]
    assert len(receiver.got) == 10 == len(WAITS)
    assert len({got.headers["webhook-id"] for got in receiver.got}) == 1
    assert len({got.body for got in receiver.got}) == 1
    assert len({got.headers["webhook-timestamp"] for got in receiver.got}) == 10
    assert len({got.headers["webhook-signature"] for got in receiver.got}) == 10
    last = only_delivery(parts)
    assert (last.state, last.tries, last.last_status, last.last_error) == ("failed", 10, 500, "answered 500")


def test_a_message_given_up_is_sent_again_when_asked_with_the_same_id(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    with listening(Receiver()) as receiver:
        shop, *_ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        with parts.store.writing() as session:
            waiting = session.scalars(select(Delivery)).one()
            waiting.state, waiting.tries, waiting.next_try_at, waiting.finished_at = "failed", 10, None, NOW
        for _ in range(2):  # asking twice sends once
            with parts.store.writing() as session:
                told = redeliver(session, Holder(owner_id=shop, is_test=False), waiting.id, now=NOW)
            assert (told.state, told.tries, told.finished_at) == ("waiting", 0, None)
        deliver_due(parts, NOW)

    assert [got.headers["webhook-id"] for got in receiver.got] == [waiting.id]
    assert only_delivery(parts).state == "delivered"


def test_a_message_being_sent_at_this_moment_is_not_sent_beside_when_asked_again(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    shop, *_ = shop_with_hook(parts, "http://127.0.0.1:9/")
    place(parts, shop)
    taken = take_only(parts, NOW)
    assert taken is not None

    with parts.store.writing() as session:
        told = redeliver(session, Holder(owner_id=shop, is_test=False), taken.id, now=NOW + SECOND)

    assert told.next_try_at == taken.lease_until
    assert take_only(parts, NOW + 2 * SECOND) is None


def test_waits_are_lengthened_by_chance_but_never_shortened(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    shop, *_ = shop_with_hook(parts, "http://127.0.0.1:9/")
    place(parts, shop)
    taken = take_only(parts, NOW)
    assert taken is not None
    failed = Result(answer=Answer(status=500, retry_after=None), error=None)

    with parts.store.writing() as session:
        assert write_result(session, taken, failed, now=NOW, jitter=0.5)

    assert only_delivery(parts).next_try_at == NOW + timedelta(seconds=5.25)  # 5 s and half of a tenth of it
    jitter = Ways().jitter
    assert all(0 <= jitter() < 1 for _ in range(100))


@pytest.mark.parametrize("status", [200, 201, 202, 204, 299])
def test_every_answer_of_2xx_is_success(parts: Parts, status: int) -> None:
    assert Result(answer=Answer(status=status, retry_after=None), error=None).is_success


@pytest.mark.parametrize(
    ("status", "told"),
    [
        (304, "answered 304: redirects are not followed; set the hook's url to where it leads"),
        (308, "answered 308: redirects are not followed; set the hook's url to where it leads"),
        (400, "answered 400"),
        (404, "answered 404"),
        (503, "answered 503"),
    ],
)
def test_every_other_answer_is_a_failure_and_tried_again(parts: Parts, status: int, told: str) -> None:
    parts = reaching_loopback(parts)
    with listening(Receiver(answer=answering(status))) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        deliver_due(parts, NOW)

    delivery = only_delivery(parts)
    assert (delivery.state, delivery.last_status, delivery.last_error) == ("waiting", status, told)
    assert hook_row(parts, hook_id).disabled_at is None


def test_a_hook_that_is_gone_is_turned_off_and_what_waits_for_it_given_up(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    with listening(Receiver(answer=answering(410))) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        place(parts, shop)
        assert deliver_due(parts, NOW) == 1
        with parts.store.reading() as session:
            assert count_deliveries(session) == {"waiting": 0, "delivered": 0, "failed": 2}
        place(parts, shop)
        assert deliver_due(parts, NOW + timedelta(days=9)) == 0

        hook = hook_row(parts, hook_id)
        assert hook.disabled_because == "answered 410 Gone"
        with parts.store.reading() as session:
            rows = session.execute(select(Delivery.state, Delivery.last_error).order_by(Delivery.last_error)).all()
        assert [tuple(row) for row in rows] == [("failed", "answered 410"), ("failed", "the hook is turned off")]
        holder = Holder(owner_id=shop, is_test=False)
        with parts.store.writing() as session:
            delivery_id = session.scalars(select(Delivery.id)).first()
            assert delivery_id is not None
            with pytest.raises(HookOffError, match=rf"^the hook {hook_id} is turned off: it answered 410 Gone$"):
                redeliver(session, holder, delivery_id, now=NOW)

        receiver.answer = answering(200)
        with parts.store.writing() as session:
            assert enable_hook(session, holder, hook_id, now=NOW).disabled_at is None
        place(parts, shop)
        assert deliver_due(parts, NOW) == 1


def test_what_waits_for_a_hook_that_is_gone_is_given_up_at_once_but_for_what_is_being_sent(any_parts: Parts) -> None:
    shop, hook_id, _ = shop_with_hook(any_parts, "https://shop.example/")
    for _ in range(3):
        place(any_parts, shop)
    with any_parts.store.writing() as session:
        first, second, _ = session.scalars(select(Delivery.id).order_by(Delivery.id)).all()
        taken, other = (take(session, one, now=NOW, lease=lease_of(any_parts)) for one in (first, second))
        assert taken is not None
        assert other is not None

    with any_parts.store.writing() as session:
        write_result(session, taken, Result(answer=Answer(status=410, retry_after=None), error=None), now=NOW, jitter=0)

    with any_parts.store.reading() as session:
        assert count_deliveries(session) == {"waiting": 1, "delivered": 0, "failed": 2}
        assert session.get_one(Delivery, other.id).state == "waiting"
        assert session.get_one(Hook, hook_id).disabled_at == NOW


def test_an_address_that_is_gone_says_nothing_of_the_one_set_meanwhile(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    shop, hook_id, _ = shop_with_hook(parts, "http://127.0.0.1:9/old")
    place(parts, shop)
    taken = take_only(parts, NOW)
    assert taken is not None
    holder = Holder(owner_id=shop, is_test=False)
    with parts.store.writing() as session:
        change_hook(session, holder, hook_id, {"url": "http://127.0.0.1:9/new"}, now=NOW)

    with parts.store.writing() as session:
        write_result(session, taken, Result(answer=Answer(status=410, retry_after=None), error=None), now=NOW, jitter=0)

    assert hook_row(parts, hook_id).disabled_at is None


def test_a_message_written_as_its_hook_was_deleted_is_given_up_unsent(any_parts: Parts) -> None:
    parts = reaching_loopback(any_parts)
    with listening(Receiver()) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        with parts.store.writing() as session:
            delete_hook(session, Holder(owner_id=shop, is_test=False), hook_id, now=NOW)
            session.add(Delivery(id="msg_late", hook_id=hook_id, body="{}", state="waiting", tries=0,
                                 next_try_at=NOW, created_at=NOW))  # fmt: skip
        assert deliver_due(parts, NOW) == 0

    assert receiver.got == []
    assert only_delivery(parts).state == "failed"


@pytest.mark.parametrize(
    ("status", "asked", "quiet_s"),
    [(429, "120", 120), (429, None, 30), (502, None, 30), (504, None, 30), (503, "60", 60), (429, "999999999", 86_400)],
)
def test_a_hook_that_is_overrun_is_left_in_peace_and_then_told_all(
    parts: Parts, status: int, asked: str | None, quiet_s: int
) -> None:
    parts = reaching_loopback(parts)
    headers = {} if asked is None else {"Retry_After": asked}
    with listening(Receiver(answer=answering(status, **headers))) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        deliver_due(parts, NOW, ways=WITHOUT_JITTER)
        receiver.answer = answering(200)
        place(parts, shop)
        until = hook_row(parts, hook_id).quiet_until
        assert until is not None
        assert round((until - NOW).total_seconds()) == quiet_s
        assert deliver_due(parts, until - SECOND, ways=WITHOUT_JITTER) == 0
        # Each message keeps its own wait beside: one that was refused waits as long as was asked, at least.
        assert deliver_due(parts, until + SECOND, ways=WITHOUT_JITTER) == 2

    assert len(receiver.got) == 3


@pytest.mark.parametrize(("asked", "waits_s"), [("120", 120), ("2", 5), ("soon", 5)])
def test_a_message_waits_as_long_as_its_hook_asks_for_but_no_less_than_else(
    parts: Parts, asked: str, waits_s: int
) -> None:
    parts = reaching_loopback(parts)
    with listening(Receiver(answer=answering(500, Retry_After=asked))) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        deliver_due(parts, NOW, ways=WITHOUT_JITTER)

    due = only_delivery(parts).next_try_at
    assert due is not None
    assert round((due - NOW).total_seconds()) == waits_s
    assert hook_row(parts, hook_id).quiet_until is None


@pytest.mark.parametrize("status", [500, 503, 404])
def test_a_fault_of_the_hooks_own_quiets_nothing(parts: Parts, status: int) -> None:
    parts = reaching_loopback(parts)
    with listening(Receiver(answer=answering(status))) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        deliver_due(parts, NOW)

    assert hook_row(parts, hook_id).quiet_until is None


@pytest.mark.parametrize(
    ("text", "seconds"),
    [
        (None, None),
        ("120", 120),
        (" 7 ", 7),
        ("0", 0),
        ("86401", 86_400),
        ("9" * 400, 86_400),
        ("Tue, 02 Dec 2025 10:02:00 GMT", 119.75),  # NOW is a quarter of a second after ten
        ("Tue, 02 Dec 2025 09:00:00 GMT", 0),
        ("Fri, 01 Jan 2100 00:00:00 GMT", 86_400),
        ("soon", None),
        ("-5", None),
        ("1e3", None),
        ("²", None),
        ("", None),
    ],
)
def test_what_a_hook_asks_for_is_read_in_seconds_or_as_a_date(text: str | None, seconds: float | None) -> None:
    wanted = None if seconds is None else timedelta(seconds=seconds)

    assert retry_after(text, now=NOW) == wanted


def test_a_test_is_tried_once(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    with listening(Receiver(answer=answering(500))) as receiver:
        shop, hook_id, _ = shop_with_hook(parts, receiver.url)
        with parts.store.writing() as session:
            ask_for_test(session, Holder(owner_id=shop, is_test=False), hook_id, now=NOW)
        deliver_due(parts, NOW)
        assert deliver_due(parts, NOW + timedelta(days=9)) == 0

    (got,) = receiver.got
    assert json.loads(got.body)["type"] == "hook.test"
    assert json.loads(got.body)["data"] == {"hook": hook_id}
    assert only_delivery(parts).state == "failed"


def test_while_a_secret_is_rotated_receivers_with_either_believe_the_message(parts: Parts) -> None:
    parts, now = reaching_loopback(parts), datetime.now(UTC)
    with listening(Receiver()) as receiver:
        shop, hook_id, old = shop_with_hook(parts, receiver.url)
        with parts.store.writing() as session:
            holder = Holder(owner_id=shop, is_test=False)
            new = rotate_secret(session, holder, hook_id, now=now, old_valid_for=timedelta(hours=24)).secret
        place(parts, shop)
        deliver_due(parts, now)

    (got,) = receiver.got
    for secret in (old, new):
        Webhook(secret).verify(got.body, got.headers)


def test_of_many_who_want_to_take_a_message_one_gets_it(any_parts: Parts) -> None:
    shop, *_ = shop_with_hook(any_parts, "https://shop.example/")
    place(any_parts, shop)
    together, taken = threading.Barrier(6), []

    def try_to() -> None:
        together.wait()
        taken.append(take_only(any_parts, NOW))

    threads = [threading.Thread(target=try_to) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()

    assert len(taken) == 6
    assert sum(one is not None for one in taken) == 1


def test_the_result_of_one_who_slept_past_the_lease_is_thrown_away(any_parts: Parts) -> None:
    shop, *_ = shop_with_hook(any_parts, "https://shop.example/")
    place(any_parts, shop)
    late = take_only(any_parts, NOW)
    assert late is not None
    assert take_only(any_parts, late.lease_until - SECOND) is None
    other = take_only(any_parts, late.lease_until)
    assert other is not None
    failed = Result(answer=Answer(status=410, retry_after=None), error=None)
    good = Result(answer=Answer(status=200, retry_after=None), error=None)

    with any_parts.store.writing() as session:
        assert not write_result(session, late, failed, now=late.lease_until, jitter=0)
        assert write_result(session, other, good, now=late.lease_until, jitter=0)
        assert not write_result(session, late, failed, now=late.lease_until, jitter=0)

    delivery = only_delivery(any_parts)
    assert (delivery.state, delivery.tries, delivery.last_status) == ("delivered", 2, 200)
    assert hook_row(any_parts, other.hook_id).disabled_at is None


def test_a_result_from_before_a_message_was_asked_for_again_is_thrown_away(any_parts: Parts) -> None:
    shop, *_ = shop_with_hook(any_parts, "https://shop.example/")
    place(any_parts, shop)
    late = take_only(any_parts, NOW)
    assert late is not None
    with any_parts.store.writing() as session:  # given up by another meanwhile
        row = session.scalars(select(Delivery)).one()
        row.state, row.tries, row.next_try_at, row.finished_at = "failed", 10, None, NOW
    with any_parts.store.writing() as session:
        redeliver(session, Holder(owner_id=shop, is_test=False), late.id, now=NOW + SECOND)
    again = take_only(any_parts, NOW + SECOND)
    assert again is not None
    assert again.tries == late.tries == 1

    with any_parts.store.writing() as session:
        good = Result(answer=Answer(status=200, retry_after=None), error=None)
        assert not write_result(session, late, good, now=NOW + SECOND, jitter=0)

    assert only_delivery(any_parts).state == "waiting"


def test_a_process_killed_between_sending_and_writing_sends_again_with_the_same_id(
    parts: Parts, tmp_path: Path
) -> None:
    parts, arrived, never = reaching_loopback(parts), threading.Event(), threading.Event()

    def hang(_got: Got) -> tuple[int, dict[str, str]]:
        arrived.set()
        never.wait(30)
        return 200, {}

    lines = (
        "import os, datetime; from service.hooks.telling import deliver_due; from service.parts import open_parts;"
        "from service.settings import settings_from; parts = open_parts(settings_from(os.environ));"
        f"deliver_due(parts, datetime.datetime.fromisoformat({NOW.isoformat()!r}))"
    )
    variables = environment_of(tmp_path, parts.settings.places.database_url) | {
        "DISCWRIGHT_HOOK_NETWORKS": "127.0.0.0/8",
        "DISCWRIGHT_HOOK_HTTP": "yes",
    }
    with listening(Receiver(answer=hang)) as receiver:
        shop, *_ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        with subprocess.Popen([sys.executable, "-c", lines], env=os.environ | variables) as sender:
            assert arrived.wait(60)
            os.kill(sender.pid, signal.SIGKILL)
        never.set()
        receiver.answer = answering(200)
        assert deliver_due(parts, NOW + SECOND) == 0  # the lease holds
        assert deliver_due(parts, NOW + timedelta(minutes=5)) == 1

    assert len(receiver.got) == 2
    assert len({got.headers["webhook-id"] for got in receiver.got}) == 1
    assert only_delivery(parts).state == "delivered"


def test_no_transaction_is_open_while_a_hook_is_told(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    placed: list[str] = []

    def place_another(_got: Got) -> tuple[int, dict[str, str]]:
        if not placed:
            placed.append(place(parts, shop))  # SQLite takes one writer at a time: this waits where one is open
        return 200, {}

    with listening(Receiver(answer=place_another)) as receiver:
        shop, *_ = shop_with_hook(parts, receiver.url)
        place(parts, shop)
        assert deliver_due(parts, NOW) == 2


def test_only_the_shops_own_hooks_reach_its_own_networks(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    with listening(Receiver()) as receiver:
        integrator = add_owner(parts, "an integrator")
        make_hook(parts, integrator, receiver.url)
        place(parts, integrator)
        deliver_due(parts, NOW)

    assert receiver.got == []
    assert only_delivery(parts).last_error == "127.0.0.1 is not a public address; only public addresses are told"


class Rebinding:
    """A resolver whose name leads somewhere else at each lookup."""

    def __init__(self, *answers: str) -> None:
        self.answers = list(answers)

    def __call__(self, host: str, port: int) -> Sequence[str]:
        return [self.answers.pop(0)]


def test_a_name_that_leads_elsewhere_at_the_second_lookup_is_connected_to_where_it_was_checked(parts: Parts) -> None:
    hooks = HookSettings(networks=(ip_network("127.0.0.1/32"),), allow_http=True, timeout_s=2)
    parts = replace(parts, settings=replace(parts.settings, hooks=hooks))
    rebinding = Rebinding("127.0.0.1", "127.0.0.2")
    ways = Ways(resolve=rebinding, jitter=lambda: 0.0)
    with listening(Receiver()) as receiver:
        shop, *_ = shop_with_hook(parts, f"http://rebinding.example:{receiver.port}/")
        place(parts, shop)
        deliver_due(parts, NOW, ways=ways)
        assert len(receiver.got) == 1
        assert rebinding.answers == ["127.0.0.2"]  # looked up once, to check and to connect
        place(parts, shop)
        deliver_due(parts, NOW, ways=ways)

    assert len(receiver.got) == 1
    with parts.store.reading() as session:
        refused = session.scalars(select(Delivery).where(Delivery.state == "waiting")).one()
    assert refused.last_error == "the host's name leads to an address that is not public"


def test_a_redirect_to_loopback_is_not_followed(parts: Parts) -> None:
    parts = reaching_loopback(parts)
    inner = Receiver()
    with (
        listening(inner),
        listening(Receiver(answer=lambda _got: (302, {"Location": inner.url}))) as outer,
    ):
        shop, *_ = shop_with_hook(parts, outer.url)
        place(parts, shop)
        deliver_due(parts, NOW)

    assert (len(outer.got), len(inner.got)) == (1, 0)


def test_what_did_not_arrive_is_logged_without_address_and_secret(
    parts: Parts, caplog: pytest.LogCaptureFixture
) -> None:
    parts = reaching_loopback(parts)
    shop, hook_id, secret = shop_with_hook(parts, "http://127.0.0.1:9/told?token=hidden")
    place(parts, shop)
    taken = take_only(parts, NOW)
    assert taken is not None

    send(parts, taken, WITHOUT_JITTER)

    assert f"hook {hook_id} did not take {taken.id} on try 1: nobody picked up at the host's addresses" in caplog.text
    assert "hidden" not in caplog.text
    assert secret not in caplog.text
    with parts.store.reading() as session:
        assert find_hook(session, Holder(owner_id=shop, is_test=False), hook_id, now=NOW).disabled_at is None
