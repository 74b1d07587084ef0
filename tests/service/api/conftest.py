from pathlib import Path

import pytest

from tests.service.fakes import NEAR_RIM, THIN_WEB, Client, FakePlanner, client_of


@pytest.fixture
def planner() -> FakePlanner:
    return FakePlanner()


@pytest.fixture
def client(planner: FakePlanner, tmp_path: Path) -> Client:
    return client_of(planner, tmp_path)


@pytest.fixture
def faulty_client(tmp_path: Path) -> Client:
    """A client of a service whose every disc has a web too thin to cut."""
    return client_of(FakePlanner(findings=(THIN_WEB, NEAR_RIM)), tmp_path)
