import contextlib
import json
from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from sqlalchemy import event, func, select
from sqlalchemy.orm import ORMExecuteState, Session

from layout.errors import DocumentError, MidiReadError
from service.access.asker import Asker
from service.hooks.deliveries import Holder
from service.hooks.keeping import HookWish, add_hook
from service.orders import taking
from service.orders.asked import AskedRepeat, NamedDocument
from service.orders.deciding import (
    Release,
    Seen,
    cancel_order,
    customer_says,
    release_order,
    replan_order,
    report_on_order,
)
from service.orders.faults import (
    ChangedMeanwhileError,
    FindingsStandError,
    InputRefusedError,
    OrderUnknownError,
    StateForbidsError,
)
from service.orders.finding import Sought, events_after, events_of, find_order, list_orders
from service.orders.placing import nothing_more, place_order
from service.orders.repeating import repeat_order
from service.orders.states import MAY_FOLLOW, State
from service.orders.views import OrderView
from service.parts import Parts
from service.store.holds import Hold, hold, sweep_files
from service.store.tables import Delivery, Event, FileHold, Order, Owner, StoredFile
from tests.service.shop import (
    ASKED,
    OTHER_SHOP,
    SHOP,
    TUNE,
    WEB_SHOP,
    WEB_TESTS,
    keeper_of,
    open_shop,
    placed,
    plan_of,
    plan_seen,
    planned,
    release_seen,
    taken,
)
from tests.thorough import tried

TOO_LONG = replace(
    ASKED, settings=b'{"passage": {"from_s": 0, "to_s": 60}, "speed": {"mode": "factor", "factor": 0.5}}'
)


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def now_of(parts: Parts, order_id: str, asker: Asker = WEB_SHOP) -> OrderView:
    with parts.store.reading() as session:
        return find_order(session, asker, order_id)


def story(parts: Parts, order_id: str) -> list[str]:
    with parts.store.reading() as session:
        return [event.type for event in events_of(session, SHOP, order_id, after=0, most=100)]


def test_an_order_goes_from_received_over_ready_to_released(shop: Parts) -> None:
    order = placed(shop)
    plan = planned(shop, order.id)
    released = release_seen(shop, order.id)

    assert order.state == "received"
    assert released.state == "released"
    assert released.plan is not None
    assert released.plan.released_by == "Ada"
    assert {file.name for file in released.plan.files} >= {"disc.dxf", "record.dxf", "layout.json"}
    assert {file.sha256 for file in released.plan.files} == {file.digest for file in plan.files}
    assert story(shop, order.id) == ["order.received", "order.planned", "order.ready", "order.released"]


def test_an_order_with_an_error_waits_for_a_person(shop: Parts) -> None:
    order = placed(shop, TOO_LONG)
    planned(shop, order.id)

    attention = now_of(shop, order.id)

    assert attention.state == "attention"
    assert attention.reason is not None
    assert "not good to cut" in attention.reason
    assert attention.plan is not None
    assert "disc.dxf" not in {file.name for file in attention.plan.files}


def test_an_order_that_loses_more_than_was_said_waits_for_a_person(shop: Parts) -> None:
    order = placed(shop, replace(ASKED, most_lost_share=0.01))  # the demo loses 2.74 % on fernhollow
    planned(shop, order.id)

    assert now_of(shop, order.id).reason == "2.74% of the tune is lost, and 1.00% was said to be the most"


def test_an_order_in_attention_is_released_only_with_a_reason(shop: Parts) -> None:
    order = placed(shop, TOO_LONG)
    planned(shop, order.id)

    with pytest.raises(FindingsStandError, match="not good to cut"):
        release_seen(shop, order.id)
    waiting = release_seen(shop, order.id, despite="a test cut")
    planned(shop, order.id)
    released = now_of(shop, order.id)

    assert waiting.state == "received"  # its marked cutting files are still to be made
    assert released.state == "released"
    assert released.plan is not None
    assert (released.plan.released_by, released.plan.release_reason) == ("Ada", "a test cut")
    [dxf] = [file for file in released.plan.files if file.name == "disc.dxf"]
    assert b"NOT GOOD TO CUT" in shop.files.read(dxf.sha256)
    assert dxf.saved_as.startswith("NOT-GOOD-TO-CUT_")


