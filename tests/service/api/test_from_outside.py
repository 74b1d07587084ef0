"""The service as it runs does nothing that its API document does not say, whatever it is sent: a short try.

The long one, with many more requests and every border value, is `tests/run faults`.
"""

from collections.abc import Iterator

import pytest

from tests.service.api.outside import failures_in, try_from_outside
from tests.service.api.running import Running, running


@pytest.fixture(scope="module")
def service(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Running]:
    with running(tmp_path_factory.mktemp("outside"), with_worker=False) as started:
        yield started


@pytest.mark.parametrize(
    ("with_key", "phases", "most"), [(True, "fuzzing,stateful", "4"), (False, "fuzzing", "2")], ids=["key", "no key"]
)
def test_nothing_happens_that_the_document_does_not_say(
    service: Running, *, with_key: bool, phases: str, most: str
) -> None:
    told = try_from_outside(
        service, "--phases", phases, "--max-examples", most, "--seed", "5", with_key=with_key, within_s=300
    )

    if told:
        pytest.fail(told, pytrace=False)
    assert failures_in(service) == []
