"""Pages are read through the functions of the API, which is tried on every database; theirs is SQLite alone.

Except where a page asks the database in a way of its own: `browsing.on_both_databases` marks these, and why.
"""

import pytest

from tests.service.conftest import empty


@pytest.fixture
def database_url(request: pytest.FixtureRequest) -> str | None:
    """What DATABASE_URL says: None, so that it is SQLite, but where a test asks for PostgreSQL."""
    if getattr(request, "param", "sqlite") == "sqlite":
        return None
    url: str = request.getfixturevalue("shared_database_url")
    empty(url)
    return url
