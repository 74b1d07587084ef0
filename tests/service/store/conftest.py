"""A bucket on loopback, reached as any other is: over HTTP, by the variables of the clients of S3."""

import itertools
from collections.abc import Iterator

import boto3  # type: ignore[import-untyped]
import pytest
from moto.server import ThreadedMotoServer

_numbers = itertools.count(1)


@pytest.fixture(scope="session")
def s3_server() -> Iterator[str]:
    server = ThreadedMotoServer(ip_address="127.0.0.1", port=0, verbose=False)
    server.start()
    host, port = server.get_host_and_port()
    yield f"http://{host}:{port}"
    server.stop()


@pytest.fixture
def s3_variables(s3_server: str, monkeypatch: pytest.MonkeyPatch) -> dict[str, str]:
    """The variables that say where S3 is, set."""
    variables = {
        "AWS_ENDPOINT_URL": s3_server,
        "AWS_ACCESS_KEY_ID": "an-id",
        "AWS_SECRET_ACCESS_KEY": "a-secret",
        "AWS_DEFAULT_REGION": "us-east-1",
        "AWS_EC2_METADATA_DISABLED": "true",
    }
    for name, value in variables.items():
        monkeypatch.setenv(name, value)
    return variables


@pytest.fixture
def bucket(s3_variables: dict[str, str]) -> str:
    """The name of an empty bucket."""
    name = f"discs-{next(_numbers)}"
    client = boto3.client("s3")
    client.create_bucket(Bucket=name)
    client.close()
    return name
