"""A client that speaks to the service as its users do, and the planner that computes nothing for it."""

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from service.app import OPENED, create_app
from service.limits import Limits
from service.settings import AccessSettings, ServiceSettings, settings_from
from tests.service.conftest import begin_data, environment_of
from tests.service.fake_planner import (
    BROKEN_TUNE,
    HEARING_FILES,
    LASER_FILES,
    NEAR_RIM,
    NOTHING_ASKED,
    ONE_LOST,
    REPORT,
    THIN_WEB,
    TUNE,
    FakeLayout,
    FakePlanner,
    FakePlucks,
)

__all__ = [
    "BROKEN_TUNE",
    "HEARING_FILES",
    "LASER_FILES",
    "MANY",
    "NEAR_RIM",
    "NOTHING_ASKED",
    "ONE_LOST",
    "REPORT",
    "THIN_WEB",
    "TUNE",
    "Client",
    "FakeLayout",
    "FakePlanner",
    "FakePlucks",
    "client_of",
]
MANY = (1_000_000, 60)  # requests in so many seconds: more than any test makes


class Client:
    """The service, as its users speak to it."""

    def __init__(self, http: FlaskClient) -> None:
        self.http = http

    def get(self, path: str, **headers: str) -> TestResponse:
        return self.http.get(path, headers=_spelt(headers))

    def post_tune(
        self,
        tune: bytes = TUNE,
        query: str = "movement=fernhollow-31",
        media_type: str | None = "audio/midi",
        **headers: str,
    ) -> TestResponse:
        return self.http.post(f"/v1/layouts?{query}", data=tune, content_type=media_type, headers=_spelt(headers))

    def post_parts(self, parts: Mapping[str, Any], query: str = "movement=fernhollow-31") -> TestResponse:
        return self.http.post(f"/v1/layouts?{query}", data=dict(parts), content_type="multipart/form-data")

    def close(self) -> None:
        """Let go of what the service opened."""
        for opened in self.http.application.extensions[OPENED]:
            opened.close()


def _spelt(headers: dict[str, str]) -> dict[str, str]:
    return {name.replace("_", "-"): value for name, value in headers.items()}


def client_of(folder: Path, database_url: str | None, planner: Any, limits: Limits | None = None) -> Client:
    """A client of a service of its own on loopback, its data and layouts kept in a folder."""
    data = folder / "data"
    begin_data(data)
    places = settings_from(environment_of(folder, database_url)).places
    settings = ServiceSettings(
        places=places,
        access=AccessSettings(listens_on_loopback=True, write_rate=MANY, read_rate=MANY),
        limits=limits or Limits(),
    )
    return Client(create_app(settings, planner=planner).test_client())
