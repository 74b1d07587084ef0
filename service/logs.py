"""Log lines: one JSON object each for programs, or plain text for people, and never a secret in them.

A line says when (RFC 3339, UTC), how grave, what, and which request, order and key it is about. Secrets are kept out
where lines are written; what slips into a text all the same (a library's message, a trace) is blotted out here.
"""

import logging
import re
import sys
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from contextvars import ContextVar
from datetime import UTC, datetime
from typing import Any, TextIO

from pythonjsonlogger.json import JsonEncoder, JsonFormatter

from service.moments import moment_text
from service.settings import WorkSettings

# What a line may say beside its message, and nothing else: a field of another name is not written.
FIELDS = ("request_id", "order_id", "key_id", "method", "route", "status", "ms", "attempt", "seconds", "delivery_id")
BLOT = "…"
# What is a secret by its form or by where it stands; the letters are those of keys, tokens and links.
SECRETS = (
    re.compile(r"(?<=dw_)[\w-]{8,}"),  # keys
    re.compile(r"(?<=whsec_)[A-Za-z0-9+/=_-]+"),  # secrets of hooks
    re.compile(r"(?i)(?<=bearer )[^\s\"'\\,]+"),
    re.compile(r"(?i)(?<=basic )[A-Za-z0-9+/=]{8,}"),
    re.compile(r"(?i)(?<=cookie: )[^\r\n\"\\]+"),
    re.compile(r"(?<=/sign-in/)[^\s\"'/?\\]+"),
    re.compile(r"(?<=/proofs/)[^\s\"'/?\\]+"),
    re.compile(r"(?<=/proof/)[^\s\"'/?\\]+"),
    re.compile(r"(?<=://)[^\s\"'/@\\]*:[^\s\"'/@\\]+(?=@)"),  # user and password of a database, a queue or a proxy
    re.compile(r"(?i)(?<=[?&;\s])(?:\w*(?:password|secret|token|signature|key)\w*)=[^\s\"'\\&;]+"),
    re.compile(r"(?<=[\w/]\?)[^\s\"'\\]*=[^\s\"'\\]*"),  # queries
)
# What one of these is in, or begins with. A text without any of it, as most messages are, holds no secret by its form.
MAY_HOLD_A_SECRET = re.compile(r"[/=_]|(?i:bearer |basic |cookie: )")
QUIET = ("alembic", "ezdxf", "fontTools", "botocore", "aiobotocore", "s3fs", "fsspec", "urllib3")

_as_json = JsonEncoder(ensure_ascii=True).encode  # made once: the library makes one for each line
_told: ContextVar[Mapping[str, str] | None] = ContextVar("told", default=None)


def start_logging(settings: WorkSettings, stream: TextIO | None = None) -> None:
    """Send everything this process logs to one place, in the form that is set; what was set up before is dropped.

    Args:
        settings: Of the log.
        stream: Where lines go; None for where errors go.
    """
    handler = logging.StreamHandler(stream or sys.stderr)
    handler.setFormatter(_Lines() if settings.log_form == "json" else _Text())
    handler.addFilter(_add_told)
    root = logging.getLogger()
    root.handlers[:] = [handler]
    root.setLevel(settings.log_level.upper())
    for name in QUIET:
        logging.getLogger(name).setLevel(logging.ERROR)
    logging.captureWarnings(capture=True)


def is_logging() -> bool:
    """Whether this process has a place for its log."""
    return logging.getLogger().hasHandlers()


@contextmanager
def telling(**told: str) -> Iterator[None]:
    """Let every line written inside say what it is about.

    Args:
        told: Of `FIELDS`.
    """
    before = _told.set({**(_told.get() or {}), **told})
    try:
        yield
    finally:
        _told.reset(before)


def tell(**told: str) -> None:
    """Let every later line of this thread or request say what it is about; `forget` ends it."""
    _told.set({**(_told.get() or {}), **told})


def forget() -> None:
    """Begin anew: this thread serves another request now."""
    _told.set(None)


def without_secrets(text: str) -> str:
    """The text with what is a secret by its form blotted out."""
    if MAY_HOLD_A_SECRET.search(text):
        for secret in SECRETS:
            text = secret.sub(BLOT, text)
    return text


def _add_told(record: logging.LogRecord) -> bool:
    for name, value in (_told.get() or {}).items():
        if not hasattr(record, name):
            setattr(record, name, value)
    return True


def _fields_of(record: logging.LogRecord) -> dict[str, Any]:
    return {name: value for name in FIELDS if (value := getattr(record, name, None)) is not None}


def _moment_of(record: logging.LogRecord) -> str:
    return moment_text(datetime.fromtimestamp(record.created, UTC))


class _Lines(JsonFormatter):
    """A line as a JSON object in ASCII."""

    def process_log_record(self, log_data: dict[str, Any]) -> dict[str, Any]:
        trace = {"trace": without_secrets(log_data["exc_info"])} if log_data.get("exc_info") else {}
        return {**log_data["line"], **trace}

    def jsonify_log_record(self, log_data: dict[str, Any]) -> str:
        return _as_json(log_data)

    def add_fields(self, log_data: dict[str, Any], record: logging.LogRecord, message_dict: dict[str, Any]) -> None:
        if message_dict.get("exc_info"):
            log_data["exc_info"] = message_dict["exc_info"]
        log_data["line"] = {  # and of all else that the library would gather nothing
            "time": _moment_of(record),
            "level": record.levelname.lower(),
            "message": without_secrets(record.getMessage()),
            "logger": record.name,
            "process": record.process,
            **_fields_of(record),
        }


class _Text(logging.Formatter):
    """A line for a person; what it is about stands at its end."""

    def format(self, record: logging.LogRecord) -> str:
        text = f"{_moment_of(record)} {record.levelname} {record.getMessage()}"
        fields = " ".join(f"{name}={value}" for name, value in _fields_of(record).items())
        lines = [f"{text} [{fields}]" if fields else text]
        if record.exc_info:
            lines.append(self.formatException(record.exc_info))
        return without_secrets("\n".join(lines))
