"""Moments, as answers tell them."""

from datetime import UTC, datetime


def moment_text(at: datetime) -> str:
    """A moment as RFC 3339 tells it, in UTC, with microseconds: texts sort as the moments do.

    Args:
        at: With a time zone.
    """
    return at.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%S.%fZ")


def utc_now() -> datetime:
    """The moment, by this machine's clock."""
    return datetime.now(UTC)
