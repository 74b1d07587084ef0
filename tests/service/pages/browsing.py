"""A service as a browser asks it, closed when its test is over; and which tests of pages ask both databases."""

from collections.abc import Iterator
from contextlib import contextmanager

import pytest
from flask.testing import FlaskClient

from service.app import OPENED, create_app
from service.settings import ServiceSettings
from tests.service.conftest import DATABASES


@contextmanager
def browsing(settings: ServiceSettings) -> Iterator[FlaskClient]:
    """A client of a service of these settings, whose connections end with it: an app itself lives with its process."""
    app = create_app(settings)
    try:
        with app.test_client() as client:
            yield client
    finally:
        for opened in app.extensions[OPENED]:
            opened.close()


def on_both_databases(because: str) -> pytest.MarkDecorator:
    """Marks a test of a page that is run on SQLite and on PostgreSQL.

    Args:
        because: What its page asks of the database in a way of its own, that no route of the API asks.
    """
    assert because
    return pytest.mark.parametrize("database_url", DATABASES, indirect=True)