def test_an_order_may_be_released_without_a_person_where_nothing_stands(shop: Parts) -> None:
    good, bad = placed(shop, replace(ASKED, release_alone=True)), placed(shop, replace(TOO_LONG, release_alone=True))
    planned(shop, good.id)
    planned(shop, bad.id)

    assert now_of(shop, good.id).state == "released"
    assert now_of(shop, bad.id).state == "attention"


def test_planning_anew_after_release_supersedes_the_plan_and_leaves_it_as_it_was(shop: Parts) -> None:
    order = placed(shop)
    planned(shop, order.id)
    first = release_seen(shop, order.id).plan
    replan_order(shop.store, SHOP, Seen(order_id=order.id), {}, nothing_more)
    planned(shop, order.id)
    anew = now_of(shop, order.id)

    assert (anew.state, anew.plan_revision, anew.superseded_revisions) == ("ready", 2, (1,))
    assert first is not None
    assert anew.plan is not None
    assert anew.plan.files == first.files  # the same inputs give the same bytes
    assert story(shop, order.id)[-4:] == ["order.released", "order.superseded", "order.planned", "order.ready"]


def test_a_released_order_is_cancelled_only_by_the_shop_that_recalls_it(shop: Parts) -> None:
    order = placed(shop, replace(ASKED, release_alone=True))
    planned(shop, order.id)
    seen = Seen(order_id=order.id)

    with pytest.raises(StateForbidsError, match="the shop must confirm its recall"):
        cancel_order(shop.store, WEB_SHOP, seen, reason=None, recalled=True, also=nothing_more)
    with pytest.raises(StateForbidsError, match="the shop must confirm its recall"):
        cancel_order(shop.store, SHOP, seen, reason=None, recalled=False, also=nothing_more)
    cancelled = cancel_order(shop.store, SHOP, seen, reason="the tune was wrong", recalled=True, also=nothing_more)

    assert (cancelled.state, cancelled.superseded_revisions) == ("cancelled", (1,))


def test_an_order_that_is_cancelled_while_it_is_planned_keeps_no_plan(shop: Parts) -> None:
    order = placed(shop)
    held = taken(shop, order.id)
    plan = plan_of(shop, held)
    cancel_order(shop.store, WEB_SHOP, Seen(order_id=order.id), reason=None, recalled=False, also=nothing_more)

    assert not taking.renew(shop.store, held, 60)
    assert not taking.publish(shop.store, held, plan)
    assert now_of(shop, order.id).plan is None


def test_a_worker_that_slept_past_its_lease_publishes_nothing(shop: Parts) -> None:
    order = placed(shop)
    sleeper = taken(shop, order.id, "the sleeper", lease_s=0)
    successor = taken(shop, order.id, "the successor")
    plan = plan_of(shop, successor)

    assert not taking.publish(shop.store, sleeper, plan)
    assert not taking.hand_back(shop.store, sleeper)
    assert not taking.fail(shop.store, sleeper, "late")
    assert taking.publish(shop.store, successor, plan)
    assert story(shop, order.id) == ["order.received", "order.planned", "order.ready"]


def test_an_order_is_taken_by_one_worker_alone(shop: Parts) -> None:
    order = placed(shop)

    taken(shop, order.id)

    assert taking.take(shop.store, order.id, worker="another", lease_s=60, most_attempts=3) is None


def test_an_order_that_kills_its_workers_fails_in_the_end(shop: Parts) -> None:
    order = placed(shop)
    for _ in range(3):  # each dies: its lease runs out at once
        taken(shop, order.id, lease_s=0)

    assert taking.take(shop.store, order.id, worker="the fourth", lease_s=60, most_attempts=3) is None
    failed = now_of(shop, order.id)
    assert failed.state == "failed"
    assert failed.reason == "planning it ended its worker 3 times; simplify the tune or the settings, and order again"


