"""How all tests are run: with which examples, in which order, and when garbage is looked for."""

import gc
import logging
from collections.abc import Generator
from pathlib import Path

import pytest
from hypothesis import settings

from tests.thorough import MUTANTS, tried

HERE = Path(__file__).parent
# Tests of whole processes.
MOSTLY_WAITING = (HERE / "faults", HERE / "service", HERE / "service" / "background", HERE / "service" / "computing")

# No test fails for being slow on a busy machine.
settings.register_profile("untimed", deadline=None, max_examples=tried(100), derandomize=MUTANTS)
settings.load_profile("untimed")

# ezdxf's remarks about damaged files quote their bytes, half letters among them, which no report can carry from
# one process to another; what the program itself says of such files is tested.
logging.getLogger("ezdxf").setLevel(logging.CRITICAL)


@pytest.hookimpl(wrapper=True)
def pytest_collection() -> Generator[None, object, object]:
    """Look for no garbage while tests are collected, and never again among the half million objects that stay."""
    gc.disable()
    try:
        return (yield)
    finally:
        gc.collect()
        gc.freeze()
        gc.enable()


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Begin with what mostly waits: one worker goes through it while others compute, and the end is of short tests."""
    items.sort(key=lambda item: item.path.parent not in MOSTLY_WAITING)
