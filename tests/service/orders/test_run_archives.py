"""A deleted order's tune leaves the archive of its run too, while the run is still being opened."""

import io
import zipfile
from dataclasses import replace
from datetime import timedelta

import pytest
from sqlalchemy import update

from service.limits import Limits
from service.moments import utc_now
from service.orders.asked import NamedDocument
from service.orders.deciding import Seen, cancel_order
from service.orders.erasing import erase_order
from service.orders.placing import nothing_more
from service.orders.run_archives import trim_archive
from service.orders.run_opening import RunOpener
from service.orders.run_views import RunView, find_run, items_of
from service.orders.running import AskedRun, Pair, begin_run
from service.parts import Parts
from service.store.files import FileLostError
from service.store.holds import sweep_files
from service.store.tables import Run, StoredFile
from tests.service.shop import TUNE, WEB_SHOP, archive_of, keeper_of, open_shop

FERN, TARN = NamedDocument(id="fernhollow-31"), NamedDocument(id="tarnlight-17")
TWO_MOVEMENTS = AskedRun(
    archive=archive_of(a=TUNE, b=TUNE, c=TUNE),
    pairs=(
        Pair(tune="a.mid", movement=FERN),
        Pair(tune="b.mid", movement=FERN),
        Pair(tune="b.mid", movement=TARN),
        Pair(tune="c.mid", movement=FERN),
    ),
    cutter=NamedDocument(id="fibre-laser"),
)


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def opener_of(parts: Parts) -> RunOpener:
    """One that makes two pairs orders at a time."""
    return RunOpener(parts.store, keeper_of(parts), lambda _: None, replace(Limits(), run_orders_at_a_time=2))


def begun(parts: Parts) -> RunView:
    return begin_run(parts.store, keeper_of(parts), WEB_SHOP, TWO_MOVEMENTS, lambda _session, _run: None)


def orders_of(parts: Parts, run_id: str) -> list[str | None]:
    with parts.store.reading() as session:
        return [item.order_id for item in items_of(session, WEB_SHOP, run_id, after=0, most=10)]


def erase(parts: Parts, order_id: str | None) -> None:
    assert order_id is not None
    cancel_order(parts.store, WEB_SHOP, Seen(order_id=order_id), reason=None, recalled=False, also=nothing_more)
    erase_order(parts.store, parts.files, WEB_SHOP, order_id)


def digest_of(parts: Parts, run_id: str) -> str:
    with parts.store.reading() as session:
        return session.get_one(Run, run_id).archive_digest


def tunes_kept(parts: Parts, run_id: str) -> list[str]:
    with zipfile.ZipFile(io.BytesIO(parts.files.read(digest_of(parts, run_id)))) as archive:
        assert all(archive.read(name) == TUNE for name in archive.namelist())
        return archive.namelist()


def swept(parts: Parts) -> None:
    """Sweep as after an hour."""
    with parts.store.writing() as session:
        session.execute(update(StoredFile).values(created_at=utc_now() - timedelta(hours=2)))
    sweep_files(parts.store, parts.files, most=100)


def test_only_what_waiting_pairs_need_stays_in_the_archive(shop: Parts) -> None:
    run = begun(shop)
    opener_of(shop).open_some()
    first_digest = digest_of(shop, run.id)

    erase(shop, orders_of(shop, run.id)[0])
    swept(shop)

    # a.mid was the order's; b.mid is another pair's too, which waits
    assert tunes_kept(shop, run.id) == ["b.mid", "c.mid"]
    with pytest.raises(FileLostError):
        shop.files.read(first_digest)


def test_the_pairs_that_wait_become_orders_from_what_is_left(shop: Parts) -> None:
    run = begun(shop)
    opener = opener_of(shop)
    opener.open_some()
    erase(shop, orders_of(shop, run.id)[0])
    swept(shop)

    opener.open_all()

    with shop.store.reading() as session:
        assert dict(find_run(session, WEB_SHOP, run.id).counts) == {"cancelled": 1, "received": 3}


def test_a_worker_that_had_seen_the_old_archive_refuses_no_pair(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    run = begun(shop)
    opener_of(shop).open_some()
    [order_id, *_] = orders_of(shop, run.id)
    late = opener_of(shop)
    read = late._content

    def content(digest: str) -> bytes:
        monkeypatch.setattr(late, "_content", read)
        erase(shop, order_id)
        swept(shop)
        return read(digest)

    monkeypatch.setattr(late, "_content", content)
    late.open_all()

    with shop.store.reading() as session:
        assert dict(find_run(session, WEB_SHOP, run.id).counts) == {"cancelled": 1, "received": 3}


def test_a_run_that_is_opened_has_nothing_to_lose(shop: Parts) -> None:
    run = begun(shop)
    opener_of(shop).open_all()

    for order_id in orders_of(shop, run.id):
        erase(shop, order_id)
    swept(shop)

    with pytest.raises(FileLostError):
        shop.files.read(digest_of(shop, run.id))


def test_an_archive_that_was_lost_stays_lost_and_the_order_is_deleted_all_the_same(shop: Parts) -> None:
    run = begun(shop)
    opener_of(shop).open_some()
    digest = digest_of(shop, run.id)
    shop.files.remove(digest)

    erase(shop, orders_of(shop, run.id)[0])

    assert digest_of(shop, run.id) == digest


def test_an_archive_that_holds_nothing_else_is_left_as_it_is(shop: Parts) -> None:
    run = begun(shop)
    digest = digest_of(shop, run.id)

    trim_archive(shop.store, shop.files, run.id)

    assert digest_of(shop, run.id) == digest


def replace_archive(parts: Parts, run_id: str, content: bytes) -> None:
    """Let a run's archive be another."""
    [digest] = keeper_of(parts).keep([content])
    with parts.store.writing() as session:
        session.execute(update(Run).where(Run.id == run_id).values(archive_digest=digest))


def test_an_archive_that_is_damaged_leaves_nothing_of_itself(shop: Parts) -> None:
    run = begun(shop)
    opener_of(shop).open_some()
    replace_archive(shop, run.id, b"PK no archive at all")

    erase(shop, orders_of(shop, run.id)[0])

    assert shop.files.read(digest_of(shop, run.id)) == b""


def test_a_tune_that_is_damaged_is_left_out_and_the_others_stay(shop: Parts) -> None:
    run = begun(shop)
    opener_of(shop).open_some()
    packed = archive_of(a=TUNE, b=TUNE, c=TUNE)
    second = packed.index(TUNE[:20], packed.index(b"b.mid")) if TUNE[:20] in packed else packed.index(b"b.mid") + 20
    replace_archive(shop, run.id, packed[:second] + bytes(8) + packed[second + 8 :])

    erase(shop, orders_of(shop, run.id)[0])

    assert tunes_kept(shop, run.id) == ["c.mid"]


def test_an_archive_that_another_has_replaced_meanwhile_is_trimmed_once_more(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    run = begun(shop)
    opener_of(shop).open_some()
    read = shop.files.read
    seen: list[str] = []

    def read_meanwhile(digest: str) -> bytes:
        content = read(digest)
        if not seen:
            seen.append(digest)
            replace_archive(shop, run.id, archive_of(a=TUNE, b=TUNE, c=TUNE, d=TUNE))
        return content

    monkeypatch.setattr(shop.files, "read", read_meanwhile)
    erase(shop, orders_of(shop, run.id)[0])

    assert tunes_kept(shop, run.id) == ["b.mid", "c.mid"]
