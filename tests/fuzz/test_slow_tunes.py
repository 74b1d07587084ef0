"""Tunes made to be slow: each is read within 2 s and 300 MiB, laid out within the service's time, and never a 500."""

import json
import os
import subprocess
import sys
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from layout import walk
from service.limits import Limits
from tests.fuzz.slow_tunes import LONG_SEARCHES, SLOW_TUNES
from tests.service.fakes import Client, client_of
from tests.thorough import THOROUGH

TOP = Path(__file__).parents[2]
# A quarter of what a search may take in the service; the slowest takes 3 s, most of it one call of the integer program.
WALKED_S = Limits().search_s / 4
# Of what is laid out whole, each kind that says something new to the stages after reading; TESTS=thorough takes all.
NEW_TO_LATER_STAGES = (
    *("100,000 notes at one instant", "50,000 notes at one instant", "notes never ended", "the longest deltas"),
    *("no tempo like another", "65,535 tracks", "the shortest beats for four hours", "a name of line ends"),
    *("division 0", "SMPTE division E301", "megabytes of FF"),
)
WALKED = tuple(SLOW_TUNES) if THOROUGH else NEW_TO_LATER_STAGES
ENDS_AFTER_S = 500  # on the clock of the wall, of a busy machine


@cache
def told(how: str, most_cpu_s: float, names: tuple[str, ...]) -> dict[str, Any]:
    """What a process of its own tells of every tune named; a tune that it did not come to is missing."""
    command = [sys.executable, "-m", "tests.fuzz.answering", how, str(most_cpu_s), *names]
    # Where coverage is measured this process is not: counting lines takes as long again as what is timed.
    environment = {name: value for name, value in os.environ.items() if not name.startswith("COVERAGE_PROCESS_")}
    done = subprocess.run(
        command, cwd=TOP, env=environment, capture_output=True, text=True, check=False, timeout=ENDS_AFTER_S
    )
    assert done.returncode == 0, done.stderr[-2000:]
    return dict(json.loads(line) for line in done.stdout.splitlines())


@pytest.mark.parametrize("name", SLOW_TUNES)
def test_a_slow_tune_is_read_or_refused_within_two_seconds(name: str) -> None:
    assert told("read", 2.0, tuple(SLOW_TUNES))[name] is None


@pytest.mark.parametrize("name", WALKED)
def test_a_slow_tune_is_laid_out_or_refused_within_the_time_of_the_service(name: str) -> None:
    assert told("walk", WALKED_S, WALKED)[name] is None


@pytest.mark.skipif(not THOROUGH, reason="20 s: these go on until the search's budget of nodes is spent")
@pytest.mark.parametrize("name", LONG_SEARCHES)
def test_a_search_that_spends_its_whole_budget_ends_within_the_time_of_the_service(name: str) -> None:
    assert told("walk", Limits().search_s, tuple(LONG_SEARCHES))[name] is None


REFUSED = ((413, "/problems/upload-too-large"), (422, "/problems/midi-unreadable"))


@pytest.fixture(scope="module")
def real_client(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Client]:
    client = client_of(tmp_path_factory.mktemp("service"), None, walk)
    yield client
    client.close()


@pytest.mark.parametrize("name", [*WALKED, "ten megabytes of FF"])
def test_a_slow_tune_sent_to_the_service_is_laid_out_or_refused_in_words(real_client: Client, name: str) -> None:
    answer = real_client.post_tune(SLOW_TUNES[name]())

    told_of = answer.get_json(silent=True) or {}
    if answer.status_code != 201:
        assert (answer.status_code, told_of.get("type")) in REFUSED, answer.text
        assert told_of["detail"]
    assert "Traceback" not in answer.text
