"""Operations that will go: told beforehand in every answer, and in the API document.

`Deprecation` (RFC 9745) says since when an operation should not be used any more, `Sunset` (RFC 8594) from when it
may fail to answer. Between them lie at least twelve months.
"""

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta

from flask import Response
from werkzeug.http import http_date

NOTICE = timedelta(days=365)


@dataclass(frozen=True, slots=True, kw_only=True)
class Retirement:
    """That something will go.

    Attributes:
        since: When its end was announced, with a time zone.
        gone_from: When it may be gone, at least twelve months later.
        told_at: Address of a page that says what to do instead.
    """

    since: datetime
    gone_from: datetime
    told_at: str

    def __post_init__(self) -> None:
        """Refuse a notice that is too short.

        Raises:
            ValueError: It is.
        """
        if self.gone_from - self.since < NOTICE:
            raise ValueError(f"between {self.since:%Y-%m-%d} and {self.gone_from:%Y-%m-%d} are less than 12 months")


def tell_retirement(response: Response, retirement: Retirement) -> Response:
    """The answer with the header fields that say that what gave it will go."""
    response.headers["Deprecation"] = f"@{int(retirement.since.timestamp())}"  # a Date of RFC 9651 section 3.3.7
    response.headers["Sunset"] = http_date(retirement.gone_from.astimezone(UTC))
    response.headers.add("Link", f'<{retirement.told_at}>; rel="deprecation"')
    response.headers.add("Link", f'<{retirement.told_at}>; rel="sunset"')
    return response