def test_an_order_handed_back_costs_no_attempt(shop: Parts) -> None:
    order = placed(shop)
    for _ in range(5):
        assert taking.hand_back(shop.store, taken(shop, order.id))

    planned(shop, order.id)

    assert now_of(shop, order.id).state == "ready"


def test_an_order_whose_lease_has_run_out_is_found_waiting(shop: Parts) -> None:
    lost, held, planned_one = placed(shop), placed(shop), placed(shop)
    taken(shop, lost.id, lease_s=0)
    taken(shop, held.id)
    planned(shop, planned_one.id)

    assert taking.waiting(shop.store, most=10) == [lost.id]


def test_what_was_made_is_reported_of_a_released_order_alone(shop: Parts) -> None:
    order = placed(shop)
    seen = Seen(order_id=order.id)
    planned(shop, order.id)

    with pytest.raises(StateForbidsError, match="the order is ready"):
        report_on_order(shop.store, SHOP, seen, "cut", {"count": 1}, nothing_more)
    release_seen(shop, order.id)
    report_on_order(shop.store, SHOP, seen, "cut", {"count": 1}, nothing_more)

    with shop.store.reading() as session:
        last = events_of(session, WEB_SHOP, order.id, after=0, most=100)[-1]
    assert (last.type, last.data, last.by) == ("order.cut", {"revision": 1, "count": 1}, "the shop")


def test_a_customer_decides_about_the_plan_that_was_seen_alone(shop: Parts) -> None:
    order = placed(shop)
    planned(shop, order.id)
    said = customer_says(shop.store, order.id, 1, "accepted", by="B. Client", note="lovely")
    replan_order(shop.store, SHOP, Seen(order_id=order.id), {}, nothing_more)
    planned(shop, order.id)

    assert said.state == "ready"
    with pytest.raises(StateForbidsError, match="ask for a new link"):
        customer_says(shop.store, order.id, 1, "accepted", by="B. Client", note=None)


def test_a_customer_who_says_the_same_twice_has_said_it_once(shop: Parts) -> None:
    order = placed(shop)
    planned(shop, order.id)
    for verdict in ("accepted", "accepted", "declined", "accepted"):
        customer_says(shop.store, order.id, 1, verdict, by="B. Client", note=None)

    said = [kind for kind in story(shop, order.id) if kind in ("order.accepted", "order.declined")]
    assert said == ["order.accepted", "order.declined", "order.accepted"]


def test_nobody_decides_about_an_order_that_has_changed_meanwhile(shop: Parts) -> None:
    order = placed(shop)
    planned(shop, order.id)
    release = Release(by="Ada", plan=plan_seen(shop, order.id))

    with pytest.raises(ChangedMeanwhileError, match="the order is at version 3, not 1"):
        release_order(shop.store, SHOP, Seen(order_id=order.id, version=1), release, nothing_more)


@pytest.mark.parametrize("asker", [OTHER_SHOP, WEB_TESTS])
def test_an_order_of_another_does_not_exist(shop: Parts, asker: Asker) -> None:
    order = placed(shop)

    with pytest.raises(OrderUnknownError) as of_another:
        now_of(shop, order.id, asker)
    with pytest.raises(OrderUnknownError) as of_nobody:
        now_of(shop, "order_nowhere", asker)
    with shop.store.reading() as session:
        listed, _ = list_orders(session, asker, Sought(), after=None, most=10)
        events = events_after(session, asker, after=0, most=10, test=False)
    assert str(of_another.value).replace(order.id, "X") == str(of_nobody.value).replace("order_nowhere", "X")
    assert (listed, events) == ((), ())


def test_an_order_for_tests_reaches_the_shop_only_where_it_asks(shop: Parts) -> None:
    order = placed(shop, asker=WEB_TESTS)

    with shop.store.reading() as session:
        plainly, _ = list_orders(session, SHOP, Sought(), after=None, most=10)
        for_tests, _ = list_orders(session, SHOP, Sought(test=True), after=None, most=10)
    assert plainly == ()
    assert [one.id for one in for_tests] == [order.id]


