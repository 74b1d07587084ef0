"""Pages read through the functions of the API, which is tried on every database; theirs is SQLite alone."""

import pytest


@pytest.fixture
def database_url() -> None:
    """No DATABASE_URL, so that it is SQLite."""
