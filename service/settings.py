"""What the service can be set to, by variables of its environment: one typed place for the web and the workers."""

import os
import tempfile
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path

from service.limits import Limits
from service.variables import (
    Network,
    SettingsError,
    Variable,
    networks,
    plain_text,
    rate,
    read_variables,
    url_of,
    variable,
    variables_of,
    whole_number,
    words,
    yes_or_no,
)

__all__ = ["ServiceSettings", "SettingsError", "every_variable", "settings_from"]

MOST_DAYS = 36_500  # a hundred years
MOST_SLOTS = 64  # children of one worker; each is a process of its own


@dataclass(frozen=True, slots=True, kw_only=True)
class PlaceSettings:
    """Where things are kept, and how the service is reached."""

    data_directory: Path = variable(
        "DISCWRIGHT_DATA", Path, "folder for the database, the files and the service's secret", default=Path("data")
    )
    database_url: str | None = variable(
        "DATABASE_URL",
        url_of("sqlite", "postgresql", "postgresql+psycopg"),
        "the database: PostgreSQL where several machines share it",
        default=None,
        shown="an SQLite file in DISCWRIGHT_DATA",
        is_secret=True,
    )
    queue_url: str | None = variable(
        "DISCWRIGHT_QUEUE",
        url_of("sqlite", "postgresql", "redis", "rediss"),
        "the queue that carries order ids to the workers",
        default=None,
        shown="beside the database",
        is_secret=True,
    )
    files_url: str | None = variable(
        "DISCWRIGHT_FILES",
        url_of("file", "s3"),
        "the store of files, such as s3://bucket/discs",
        default=None,
        shown="a folder in DISCWRIGHT_DATA",
    )
    cache_directory: Path | None = variable(
        "DISCWRIGHT_CACHE",
        Path,
        "folder where layouts are kept for their links; all workers of a machine share it",
        default=None,
        shown="one of this user's among the temporary files",
    )
    public_url: str | None = variable(
        "DISCWRIGHT_PUBLIC_URL",
        url_of("http", "https"),
        "how the service is reached from outside, for the links it hands out",
        default=None,
        shown="links name this machine where the request does, else no host",
    )
    secret: str | None = variable(
        "DISCWRIGHT_SECRET",
        plain_text,
        "signs proof links and pages of lists; the same on all machines",
        default=None,
        shown="one made at the first start, in DISCWRIGHT_DATA",
        is_secret=True,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class AccessSettings:
    """Who may do what, and how often."""

    open_layouts: bool | None = variable(
        "DISCWRIGHT_OPEN_LAYOUTS",
        yes_or_no,
        "whether layouts, trial pieces and sheets may be asked for without a key",
        default=None,
        shown="yes for this machine's own programs where the service listens on loopback, else no",
    )
    listens_on_loopback: bool = variable(
        "DISCWRIGHT_ON_LOOPBACK",
        yes_or_no,
        "whether the service listens on this machine's own addresses alone; serve and web set it",
        default=False,
    )
    read_rate: tuple[int, int] = variable(
        "DISCWRIGHT_READ_RATE", rate, "requests that read, of one key, in so many seconds", default=(1200, 60)
    )
    write_rate: tuple[int, int] = variable(
        "DISCWRIGHT_WRITE_RATE", rate, "requests that write or plan, of one key, in so many seconds", default=(300, 60)
    )
    rates_url: str | None = variable(
        "DISCWRIGHT_RATES",
        url_of("redis", "rediss"),
        "where requests are counted for all processes together",
        default=None,
        shown="each process by itself",
        is_secret=True,
    )
    session_hours: int = variable(
        "DISCWRIGHT_SESSION_HOURS", whole_number(1, 24 * 365), "hours that a browser stays signed in", default=12
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class WorkSettings:
    """How orders are planned."""

    lease_s: int = variable(
        "DISCWRIGHT_LEASE_S", whole_number(2, 3600), "seconds that a worker holds an order without renewing", default=30
    )
    plan_within_s: int = variable(
        "DISCWRIGHT_PLAN_WITHIN_S",
        whole_number(1, 86_400),
        "seconds that planning one order or laying out one tune may take",
        default=300,
    )
    plan_memory_mib: int = variable(
        "DISCWRIGHT_PLAN_MEMORY_MIB",
        whole_number(200, 1_000_000),
        "MiB that planning one order or laying out one tune may take",
        default=2000,
    )
    most_attempts: int = variable(
        "DISCWRIGHT_ATTEMPTS", whole_number(1, 20), "times that an order may kill its worker before it fails", default=3
    )
    sweep_s: int = variable(
        "DISCWRIGHT_SWEEP_S", whole_number(1, 3600), "seconds between looks for orders that wait too long", default=15
    )
    stop_within_s: int = variable(
        "DISCWRIGHT_STOP_WITHIN_S", whole_number(1, 600), "seconds to finish or hand back work when stopped", default=20
    )
    quote_days: int = variable("DISCWRIGHT_QUOTE_DAYS", whole_number(1, 365), "days that a quote holds", default=30)
    log_form: str = variable("DISCWRIGHT_LOG", words("json", "text"), "how log lines are written", default="json")
    log_level: str = variable(
        "DISCWRIGHT_LOG_LEVEL",
        words("debug", "info", "warning", "error"),
        "the least level that is logged",
        default="info",
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class HookSettings:
    """How hooks are told."""

    networks: tuple[Network, ...] = variable(
        "DISCWRIGHT_HOOK_NETWORKS",
        networks,
        "networks of the shop's own that hooks may reach beside public ones",
        default=(),
    )
    allow_http: bool = variable(
        "DISCWRIGHT_HOOK_HTTP", yes_or_no, "whether hooks may be told without TLS", default=False
    )
    timeout_s: int = variable(
        "DISCWRIGHT_HOOK_TIMEOUT_S", whole_number(1, 60), "seconds that a hook may take to answer", default=20
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class RetentionSettings:
    """How long what others sent is kept, in days after an order is finished."""

    tunes_days: int = variable(
        "DISCWRIGHT_KEEP_TUNES_DAYS", whole_number(1, MOST_DAYS), "days, tunes as sent", default=365
    )
    drawings_days: int = variable(
        "DISCWRIGHT_KEEP_DRAWINGS_DAYS", whole_number(1, MOST_DAYS), "days, files of plans", default=3650
    )
    deliveries_days: int = variable(
        "DISCWRIGHT_KEEP_DELIVERIES_DAYS", whole_number(1, MOST_DAYS), "days, what hooks were told", default=30
    )
    answers_days: int = variable(
        "DISCWRIGHT_KEEP_ANSWERS_DAYS", whole_number(1, 365), "days, answers kept for an Idempotency-Key", default=30
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ServiceSettings:
    """The service's settings.

    Attributes:
        places: Where things are kept.
        access: Who may do what.
        work: How orders are planned.
        hooks: How hooks are told.
        retention: How long things are kept.
        limits: What the service takes, keeps and tells at most.
    """

    places: PlaceSettings = field(default_factory=PlaceSettings)
    access: AccessSettings = field(default_factory=AccessSettings)
    work: WorkSettings = field(default_factory=WorkSettings)
    hooks: HookSettings = field(default_factory=HookSettings)
    retention: RetentionSettings = field(default_factory=RetentionSettings)
    limits: Limits = field(default_factory=Limits)

    @property
    def cache_directory(self) -> Path:
        """Where layouts are kept for their links."""
        return self.places.cache_directory or _own_temporary_folder()

    @property
    def database_url(self) -> str:
        """The database, as SQLAlchemy wants it."""
        asked = self.places.database_url
        if asked is None:
            return f"sqlite:///{self.places.data_directory / 'discwright.sqlite'}"
        return "postgresql+psycopg" + asked.removeprefix("postgresql") if asked.startswith("postgresql:") else asked

    @property
    def queue_url(self) -> str:
        """The queue: as asked for, else on PostgreSQL where the database is, else in a file of its own."""
        if self.places.queue_url is not None:
            return self.places.queue_url
        if self.database_url.startswith("postgresql"):
            return self.database_url.replace("postgresql+psycopg:", "postgresql:", 1)
        return f"sqlite:///{self.places.data_directory / 'queue.sqlite'}"

    @property
    def files_url(self) -> str:
        """The store of files."""
        return self.places.files_url or f"file://{(self.places.data_directory / 'files').absolute()}"


@dataclass(frozen=True, slots=True, kw_only=True)
class _LimitSettings:
    """Limits that can be set."""

    cache_layouts: int = variable(
        "DISCWRIGHT_CACHE_LAYOUTS", whole_number(1), "layouts kept for their links", default=Limits().cache_layouts
    )
    cache_bytes: int = variable(
        "DISCWRIGHT_CACHE_BYTES", whole_number(1), "bytes of disk that kept layouts take", default=Limits().cache_bytes
    )


_GROUPS = (PlaceSettings, AccessSettings, WorkSettings, HookSettings, RetentionSettings, _LimitSettings)


def settings_from(environment: Mapping[str, str]) -> ServiceSettings:
    """The settings that environment variables ask for.

    Args:
        environment: Read are the variables of `every_variable`; one that is empty is not set.

    Raises:
        SettingsError: A text is none of what its variable allows; names the variable and what it may be.
    """
    return ServiceSettings(
        places=PlaceSettings(**read_variables(PlaceSettings, environment)),
        access=AccessSettings(**read_variables(AccessSettings, environment)),
        work=WorkSettings(**read_variables(WorkSettings, environment)),
        hooks=HookSettings(**read_variables(HookSettings, environment)),
        retention=RetentionSettings(**read_variables(RetentionSettings, environment)),
        limits=replace(Limits(), **read_variables(_LimitSettings, environment)),
    )


def every_variable() -> tuple[Variable, ...]:
    """Every variable there is, in groups."""
    return tuple(told for group in _GROUPS for told in variables_of(group))


def _own_temporary_folder() -> Path:
    # One folder per user, the same for every worker: a layout made by one must be found by the others.
    return Path(tempfile.gettempdir()) / f"discwright-layouts-{os.getuid()}"
