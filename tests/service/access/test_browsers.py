"""Browsers: signed in once by a link, for so many hours, until they sign out."""

import threading
from collections.abc import Callable
from datetime import UTC, datetime, timedelta

import pytest

from service.access.browsers import (
    SignedIn,
    find_browser,
    make_link,
    sign_in_as,
    sign_in_by_link,
    sign_out,
    sweep_browsers,
)
from service.access.first_start import first_start
from service.access.keys import KeyAsked, find_key, make_key
from service.access.owners import the_shop
from service.access.scopes import Scope
from service.parts import Parts

NOW = datetime(2026, 12, 2, 10, 0, tzinfo=UTC)
HOUR = timedelta(hours=1)
LinkOf = Callable[[Parts], str]


def new_link(parts: Parts) -> str:
    with parts.store.writing() as session:
        asked = KeyAsked(title="at the bench", scopes=frozenset({Scope.READ}))
        new = make_key(session, the_shop(session, NOW), asked, NOW)
        return make_link(session, new.told.id, NOW)


def test_a_link_signs_one_browser_in_once(any_parts: Parts) -> None:
    link = new_link(any_parts)

    signed_in = sign_in_by_link(any_parts.store, link, NOW, HOUR)
    again = sign_in_by_link(any_parts.store, link, NOW, HOUR)

    assert signed_in is not None
    assert signed_in.expires_at == NOW + HOUR
    browser = find_browser(any_parts.store, signed_in.secret, NOW)
    assert browser is not None
    assert browser.key.asker.title == "at the bench"
    assert again is None


@pytest.mark.parametrize(("late_s", "works"), [(14 * 60 + 59, True), (15 * 60, False)])
def test_a_link_holds_a_quarter_of_an_hour(any_parts: Parts, late_s: int, works: bool) -> None:  # noqa: FBT001
    link = new_link(any_parts)

    signed_in = sign_in_by_link(any_parts.store, link, NOW + timedelta(seconds=late_s), HOUR)

    assert (signed_in is not None) == works


@pytest.mark.parametrize("strange", ["", "\0", "never-made", "x" * 10_000])
def test_a_link_that_was_never_made_signs_nobody_in(any_parts: Parts, strange: str) -> None:
    assert sign_in_by_link(any_parts.store, strange, NOW, HOUR) is None


def test_of_many_browsers_that_bring_one_link_at_a_time_one_is_signed_in(any_parts: Parts) -> None:
    link = new_link(any_parts)
    begin = threading.Barrier(8)
    answers: list[SignedIn | None] = []

    def ask() -> None:
        begin.wait(10)
        answers.append(sign_in_by_link(any_parts.store, link, NOW, HOUR))

    threads = [threading.Thread(target=ask) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(60)

    assert len(answers) == 8
    assert sum(answer is not None for answer in answers) == 1


def signed_in_browser(parts: Parts) -> SignedIn:
    signed_in = sign_in_by_link(parts.store, new_link(parts), NOW, HOUR)
    assert signed_in is not None
    return signed_in


def test_a_browser_is_signed_out_when_its_hours_are_over(any_parts: Parts) -> None:
    secret = signed_in_browser(any_parts).secret

    assert find_browser(any_parts.store, secret, NOW + HOUR - timedelta(seconds=1)) is not None
    assert find_browser(any_parts.store, secret, NOW + HOUR) is None


def test_a_browser_that_signs_out_is_forgotten_and_others_are_not(any_parts: Parts) -> None:
    leaves, stays = signed_in_browser(any_parts).secret, signed_in_browser(any_parts).secret

    sign_out(any_parts.store, leaves)
    sign_out(any_parts.store, leaves)

    assert find_browser(any_parts.store, leaves, NOW) is None
    assert find_browser(any_parts.store, stays, NOW) is not None


def test_a_browser_has_a_token_of_its_own(any_parts: Parts) -> None:
    one, other = signed_in_browser(any_parts), signed_in_browser(any_parts)

    browser = find_browser(any_parts.store, one.secret, NOW)

    assert browser is not None
    assert browser.is_token(one.csrf_token)
    assert not browser.is_token(other.csrf_token)
    assert not browser.is_token(one.secret)
    assert not browser.is_token("")


def test_what_is_over_is_swept_away_and_what_holds_is_not(any_parts: Parts) -> None:
    store = any_parts.store
    signed_in = signed_in_browser(any_parts)
    new_link(any_parts)

    early = sweep_browsers(store, NOW)
    # two links, one of them used, are over after a quarter of an hour; the browser is not
    swept = sweep_browsers(store, NOW + timedelta(minutes=16))

    assert (early, swept) == (0, 2)
    assert find_browser(store, signed_in.secret, NOW + timedelta(minutes=16)) is not None
    assert sweep_browsers(store, NOW + HOUR) == 1


def test_a_browser_signs_in_with_the_key_itself(any_parts: Parts) -> None:
    first = first_start(any_parts.store, NOW)
    assert first is not None
    key = find_key(any_parts.store, first.secret)
    assert key is not None

    signed_in = sign_in_as(any_parts.store, key, NOW, HOUR)

    browser = find_browser(any_parts.store, signed_in.secret, NOW)
    assert browser is not None
    assert browser.key.asker == key.asker
