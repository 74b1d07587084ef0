"""Keys: what is kept of them, who finds them, what a revoked one opens."""

import logging
import threading
import time
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from hashlib import sha256

import pytest
from hypothesis import given
from hypothesis import strategies as st
from sqlalchemy import event, select, text, update

from service.access import keys
from service.access.asker import Asker
from service.access.browsers import find_browser, make_link, sign_in_as, sign_in_by_link
from service.access.keys import KeyAsked, NewKey, find_key, list_keys, make_key, note_use, revoke_key
from service.access.owners import OwnerTold, TitleError, checked_title, hold_access, owner_titled, the_shop
from service.access.scopes import MEANINGS, Scope, ScopeError, scopes_of
from service.access.secret_texts import could_be_key, new_key_secret
from service.parts import Parts
from service.store.store import Store
from service.store.tables import BrowserSession, Key, LoginLink, Owner
from tests.service.conftest import sqlite_alone

NOW = datetime(2026, 12, 2, 10, 0, tzinfo=UTC)
READING = KeyAsked(title="the web shop", scopes=frozenset({Scope.ORDER, Scope.READ}))


def made(store: Store, asked: KeyAsked = READING, owner: str | None = None, now: datetime = NOW) -> NewKey:
    with store.writing() as session:
        hold_access(session)
        whose = the_shop(session, now) if owner is None else owner_titled(session, owner, now)
        return make_key(session, whose, asked, now)


def everything_kept(store: Store) -> str:
    with store.reading() as session:
        return repr([session.execute(text(f"SELECT * FROM {name}")).all() for name in ("keys", "owners")])


@pytest.fixture
def statements(parts: Parts) -> Iterator[list[str]]:
    seen: list[str] = []
    listen = lambda *told: seen.append(told[2])  # noqa: E731
    event.listen(parts.store.engine, "before_cursor_execute", listen)
    yield seen
    event.remove(parts.store.engine, "before_cursor_execute", listen)


def test_a_key_is_found_by_its_secret(any_parts: Parts) -> None:
    new = made(any_parts.store)

    found = find_key(any_parts.store, new.secret)

    assert found is not None
    assert found.last_used_at is None
    assert found.asker == Asker(
        key_id=new.told.id,
        owner_id=new.told.owner.id,
        title="the web shop",
        is_shop=True,
        is_test=False,
        scopes=frozenset({Scope.READ, Scope.ORDER}),
    )


def test_a_secret_is_256_random_bits_told_as_a_key_s(parts: Parts) -> None:
    secrets = {made(parts.store).secret for _ in range(50)}

    assert len(secrets) == 50
    assert all(could_be_key(secret) and len(secret) == 3 + 43 for secret in secrets)  # 43 = ceil(32 * 4 / 3)


def test_only_the_digest_of_a_secret_is_kept(any_parts: Parts) -> None:
    new = made(any_parts.store)

    kept = everything_kept(any_parts.store)

    assert sha256(new.secret.encode()).hexdigest() in kept
    assert new.secret not in kept
    assert new.secret.removeprefix("dw_") not in kept


@pytest.mark.parametrize("change", [lambda s: s + "A", lambda s: s[:-1], lambda s: s.swapcase(), lambda s: s[3:]])
def test_a_secret_that_is_not_quite_right_finds_nothing(parts: Parts, change: "type[str]") -> None:
    new = made(parts.store)

    assert find_key(parts.store, change(new.secret)) is None


@given(st.text())
def test_no_text_but_a_secret_has_the_form_of_one(text: str) -> None:
    assert not could_be_key(text) or (len(text) == 46 and text.isascii())


@pytest.mark.parametrize("strange", ["", "\0", "\udcff", "dw_", "é" * 46, "x" * 100_000])
def test_a_strange_text_finds_nothing_and_breaks_nothing(any_parts: Parts, strange: str) -> None:
    assert find_key(any_parts.store, strange) is None


