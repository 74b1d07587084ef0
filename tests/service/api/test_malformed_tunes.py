"""Files that cannot be read, sent to the service with the real computation behind it."""

from collections.abc import Iterator

import pytest

from layout import walk
from tests.layout.read.test_malformed_files import MALFORMED, Malformed
from tests.service.fakes import Client, client_of


@pytest.fixture(scope="module")
def real_client(tmp_path_factory: pytest.TempPathFactory, module_database_url: str | None) -> Iterator[Client]:
    client = client_of(tmp_path_factory.mktemp("service"), module_database_url, walk)
    yield client
    client.close()


def test_there_are_malformed_files_enough() -> None:
    assert len(MALFORMED) >= 25


@pytest.mark.parametrize("malformed", [m for m in MALFORMED if m.tune], ids=lambda malformed: malformed.name)
def test_a_malformed_file_is_told_by_byte_and_never_as_a_failure(real_client: Client, malformed: Malformed) -> None:
    answer = real_client.post_tune(malformed.tune)

    assert answer.status_code == 422
    assert answer.json["type"] == "/problems/midi-unreadable"
    assert answer.json["byte_offset"] == malformed.byte_offset
    assert min(map(len, (answer.json["found"], answer.json["expected"], answer.json["remedy"]))) > 0
    assert "Traceback" not in answer.text
