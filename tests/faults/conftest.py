"""Faults are tried on each of the databases that the service may run on, as the tests of the service are."""

from tests.service.conftest import (
    database_url,
    postgresql_url,
    pytest_collection_modifyitems,
    pytest_configure,
    shared_database_url,
)

__all__ = [
    "database_url",
    "postgresql_url",
    "pytest_collection_modifyitems",
    "pytest_configure",
    "shared_database_url",
]