def test_a_key_that_never_was_and_a_revoked_one_take_the_same_way(parts: Parts, statements: list[str]) -> None:
    revoked = made(parts.store)
    revoke_key(parts.store, revoked.told.id, NOW)
    seen = {}
    for name, secret in (("unknown", new_key_secret()), ("revoked", revoked.secret)):
        statements.clear()
        assert find_key(parts.store, secret) is None
        seen[name] = tuple(statements)

    assert len(seen["unknown"]) > 0
    assert seen["unknown"] == seen["revoked"]


def test_a_revoked_key_opens_nothing_nor_do_its_browsers_and_links(any_parts: Parts) -> None:
    store = any_parts.store
    new = made(store)
    found = find_key(store, new.secret)
    assert found is not None
    browser = sign_in_as(store, found, NOW, timedelta(hours=1))
    with store.writing() as session:
        link = make_link(session, new.told.id, NOW)

    told = revoke_key(store, new.told.id, NOW)

    assert told is not None
    assert told.revoked_at == NOW
    assert find_key(store, new.secret) is None
    assert find_browser(store, browser.secret, NOW) is None
    assert sign_in_by_link(store, link, NOW, timedelta(hours=1)) is None
    with store.reading() as session:
        assert session.scalars(select(BrowserSession.key_id)).all() == []
        assert session.scalars(select(LoginLink.key_id)).all() == []


def test_a_key_revoked_twice_keeps_the_first_moment(any_parts: Parts) -> None:
    new = made(any_parts.store)
    revoke_key(any_parts.store, new.told.id, NOW)

    again = revoke_key(any_parts.store, new.told.id, NOW + timedelta(days=1))

    assert again is not None
    assert again.revoked_at == NOW


def test_another_owner_s_key_cannot_be_revoked_and_looks_as_if_there_were_none(any_parts: Parts) -> None:
    store = any_parts.store
    theirs = made(store, owner="Bellgrove")
    ours = made(store, owner="Larkfield")

    answers = [
        revoke_key(store, key_id, NOW, owner_id=ours.told.owner.id)
        for key_id in (theirs.told.id, "key_" + 32 * "0", "\0", "key_1")
    ]

    assert answers == [None, None, None, None]
    assert find_key(store, theirs.secret) is not None


def test_keys_are_listed_by_owner_the_oldest_first_in_pages(any_parts: Parts) -> None:
    store = any_parts.store
    ids = [made(store, owner="Bellgrove", now=NOW + timedelta(seconds=s)).told.id for s in range(5)]
    shop_s = made(store, now=NOW + timedelta(seconds=9)).told

    first = list_keys(store, owner_id=list_keys(store)[0].owner.id, most=2)
    rest = list_keys(store, owner_id=first[0].owner.id, after=first[-1].id)

    assert [key.id for key in first + rest] == ids
    assert [key.id for key in list_keys(store)] == [*ids, shop_s.id]


def test_use_is_noted_once_a_minute_at_most(any_parts: Parts) -> None:
    store = any_parts.store
    secret = made(store).secret

    def use(at: datetime) -> bool:
        found = find_key(store, secret)
        assert found is not None
        return note_use(store, found, at)

    noted = [use(NOW + timedelta(seconds=s)) for s in (0, 1, 59, 60, 61, 119, 120)]

    assert noted == [True, False, False, True, False, False, True]
    assert list_keys(store)[0].last_used_at == NOW + timedelta(seconds=120)


def test_of_two_processes_that_saw_the_same_old_use_one_notes_the_new_one(any_parts: Parts) -> None:
    store = any_parts.store
    found = find_key(store, made(store).secret)
    assert found is not None

    assert [note_use(store, found, NOW), note_use(store, found, NOW + timedelta(seconds=1))] == [True, False]


