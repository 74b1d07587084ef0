"""The service as it runs does nothing that its API document does not say, whatever it is sent: a short try.

With a key it is tried on PostgreSQL, which refuses more of what it is asked, and without one on SQLite; TESTS=thorough
tries both on both. The long one, with many more requests and every border value, is `tests/run faults`.
"""

from collections.abc import Iterator

import pytest

from tests.service.api.outside import failures_in, try_from_outside
from tests.service.api.running import Running, running
from tests.thorough import THOROUGH


@pytest.fixture(scope="module")
def service(tmp_path_factory: pytest.TempPathFactory, module_database_url: str | None) -> Iterator[Running]:
    with running(tmp_path_factory.mktemp("outside"), module_database_url, with_worker=False) as started:
        yield started


TRIED = [("postgresql", True), ("sqlite", False)]
TRIED += [("sqlite", True), ("postgresql", False)] if THOROUGH else []


@pytest.mark.parametrize(("module_database_url", "with_key"), TRIED, indirect=["module_database_url"])
def test_nothing_happens_that_the_document_does_not_say(service: Running, *, with_key: bool) -> None:
    phases, most = ("fuzzing,stateful", "4") if with_key else ("fuzzing", "2")
    asked = ("--phases", phases, "--max-examples", most, "--seed", "5")

    tried = try_from_outside(service, *asked, key=service.key if with_key else None, within_s=300)

    if tried.told:
        pytest.fail(tried.told, pytrace=False)
    assert tried.cases > 69  # more than one for each operation
    assert failures_in(service) == []
