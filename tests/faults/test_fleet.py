"""The fleet of the tests of faults itself: what a failing test must not leave behind."""

from pathlib import Path

import pytest

from tests.faults.fleet import Fleet
from tests.service.conftest import environment_of


def test_a_test_that_fails_leaves_no_worker_behind_and_starts_none_again(tmp_path: Path) -> None:
    def fail_with(fleet: Fleet) -> None:
        with fleet:
            pids.extend(fleet.pids())
            raise TimeoutError

    pids: list[int] = []
    fleet = Fleet(environment_of(tmp_path), tmp_path / "log", workers=2)

    with pytest.raises(TimeoutError):
        fail_with(fleet)

    assert len(pids) == 2
    assert fleet.starts == 2
    assert fleet.pids() == []
    assert not any(Path(f"/proc/{pid}").exists() for pid in pids)
