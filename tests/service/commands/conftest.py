from collections.abc import Callable
from pathlib import Path

import pytest

from service.commands.main import main
from tests.service.fakes import TUNE, FakePlanner

Discwright = Callable[..., int]


@pytest.fixture
def planner() -> FakePlanner:
    return FakePlanner()


@pytest.fixture
def tune(tmp_path: Path) -> Path:
    path = tmp_path / "dance.mid"
    path.write_bytes(TUNE)
    return path


@pytest.fixture
def discwright(planner: FakePlanner) -> Discwright:
    """The command, with a planner that computes nothing."""

    def run(*arguments: object) -> int:
        return main([str(argument) for argument in arguments], planner=planner)

    return run