def test_reading_with_a_key_used_just_now_writes_nothing(parts: Parts, statements: list[str]) -> None:
    secret = made(parts.store).secret
    found = find_key(parts.store, secret)
    assert found is not None
    note_use(parts.store, found, NOW)
    statements.clear()

    again = find_key(parts.store, secret)
    assert again is not None
    note_use(parts.store, again, NOW + timedelta(seconds=30))

    # A turn to read alone begins with that one word on SQLite, with none on PostgreSQL.
    assert [line.split()[0] for line in statements if line != "BEGIN"] == ["SELECT"]


def test_a_request_goes_on_at_once_where_its_use_cannot_be_noted(
    any_parts: Parts, caplog: pytest.LogCaptureFixture
) -> None:
    store = any_parts.store
    new = made(store)
    other = Store(any_parts.settings.database_url)
    with other.writing() as session:  # another holds the database, or the key
        session.execute(update(Key).values(title="held"))

        begun_s = time.monotonic()
        with caplog.at_level(logging.WARNING, "discwright"):
            found = find_key(store, new.secret)
            assert found is not None
            noted = note_use(store, found, NOW)
        took_s = time.monotonic() - begun_s
    other.close()

    assert noted is False
    assert took_s < 5  # a writer would wait thirty
    assert f"the use of key {new.told.id} is not noted: the database " in caplog.text
    assert new.secret not in caplog.text
    assert note_use(store, found, NOW)


@sqlite_alone("its patience")
def test_who_writes_after_a_use_was_noted_waits_its_turn_as_before(parts: Parts) -> None:
    found = find_key(parts.store, made(parts.store).secret)
    assert found is not None
    note_use(parts.store, found, NOW)

    with parts.store.reading() as session:  # the one connection of the pool that was used
        waits_ms = session.execute(text("PRAGMA busy_timeout")).scalar_one()

    assert waits_ms == 30_000


def test_owners_are_made_once_though_many_ask_at_a_time(any_parts: Parts) -> None:
    store = any_parts.store
    begin = threading.Barrier(8)

    def ask() -> None:
        begin.wait(10)
        made(store, owner="Bellgrove")
        made(store)

    threads = [threading.Thread(target=ask) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(60)

    with store.reading() as session:
        assert sorted(session.scalars(select(Owner.title))) == ["Bellgrove", "the shop"]
        assert len(session.scalars(select(Key.id)).all()) == 16


def test_a_title_stands_on_one_line() -> None:
    assert checked_title("  Bellgrove & Sons ") == "Bellgrove & Sons"
    for title in ("", "   ", "a\nb", "\0", "\u202ea", "x" * 201):
        with pytest.raises(TitleError, match=r"a title is 1 to 200 characters that can be shown on one line; this has"):
            checked_title(title)


def test_scopes_are_words_and_each_has_a_meaning() -> None:
    assert scopes_of(["read", "admin", "read"]) == {Scope.READ, Scope.ADMIN}
    assert scopes_of([]) == frozenset()
    assert set(MEANINGS) == set(Scope)
    with pytest.raises(ScopeError, match="'write' is no scope; scopes are read, order, release, movements, admin"):
        scopes_of(["read", "write"])


def test_the_shop_s_keys_see_all_owners_but_not_those_for_tests() -> None:
    def sees(*, is_shop: bool, is_test: bool) -> bool:
        return Asker(
            key_id="k", owner_id="o", title="t", is_shop=is_shop, is_test=is_test, scopes=frozenset()
        ).sees_all_owners

    assert sees(is_shop=True, is_test=False)
    assert not sees(is_shop=True, is_test=True)
    assert not sees(is_shop=False, is_test=False)


def test_an_owner_is_told_by_title(any_parts: Parts) -> None:
    with any_parts.store.writing() as session:
        first = owner_titled(session, "Bellgrove", NOW)
        again = owner_titled(session, "Bellgrove", NOW)
        other = owner_titled(session, "bellgrove", NOW)

    assert first == again == OwnerTold(id=first.id, title="Bellgrove", is_shop=False)
    assert other.id != first.id
    assert keys.KEY_ID.fullmatch(first.id) is None
