from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from tests.service.fakes import NEAR_RIM, THIN_WEB, Client, FakePlanner, client_of

ClientFor = Callable[..., Client]


@pytest.fixture
def planner() -> FakePlanner:
    return FakePlanner()


@pytest.fixture
def client_for(tmp_path: Path, database_url: str | None) -> Iterator[ClientFor]:
    """Makes clients of services with a planner, and perhaps limits, of their own; closes what they opened."""
    made = []

    def client_for(*planner_and_limits: object) -> Client:
        made.append(client_of(tmp_path, database_url, *planner_and_limits))
        return made[-1]

    yield client_for
    for one in made:
        one.close()


@pytest.fixture
def client(planner: FakePlanner, client_for: ClientFor) -> Client:
    return client_for(planner)


@pytest.fixture
def faulty_client(client_for: ClientFor) -> Client:
    """A client of a service whose every disc has a web too thin to cut."""
    return client_for(FakePlanner(findings=(THIN_WEB, NEAR_RIM)))