def test_pages_hold_every_order_once(shop: Parts) -> None:
    orders = [placed(shop, replace(ASKED, reference=f"W-{number}")).id for number in range(5)]
    seen: list[str] = []
    after = None
    with shop.store.reading() as session:
        for _ in range(3):
            page, after = list_orders(session, WEB_SHOP, Sought(), after=after, most=2)
            seen += [order.id for order in page]

    assert after is None
    assert seen == orders


def test_orders_are_found_by_state_and_by_reference(shop: Parts) -> None:
    ready, _received = placed(shop), placed(shop, replace(ASKED, reference="W-2"))
    planned(shop, ready.id)

    with shop.store.reading() as session:
        by_state, _ = list_orders(session, WEB_SHOP, Sought(state="ready"), after=None, most=10)
        by_reference, _ = list_orders(session, WEB_SHOP, Sought(reference="W-2"), after=None, most=10)
    assert [order.reference for order in by_state] == ["W-1001"]
    assert [order.reference for order in by_reference] == ["W-2"]


def test_what_can_be_seen_to_be_wrong_is_refused_at_once_and_nothing_is_kept(shop: Parts) -> None:
    with pytest.raises(InputRefusedError, match=r"no movement 'nowhere-9'; GET /v1/movements"):
        placed(shop, replace(ASKED, movement=NamedDocument(id="nowhere-9")))
    with pytest.raises(InputRefusedError, match=r"no cutter 'fibre-laser' of revision 7"):
        placed(shop, replace(ASKED, cutter=NamedDocument(id="fibre-laser", revision=7)))
    with pytest.raises(MidiReadError):
        placed(shop, replace(ASKED, tune=b"no tune"))
    with pytest.raises(DocumentError):
        placed(shop, replace(ASKED, settings=b'{"speed": "fast"}'))

    with shop.store.reading() as session:
        assert session.scalars(select(func.count()).select_from(Order)).one() == 0
        assert session.scalars(select(func.count()).select_from(StoredFile)).one() == 0


def test_what_cannot_be_written_with_the_order_undoes_the_order(shop: Parts) -> None:
    def fails(_session: Session, _order: OrderView) -> None:
        raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        place_order(shop.store, keeper_of(shop), WEB_SHOP, ASKED, fails)

    with shop.store.reading() as session:
        assert session.scalars(select(func.count()).select_from(Order)).one() == 0
        assert session.scalars(select(func.count()).select_from(Event)).one() == 0


def test_each_owner_holds_a_file_for_itself_and_it_is_kept_once(shop: Parts) -> None:
    placed(shop)
    placed(shop, asker=OTHER_SHOP)

    with shop.store.reading() as session:
        holds = select(FileHold.owner_id).join(StoredFile, StoredFile.digest == FileHold.digest)
        owners = set(session.scalars(holds.where(FileHold.what == "tune")))
    assert owners == {WEB_SHOP.owner_id, OTHER_SHOP.owner_id}
    assert sum(shop.files.read(digest) == TUNE for digest in shop.files.digests()) == 1


