"""The order in which tests are begun."""

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from tests.conftest import MOSTLY_WAITING, pytest_collection_modifyitems

TESTS = Path(__file__).parent


@dataclass
class Item:
    """What the order is decided by."""

    path: Path


def test_whole_processes_are_tried_first_and_all_else_stays_in_its_order() -> None:
    names = [
        *("browser/test_forms.py", "faults/test_whole.py", "layout/test_walk.py", "service/api/test_runs.py"),
        *("service/background/test_worker.py", "service/store/test_files.py", "service/test_up.py", "test_readme.py"),
    ]
    items: list[Any] = [Item(TESTS / name) for name in names]

    pytest_collection_modifyitems(items)

    assert [str(item.path.relative_to(TESTS)) for item in items] == [
        *("faults/test_whole.py", "service/background/test_worker.py", "service/test_up.py"),
        *("browser/test_forms.py", "layout/test_walk.py", "service/api/test_runs.py"),
        *("service/store/test_files.py", "test_readme.py"),
    ]


def test_the_folders_that_are_tried_first_are_there() -> None:
    assert all(any(folder.glob("test_*.py")) for folder in MOSTLY_WAITING)
