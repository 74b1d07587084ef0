"""The first start makes the shop's key once, though several processes start at a time."""

import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

from service.access.browsers import find_browser, sign_in_by_link
from service.access.first_start import first_start
from service.access.keys import find_key, list_keys, revoke_key
from service.access.scopes import Scope
from service.parts import Parts

NOW = datetime(2026, 12, 2, 10, 0, tzinfo=UTC)
TOP = Path(__file__).parents[3]
# A process of its own: waits until all are ready, then starts as the service does.
STARTER = """
import sys
from datetime import UTC, datetime
from service.access.first_start import first_start
from service.store.store import Store
store = Store(sys.argv[1])
with store.reading():
    pass
print("ready", flush=True)
sys.stdin.readline()
made = first_start(store, datetime.now(UTC))
print("made" if made else "found", flush=True)
"""


def test_the_first_start_makes_the_shop_a_key_with_every_scope(any_parts: Parts) -> None:
    first = first_start(any_parts.store, NOW)

    assert first is not None
    found = find_key(any_parts.store, first.secret)
    assert found is not None
    assert found.asker.scopes == frozenset(Scope)
    assert found.asker.is_shop
    assert not found.asker.is_test
    assert [key.id for key in list_keys(any_parts.store)] == [first.key_id]


def test_the_first_start_gives_a_link_that_signs_in_as_that_key(any_parts: Parts) -> None:
    first = first_start(any_parts.store, NOW)
    assert first is not None
    secret = first.sign_in_path.removeprefix("/sign-in/")

    signed_in = sign_in_by_link(any_parts.store, secret, NOW + timedelta(minutes=1), timedelta(hours=1))

    assert signed_in is not None
    browser = find_browser(any_parts.store, signed_in.secret, NOW)
    assert browser is not None
    assert browser.key.asker.key_id == first.key_id


def test_a_later_start_makes_nothing_not_even_where_every_key_is_revoked(any_parts: Parts) -> None:
    first = first_start(any_parts.store, NOW)
    assert first is not None
    later = first_start(any_parts.store, NOW)
    revoke_key(any_parts.store, first.key_id, NOW)

    assert later is None
    assert first_start(any_parts.store, NOW) is None


def test_of_four_processes_that_start_at_a_time_one_makes_the_key(any_parts: Parts) -> None:
    url = any_parts.settings.database_url
    command = [sys.executable, "-c", STARTER, url]
    starters = [
        subprocess.Popen(command, cwd=TOP, stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True) for _ in range(4)
    ]
    try:
        for starter in starters:
            assert starter.stdout is not None
            assert starter.stdout.readline() == "ready\n"
        for starter in starters:
            assert starter.stdin is not None
            starter.stdin.write("\n")
            starter.stdin.flush()
        told = sorted(starter.communicate(timeout=60)[0].strip() for starter in starters)
    finally:
        for starter in starters:
            starter.kill()

    assert told == ["found", "found", "found", "made"]
    assert len(list_keys(any_parts.store)) == 1