def test_a_sweep_spares_what_is_held_and_what_is_new(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    order = placed(shop)
    [unheld] = keeper_of(shop).keep([b"nobody's"])

    assert sweep_files(shop.store, shop.files, most=100) == []
    monkeypatch.setattr("service.store.holds.SPARED_S", -1)
    assert sweep_files(shop.store, shop.files, most=100) == [unheld]
    assert not shop.files.has(unheld)
    assert shop.files.has(order.tune_digest)


def test_events_are_numbered_without_gaps(shop: Parts) -> None:
    for _ in range(3):
        placed(shop)

    with shop.store.reading() as session:
        assert [event.seq for event in events_after(session, WEB_SHOP, after=0, most=10, test=False)] == [1, 2, 3]


STEPS = ("take", "publish", "fail", "hand back", "release", "replan", "cancel", "recall", "despite")


@settings(max_examples=tried(25), deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.lists(st.sampled_from(STEPS), max_size=12))
def test_whatever_is_tried_only_states_that_may_follow_are_reached(parts: Parts, tried: list[str]) -> None:
    """Each step is tried in whatever state the order is in: it is made or refused, and the story stays whole."""
    if not _has_owners(parts):  # the database is one for all examples
        open_shop(parts)
    order = placed(parts)
    walked = [order.state]
    held = None
    for step in tried:
        with contextlib.suppress(StateForbidsError, FindingsStandError):
            held = _step(parts, order.id, step, held)
        state = now_of(parts, order.id).state
        if state != walked[-1]:
            walked.append(state)

    for before, after in pairwise(walked):
        assert State(after) in MAY_FOLLOW[State(before)]
    final = now_of(parts, order.id)
    kinds = story(parts, order.id)
    assert kinds.count("order.planned") == final.plan_revision
    assert kinds.count("order.cancelled") == int(final.state == "cancelled")


def _has_owners(parts: Parts) -> bool:
    with parts.store.reading() as session:
        return session.get(Owner, SHOP.owner_id) is not None


def _step(parts: Parts, order_id: str, step: str, held: taking.Taken | None) -> taking.Taken | None:
    seen = Seen(order_id=order_id)
    match step:
        case "take":
            return taking.take(parts.store, order_id, worker="w", lease_s=60, most_attempts=3) or held
        case "publish" if held is not None:
            taking.publish(parts.store, held, plan_of(parts, held))
        case "fail" if held is not None:
            taking.fail(parts.store, held, "it cannot be planned")
        case "hand back" if held is not None:
            taking.hand_back(parts.store, held)
        case "release":
            release_seen(parts, order_id)
        case "despite":
            release_seen(parts, order_id, despite="why not")
        case "replan":
            replan_order(parts.store, SHOP, seen, {}, nothing_more)
        case "cancel" | "recall":
            recalled = step == "recall"
            cancel_order(parts.store, SHOP, seen, reason="no", recalled=recalled, also=nothing_more)
    return held


def test_the_message_that_a_plan_is_superseded_tells_the_order_as_it_is_then(shop: Parts) -> None:
    order = placed(shop)
    planned(shop, order.id)
    release_seen(shop, order.id)
    with shop.store.writing() as session:
        wish = HookWish(url="https://shop.example/told", types=("order.superseded",), for_all_orders=True)
        holder = Holder(owner_id=WEB_SHOP.owner_id, is_test=False)
        add_hook(session, holder, wish, now=shop.store.now(session))

    replan_order(shop.store, WEB_SHOP, Seen(order_id=order.id), {}, nothing_more)

    with shop.store.reading() as session:
        [body] = session.scalars(select(Delivery.body))
    assert json.loads(body)["data"]["state"] == now_of(shop, order.id).state == "received"


def test_a_file_that_comes_to_be_held_while_it_is_swept_stays(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("service.store.holds.SPARED_S", -1)
    [digest] = keeper_of(shop).keep([b"a file that nobody holds yet"])

    def hold_first(state: ORMExecuteState) -> None:
        if state.is_delete:  # another's hold, between finding the file and letting it go
            hold(state.session, Hold(digest=digest, owner_id="owner_web", holder_id="order_1", what="result"))

    event.listen(Session, "do_orm_execute", hold_first)
    try:
        sweep_files(shop.store, shop.files, most=1)
    finally:
        event.remove(Session, "do_orm_execute", hold_first)

    assert shop.files.has(digest)


def test_what_was_made_for_tests_is_repeated_for_tests_alone(shop: Parts) -> None:
    first = placed(shop, asker=WEB_TESTS)
    planned(shop, first.id)
    release_seen(shop, first.id, WEB_TESTS)

    with pytest.raises(StateForbidsError, match="what is made for tests never reaches the shop"):
        repeat_order(shop.store, WEB_SHOP, AskedRepeat(repeat_of=first.id), nothing_more)
    again = repeat_order(shop.store, WEB_TESTS, AskedRepeat(repeat_of=first.id), nothing_more)

    assert (again.state, again.is_test) == ("ready", True)
