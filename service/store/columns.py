"""Kinds of columns that mean the same on every database."""

from datetime import UTC, datetime, timedelta
from typing import Any

from sqlalchemy import BigInteger, Dialect
from sqlalchemy.types import TypeDecorator

EPOCH = datetime(1970, 1, 1, tzinfo=UTC)
MICROSECOND = timedelta(microseconds=1)


class Moment(TypeDecorator[datetime]):
    """A moment in UTC, kept as whole microseconds since 1970: it sorts, and loses nothing, on every database."""

    impl = BigInteger
    cache_ok = True

    def process_bind_param(self, value: datetime | None, dialect: Dialect) -> int | None:
        """The number that is kept.

        Raises:
            ValueError: The moment names no time zone.
        """
        if value is None:
            return None
        if value.tzinfo is None:
            raise ValueError(f"{value!r} names no time zone")
        return (value - EPOCH) // MICROSECOND

    def process_result_value(self, value: Any, dialect: Dialect) -> datetime | None:
        """The moment that was kept."""
        return None if value is None else EPOCH + int(value) * MICROSECOND
