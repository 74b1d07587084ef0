import sqlite3
import threading
from contextlib import ExitStack
from datetime import UTC, datetime, timedelta
from typing import Any

import pytest
from alembic.autogenerate import compare_metadata
from alembic.runtime.migration import MigrationContext
from hypothesis import given
from hypothesis import strategies as st
from sqlalchemy import select, text, update
from sqlalchemy.exc import DBAPIError

from service.orders.events import EVENTS
from service.parts import Parts
from service.store import store as store_module
from service.store.columns import EPOCH, Moment
from service.store.faults import StoreBusyError, StoreFullError, StoreOldError
from service.store.ids import new_id
from service.store.migrating import check_migrated, migrate
from service.store.store import Store
from service.store.tables import Counter, Row
from tests.service.conftest import sqlite_alone

DIALECT = None  # of no matter to a Moment
postgresql_alone = pytest.mark.parametrize("database_url", ["postgresql"], indirect=True)


def counted(parts: Parts) -> int:
    with parts.store.reading() as session:
        return session.scalars(select(Counter.value).where(Counter.name == EVENTS)).one()


def test_the_migrations_make_the_tables_that_the_program_knows(any_parts: Parts) -> None:
    def is_ours(name: str | None, kind: str, parents: object) -> bool:
        return kind != "table" or name in Row.metadata.tables  # the queue may have tables of its own beside them

    with any_parts.store.reading() as session:
        context = MigrationContext.configure(session.connection(), opts={"include_name": is_ours})
        differences = compare_metadata(context, Row.metadata)

    assert differences == []


def test_migrating_again_changes_nothing(any_parts: Parts) -> None:
    before, after = migrate(any_parts.store)

    assert before == after


def test_a_database_without_tables_says_how_to_make_them(tmp_path: object) -> None:
    empty = Store(f"sqlite:///{tmp_path}/empty.sqlite")

    with pytest.raises(StoreOldError, match="has no tables yet; run  discwright migrate"):
        check_migrated(empty)
    empty.close()


def test_what_an_exception_leaves_is_not_kept(any_parts: Parts) -> None:
    def change_and_fail() -> None:
        with any_parts.store.writing() as session:
            session.execute(update(Counter).values(value=5))
            raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        change_and_fail()

    assert counted(any_parts) == 0


def test_writers_take_turns_and_lose_no_count(any_parts: Parts) -> None:
    def count_up() -> None:
        for _ in range(10):
            with any_parts.store.writing() as session:
                now = session.scalars(select(Counter.value).with_for_update()).one()
                session.execute(update(Counter).values(value=now + 1))

    threads = [threading.Thread(target=count_up) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()

    assert counted(any_parts) == 40  # 4 threads of 10


@sqlite_alone("its lock")
def test_a_database_held_by_another_is_busy_and_works_again_after(
    parts: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(store_module, "BUSY_TIMEOUT_S", 0)
    impatient = Store(parts.settings.database_url)
    holder = sqlite3.connect(parts.settings.places.data_directory / "discwright.sqlite", isolation_level=None)
    holder.execute("BEGIN IMMEDIATE")

    with pytest.raises(StoreBusyError, match="held by another"), impatient.writing():
        pass
    holder.execute("ROLLBACK")
    with impatient.writing() as session:
        session.execute(update(Counter).values(value=1))

    assert counted(parts) == 1
    holder.close()
    impatient.close()


def test_a_server_that_is_not_there_is_busy() -> None:
    nowhere = Store("postgresql+psycopg://nobody@127.0.0.1:1/nothing")  # nothing listens on port 1

    with pytest.raises(StoreBusyError, match="does not answer"), nowhere.reading() as session:
        session.connection()
    nowhere.close()


def test_work_is_tried_again_where_the_database_did_not_answer(parts: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(store_module, "RETRY_AFTER_S", (0.0, 0.0))
    tries = []

    def fails_once(_session: object) -> str:
        tries.append(1)
        if len(tries) == 1:
            raise StoreBusyError("held")
        return "done"

    assert parts.store.again(fails_once) == "done"
    assert len(tries) == 2


@given(st.datetimes(timezones=st.just(UTC)))
def test_a_moment_comes_back_as_it_was(moment: datetime) -> None:
    kept = Moment().process_bind_param(moment, DIALECT)  # type: ignore[arg-type]

    assert Moment().process_result_value(kept, DIALECT) == moment  # type: ignore[arg-type]


def test_a_moment_without_a_zone_is_refused() -> None:
    with pytest.raises(ValueError, match="names no time zone"):
        Moment().process_bind_param(datetime(2026, 1, 1), DIALECT)  # type: ignore[arg-type]


def test_ids_sort_by_their_moment_and_differ_within_one() -> None:
    moments = [EPOCH + timedelta(microseconds=n) for n in (0, 1, 10**15)]
    ids = [new_id("order", moment) for moment in moments]

    assert ids == sorted(ids)
    assert {len(one) for one in ids} == {len("order_") + 32}
    assert new_id("order", EPOCH) != new_id("order", EPOCH)


def test_work_that_fails_every_time_is_told_after_the_last_try(parts: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(store_module, "RETRY_AFTER_S", (0.0, 0.0))
    tries = []

    def fails(_session: object) -> None:
        tries.append(1)
        raise StoreBusyError("held")

    with pytest.raises(StoreBusyError, match=r"^held$"):
        parts.store.again(fails)

    assert len(tries) == 3  # at once, and after each of two waits


def test_work_that_succeeds_on_the_last_try_is_done(parts: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(store_module, "RETRY_AFTER_S", (0.0,))
    tries = []

    def fails_once(_session: object) -> str:
        tries.append(1)
        if len(tries) == 1:
            raise StoreBusyError("held")
        return "done"

    assert parts.store.again(fails_once) == "done"


def test_who_finds_all_connections_taken_is_told_to_come_again(parts: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    few = Store(parts.settings.database_url)
    pool: Any = few.engine.pool
    monkeypatch.setattr(pool, "_timeout", 0.01)
    monkeypatch.setattr(pool, "_max_overflow", 0)
    with ExitStack() as taken:
        for _ in range(pool.size()):
            taken.enter_context(few.engine.connect())

        with (
            pytest.raises(StoreBusyError, match=r"^all connections to the database are taken"),
            few.reading() as session,
        ):
            session.connection()
    few.close()


def test_a_fault_in_the_program_s_own_words_to_the_database_is_not_told_as_the_database_s(parts: Parts) -> None:
    with pytest.raises(DBAPIError, match="no_such_table"), parts.store.reading() as session:
        session.execute(text("SELECT 1 FROM no_such_table"))


@postgresql_alone
def test_a_server_whose_disk_is_full_has_no_room(parts: Parts) -> None:
    # ERRCODE 53100, disk_full: PostgreSQL, appendix A
    raising = text("DO $$ BEGIN RAISE EXCEPTION 'could not extend file' USING ERRCODE = '53100'; END $$")

    told = r"^there is no room left where the database is$"
    with pytest.raises(StoreFullError, match=told), parts.store.writing() as session:
        session.execute(raising)
