"""Tests of pages leave nothing open: a server of databases has only so many connections for all of them."""

import time

import pytest
from sqlalchemy import text

from service.access.scopes import Scope
from service.parts import Parts
from tests.service.api.guarded import bearing, new_key
from tests.service.pages.browsing import browsing
from tests.service.pages.test_own_routes import HTML

CONNECTIONS = text("SELECT count(*) FROM pg_stat_activity WHERE datname = current_database()")
ENDS_WITHIN_S = 5.0  # a connection that was closed is still listed for a moment


def connections(parts: Parts) -> int:
    with parts.store.reading() as session:
        return int(session.execute(CONNECTIONS).scalar_one())


@pytest.mark.parametrize("database_url", ["postgresql"], indirect=True)
def test_a_service_that_was_browsed_leaves_no_connection_open(parts: Parts) -> None:
    asker = {**HTML, **bearing(new_key(parts, Scope.READ))}
    before = connections(parts)

    with browsing(parts.settings) as client:
        answer = client.get("/movements", headers=asker)
        during = connections(parts)
    closed_by_s = time.monotonic() + ENDS_WITHIN_S
    while connections(parts) > before and time.monotonic() < closed_by_s:
        time.sleep(0.01)

    assert answer.status_code == 200
    assert during > before
    assert connections(parts) == before
