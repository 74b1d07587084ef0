"""A search that goes on: the service stops it, answers with what was found, and does not keep it."""

import json
from io import BytesIO

import pytest

from layout import walk
from service.limits import Limits
from tests.service.api.conftest import ClientFor
from tests.service.conftest import sqlite_first
from tests.service.fakes import TUNE, Client, FakePlanner
from tests.service.hard_tune import hard_tune

MOST_S = Limits().search_s


def posted(client: Client, **settings: float) -> str:
    """The fingerprint of what is made."""
    answer = client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": json.dumps(settings)})
    assert answer.status_code == 201
    return str(json.loads(answer.data)["fingerprint"])


@pytest.mark.parametrize("settings", [{}, {"time_limit_s": MOST_S + 1}], ids=["no limit", "a longer one"])
def test_a_layout_that_the_service_stopped_is_answered_and_made_anew_the_next_time(
    settings: dict[str, float], client_for: ClientFor
) -> None:
    planner = FakePlanner(needs_s=MOST_S + 2)
    client = client_for(planner)

    first, second = posted(client, **settings), posted(client, **settings)

    assert first == second
    assert planner.laid_out_count == 2
    assert client.get(f"/v1/layouts/{first}").status_code == 404


def test_a_layout_that_its_own_settings_stopped_is_kept(client_for: ClientFor) -> None:
    planner = FakePlanner(needs_s=MOST_S + 2)
    client = client_for(planner)

    first, _ = posted(client, time_limit_s=MOST_S), posted(client, time_limit_s=MOST_S)

    assert planner.laid_out_count == 1
    assert client.get(f"/v1/layouts/{first}").status_code == 200


def test_a_search_that_ends_by_itself_is_kept(client_for: ClientFor) -> None:
    planner = FakePlanner(needs_s=MOST_S)
    client = client_for(planner)

    posted(client)
    posted(client)

    assert planner.laid_out_count == 1


def test_the_limit_is_told_with_the_others(client_for: ClientFor) -> None:
    limits = client_for(FakePlanner()).get("/v1/limits")

    assert [one["value"] for one in json.loads(limits.data)["limits"] if one["name"] == "search_s"] == [MOST_S]


@sqlite_first("a search, which asks no database")
def test_a_hard_tune_is_answered_with_the_best_found_by_then(client_for: ClientFor) -> None:
    client = client_for(walk, Limits(search_s=1))
    settings = json.dumps({"octave_moves": "all", "transpose": {"range": 48}})

    answer = client.post_parts(
        {"tune": (BytesIO(hard_tune()), "a.mid"), "settings": settings}, query="movement=mossbrook-67"
    )

    assert answer.status_code == 201
    told = json.loads(answer.data)
    assert told["layout"]["projections"]
    assert client.get(told["links"]["report.json"]).status_code == 404
