"""A bucket that is away, or closed, or not there: told so within seconds, and never as a fault of the service."""

import socket
import time
from collections.abc import Callable
from io import BytesIO
from pathlib import Path

import boto3  # type: ignore[import-untyped]
import pytest
from werkzeug.test import TestResponse

from service.access.scopes import Scope
from service.app import OPENED, create_app
from service.parts import Parts
from service.settings import settings_from
from service.store.faults import StoreBusyError
from service.store.files import FileLostError, FileStore
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.conftest import environment_of
from tests.service.shop import TUNE

pytestmark = pytest.mark.usefixtures("s3_variables")
GONE = "0" * 64


@pytest.fixture
def nobody_listens(s3_variables: dict[str, str], monkeypatch: pytest.MonkeyPatch) -> None:
    """S3 at a port where nobody listens."""
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        monkeypatch.setenv("AWS_ENDPOINT_URL", f"http://127.0.0.1:{taken.getsockname()[1]}")


def test_a_bucket_that_is_not_there_is_named(s3_server: str) -> None:
    with pytest.raises(StoreBusyError, match="has no bucket 'never-made'; make it"):
        FileStore("s3://never-made/discs").put(b"a disc")


@pytest.mark.usefixtures("nobody_listens")
def test_a_bucket_that_is_away_is_busy_within_seconds() -> None:
    files = FileStore("s3://discs/shop")
    asked: dict[str, Callable[[], object]] = {
        "put": lambda: files.put(b"a disc"),
        "read": lambda: files.read(GONE),
        "has": lambda: files.has(GONE),
        "remove": lambda: files.remove(GONE),
        "digests": lambda: list(files.digests()),
        "note": lambda: files.note("order_1"),
        "noted": lambda: list(files.noted()),
    }

    for name, ask in asked.items():
        begun = time.monotonic()
        with pytest.raises(StoreBusyError):
            ask()
        assert time.monotonic() - begun < 15, name


def test_a_file_that_somebody_took_from_the_bucket_is_lost(bucket: str) -> None:
    files = FileStore(f"s3://{bucket}/shop")
    digest = files.put(b"a disc")
    boto3.client("s3").delete_object(Bucket=bucket, Key=f"shop/{digest[:2]}/{digest}")

    with pytest.raises(FileLostError, match="restore it from a backup"):
        files.read(digest)


def test_a_file_written_anew_while_it_is_read_is_read_to_its_end(bucket: str) -> None:
    content = b"x" * (9 * 1024 * 1024)
    files = FileStore(f"s3://{bucket}/shop")
    digest = files.put(content)
    pieces = files.chunks(digest)
    first = next(pieces)

    client = boto3.client("s3")
    client.put_object(Bucket=bucket, Key=f"shop/{digest[:2]}/{digest}", Body=content, Metadata={"again": "yes"})

    assert first + b"".join(pieces) == content


def test_two_shops_share_a_bucket_and_see_their_own_files_alone(bucket: str) -> None:
    first, second = FileStore(f"s3://{bucket}/first"), FileStore(f"s3://{bucket}/second")

    digest = first.put(b"a disc")

    assert (list(first.digests()), list(second.digests())) == ([digest], [])


def test_a_file_of_another_process_is_there_at_once(bucket: str) -> None:
    mine, others = FileStore(f"s3://{bucket}/shop"), FileStore(f"s3://{bucket}/shop")
    assert list(mine.digests()) == []

    digest = others.put(b"a disc")

    assert (mine.has(digest), list(mine.digests())) == (True, [digest])


def test_an_order_that_cannot_be_kept_since_the_bucket_is_away_is_refused_and_may_be_sent_again(
    parts: Parts, tmp_path: Path, bucket: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    variables = environment_of(tmp_path, parts.settings.places.database_url)
    app = create_app(settings_from(variables | {"DISCWRIGHT_FILES": f"s3://{bucket}/shop"}))
    key = bearing(new_key(parts, *Scope))

    def place() -> TestResponse:
        form = {"tune": (BytesIO(TUNE), "a.mid"), "order": '{"movement": "fernhollow-31"}'}
        return app.test_client().post("/v1/orders", data=form, headers={**key, "Idempotency-Key": '"a-1"'})

    client = boto3.client("s3")
    client.delete_bucket(Bucket=bucket)
    away = place()
    client.create_bucket(Bucket=bucket)
    again = place()
    for opened in app.extensions[OPENED]:
        opened.close()

    told = problem_of(away, "store-busy")
    assert (told["status"], told["try_again"], "Retry-After" in away.headers) == (503, True, True)
    assert again.status_code == 202


def test_a_bucket_that_is_there_is_well_and_one_that_is_not_is_named(bucket: str) -> None:
    FileStore(f"s3://{bucket}/shop").check()

    with pytest.raises(StoreBusyError, match=r"^the store of files has no bucket 'never-made', or does not show it$"):
        FileStore("s3://never-made/shop").check()


@pytest.mark.usefixtures("nobody_listens")
def test_a_bucket_that_is_away_is_not_well() -> None:
    with pytest.raises(StoreBusyError, match=r"has no bucket 'discs', or does not show it$"):
        FileStore("s3://discs/shop").check()


def test_a_bucket_has_nothing_half_written_to_be_swept(bucket: str) -> None:
    files = FileStore(f"s3://{bucket}/shop")
    digest = files.put(b"a disc")

    assert files.sweep_parts() == 0
    assert files.read(digest) == b"a disc"
