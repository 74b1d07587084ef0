"""What a run tells of its sender goes with its orders, and what it tells of tunes it refused goes when tunes go."""

from dataclasses import replace
from datetime import timedelta

import pytest
from sqlalchemy import select, update
from sqlalchemy.orm import Session

from service.orders.deciding import Seen, cancel_order
from service.orders.erasing import erase_order
from service.orders.kept_answers import AskedOnce, Claim, Given, claim_or_answer, keep_answer
from service.orders.placing import nothing_more
from service.orders.retention import forget_tunes
from service.orders.run_opening import RunOpener
from service.orders.run_views import RunView
from service.orders.running import AskedRun, Pair, begin_run
from service.parts import Parts
from service.store.tables import Order, Row, Run, RunItem
from tests.service.orders.test_running import FERN
from tests.service.shop import TUNE, WEB_SHOP, archive_of, keeper_of, open_shop

PRIVATE = ("R-7-private", "for-aunt-ada", "for-uncle-ben", "For Ada alone")
ONCE = AskedOnce(owner_id=WEB_SHOP.owner_id, operation="POST /v1/runs", key="once", digest="0" * 64)
ASKED = AskedRun(
    archive=archive_of(**{PRIVATE[1]: TUNE, PRIVATE[2]: b"no tune"}),
    pairs=(
        Pair(tune=f"{PRIVATE[1]}.mid", movement=FERN),
        Pair(tune=f"{PRIVATE[1]}.mid", movement=FERN),
        Pair(tune=f"{PRIVATE[2]}.mid", movement=FERN, reference=PRIVATE[0]),
    ),
    cutter=replace(FERN, id="fibre-laser"),
    settings=b'{"title": "For Ada alone"}',
    reference=PRIVATE[0],
)


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def opened(parts: Parts) -> list[str]:
    """A run that was opened, its request answered; gives its orders, all cancelled."""
    claim = claim_or_answer(parts.store, ONCE, kept_days=30)
    assert isinstance(claim, Claim)

    def keep(session: Session, run: RunView) -> None:
        where = {"Content-Location": f"/v1/runs/{run.id}"}
        keep_answer(session, claim, Given(status=202, headers=where, body=PRIVATE[0].encode()))

    begin_run(parts.store, keeper_of(parts), WEB_SHOP, ASKED, keep)
    ids: list[str] = []
    RunOpener(parts.store, keeper_of(parts), ids.append, parts.settings.limits).open_all()
    for order_id in ids:
        cancel_order(parts.store, WEB_SHOP, Seen(order_id=order_id), reason=None, recalled=False, also=nothing_more)
    return ids


def told_privately(parts: Parts) -> list[str]:
    """Which of the private words stand in the database."""
    with parts.store.reading() as session:
        rows = repr([session.execute(select(table)).all() for table in Row.metadata.sorted_tables])
    return [word for word in PRIVATE if word in rows]


def test_a_run_whose_last_order_is_deleted_tells_nothing_of_its_sender_any_more(shop: Parts) -> None:
    first, last = opened(shop)

    erase_order(shop.store, shop.files, WEB_SHOP, first)
    between = told_privately(shop)
    erase_order(shop.store, shop.files, WEB_SHOP, last)

    assert between == list(PRIVATE)
    assert told_privately(shop) == []
    again = claim_or_answer(shop.store, ONCE, kept_days=30)
    assert (isinstance(again, Given), getattr(again, "body", None)) == (True, b"")


def test_names_of_refused_tunes_go_when_tunes_go_and_why_they_were_refused_stays(shop: Parts) -> None:
    opened(shop)
    reason = f"'{PRIVATE[2]}.mid' cannot be unpacked"
    with shop.store.writing() as session:
        session.execute(update(RunItem).where(RunItem.refused.is_not(None)).values(refused=reason))

    forget_tunes(shop.store, days=10)
    kept = told_privately(shop)
    with shop.store.writing() as session:
        session.execute(update(Run).values(opened_at=shop.store.now(session) - timedelta(days=11)))
        session.execute(update(Order).values(finished_at=shop.store.now(session) - timedelta(days=11)))
    forget_tunes(shop.store, days=10)

    assert PRIVATE[2] in kept
    assert PRIVATE[2] not in told_privately(shop)
    with shop.store.reading() as session:
        [item] = session.scalars(select(RunItem).where(RunItem.refused.is_not(None)))
    assert (item.tune_name, item.refused) == ("", "the tune cannot be unpacked")
