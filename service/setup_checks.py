"""What may be wrong with how the service is set up on this machine, and how to mend it: looked at, not guessed.

Each check gives remarks: good, advice (it works, but not as well or as safely as it might) or wrong.
"""

import os
import secrets
import shutil
import time
from collections.abc import Iterator, Mapping
from contextlib import suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from enum import StrEnum
from pathlib import Path

from limits.storage import storage_from_string
from sqlalchemy import func, select

from service.background.queue import Queue, QueueAwayError
from service.parts import Parts, open_parts
from service.secret_note import SecretNote, compare_secret
from service.settings import ServiceSettings, SettingsError, settings_from
from service.store.faults import StoreError, StoreOldError
from service.store.files import FileStore
from service.store.tables import Key

MIB = 1024 * 1024
LEAST_FREE_BYTES = 100 * MIB  # some hundred orders; below it the database itself is in danger
FEW_FREE_BYTES = 2048 * MIB
CLOCK_ADVICE_S = 2.0  # s; links and signatures are good to the second, and hooks allow five minutes
CLOCK_WRONG_S = 60.0  # s; signed messages to hooks are refused by clocks that differ by five minutes


class Level(StrEnum):
    """How grave a remark is."""

    GOOD = "good"
    ADVICE = "advice"
    WRONG = "wrong"


@dataclass(frozen=True, slots=True, kw_only=True)
class Remark:
    """What a check found.

    Attributes:
        about: What was looked at.
        level: How grave it is.
        told: What was found.
        remedy: What to do; empty where nothing is to be done.
    """

    about: str
    level: Level
    told: str
    remedy: str = ""


def check_setup(environment: Mapping[str, str], *, note_secret: bool) -> list[Remark]:
    """Everything that can be looked at from here; what rests on something that is wrong is left out.

    Args:
        environment: With the settings.
        note_secret: Whether this machine's secret is the right one, whatever the database says.
    """
    try:
        settings = settings_from(environment)
    except SettingsError as fault:
        return [_wrong("settings", str(fault), "correct or unset that variable")]
    remarks = [Remark(about="settings", level=Level.GOOD, told="every variable is one the service knows how to read")]
    remarks += _data_folder(settings)
    remarks += _folder_of_layouts(settings)
    remarks += _database(settings, note_secret=note_secret)
    remarks += _queue(settings)
    remarks += _files(settings)
    remarks += _rates(settings)
    remarks += _reached(settings)
    return remarks


def _data_folder(settings: ServiceSettings) -> Iterator[Remark]:
    folder = settings.places.data_directory
    reason = _why_not_writable(folder)
    if reason is not None:
        yield _wrong(
            "data folder",
            f"DISCWRIGHT_DATA is {str(folder)!r}, which cannot be written: {reason}",
            f"make it and give it to the user that runs the service: chown {os.getuid()} {folder}",
        )
        return
    free_bytes = shutil.disk_usage(folder).free
    told = f"{folder} can be written; {free_bytes // MIB} MiB are free"
    if free_bytes < LEAST_FREE_BYTES:
        yield _wrong("data folder", told, "make room, or move DISCWRIGHT_DATA to a larger disk")
    elif free_bytes < FEW_FREE_BYTES:
        yield _advice("data folder", told, "make room before it is full: orders are refused then (507)")
    else:
        yield _good("data folder", told)


def _folder_of_layouts(settings: ServiceSettings) -> Iterator[Remark]:
    folder = settings.cache_directory
    reason = _why_not_writable(folder)
    if reason is not None:
        yield _wrong(
            "folder of layouts", f"{folder} cannot be written: {reason}", "set DISCWRIGHT_CACHE to one that can"
        )
    else:
        yield _good("folder of layouts", f"{folder} can be written")


def _database(settings: ServiceSettings, *, note_secret: bool) -> Iterator[Remark]:
    try:
        parts = open_parts(settings)
    except SettingsError as fault:
        yield _wrong("database", str(fault), "see the data folder above")
        return
    except StoreOldError as fault:
        yield _wrong("database", str(fault).partition(";")[0], "run  discwright migrate  with the same settings")
        return
    except (StoreError, OSError, ImportError) as fault:
        yield _wrong(
            "database", str(fault), "see that it runs, and that DATABASE_URL names host, name and user rightly"
        )
        return
    try:
        yield _good(
            "database", f"{'SQLite' if parts.store.is_sqlite else 'PostgreSQL'} answers, with the newest tables"
        )
        yield from _clock(parts)
        yield from _secret(parts, note_secret=note_secret)
        yield from _keys(parts)
    except StoreError as fault:
        yield _wrong("database", str(fault), "see that nothing else holds it, and look again")
    finally:
        parts.store.close()


def _clock(parts: Parts) -> Iterator[Remark]:
    if parts.store.is_sqlite:
        return
    with parts.store.reading() as session:
        before = time.time()
        there = parts.store.now(session)
        here = datetime.fromtimestamp((before + time.time()) / 2, UTC)
    apart_s = abs((there - here).total_seconds())
    told = f"this machine's clock and the database's are {apart_s:.1f} s apart"
    remedy = "set both by a time service (NTP)"
    if apart_s > CLOCK_WRONG_S:
        yield _wrong("clock", told, remedy)
    elif apart_s > CLOCK_ADVICE_S:
        yield _advice("clock", told, remedy)
    else:
        yield _good("clock", told)


def _secret(parts: Parts, *, note_secret: bool) -> Iterator[Remark]:
    if compare_secret(parts, note_anew=note_secret) is SecretNote.ANOTHER:
        yield _wrong(
            "secret",
            "this machine signs with another secret than the one noted in the database: its links fail elsewhere",
            "set DISCWRIGHT_SECRET to the same text on all machines; if this one's is right, run  "
            "discwright check-setup --note-secret",
        )
    elif not parts.store.is_sqlite and parts.settings.places.secret is None:
        yield _advice(
            "secret",
            "the secret is a file of this machine's data folder, and another machine would make its own",
            "set DISCWRIGHT_SECRET to the same text on all machines",
        )
    else:
        yield _good("secret", "this machine signs with the secret noted in the database")


def _keys(parts: Parts) -> Iterator[Remark]:
    with parts.store.reading() as session:
        count = session.scalar(select(func.count()).select_from(Key).where(Key.revoked_at.is_(None)))
    if count:
        yield _good("keys", f"{count} keys are in force")
    else:
        yield _advice(
            "keys", "there is no key in force, so nobody can order", "make one:  discwright keys add shop --scopes all"
        )


def _queue(settings: ServiceSettings) -> Iterator[Remark]:
    queue = Queue(settings.queue_url)
    try:
        length = queue.length()
    except QueueAwayError as fault:
        yield _wrong(
            "queue",
            f"it does not answer ({_plain(str(fault))}): orders wait for the sweep, every {settings.work.sweep_s} s",
            "see that it runs, and that DISCWRIGHT_QUEUE names it rightly",
        )
    else:
        yield _good("queue", f"it answers, with {length} messages")
    finally:
        queue.close()


def _files(settings: ServiceSettings) -> Iterator[Remark]:
    content = b"a probe of discwright check-setup " + secrets.token_hex(16).encode()
    try:
        files = FileStore(settings.files_url)
        files.check()
        digest = files.put(content)
        read = files.read(digest)
        files.remove(digest)
    except Exception as fault:  # noqa: BLE001 -- the clients of stores raise what they like; all of it is told
        yield _wrong(
            "store of files",
            f"a file could not be kept, read and removed: {_plain(str(fault)) or type(fault).__name__}",
            "see that DISCWRIGHT_FILES names a folder or a bucket that is there and may be written; how to reach S3 "
            "comes from AWS_ENDPOINT_URL, AWS_ACCESS_KEY_ID and AWS_SECRET_ACCESS_KEY",
        )
        return
    if read != content:
        yield _wrong("store of files", "a file came back changed", "look at what keeps the files: it cannot be trusted")
    else:
        yield _good("store of files", "a file was kept, read back and removed")


def _rates(settings: ServiceSettings) -> Iterator[Remark]:
    url = settings.access.rates_url
    if url is None:
        yield _advice(
            "rates",
            "each web process counts requests for itself, so a key may make as many more as there are processes",
            "where that matters, set DISCWRIGHT_RATES to a Redis that all share",
        )
        return
    reached = False
    with suppress(Exception):
        reached = storage_from_string(url).check() is True
    if reached:
        yield _good("rates", "requests are counted for all processes together")
    else:
        yield _wrong(
            "rates", "what counts requests does not answer", "see that DISCWRIGHT_RATES names a Redis that runs"
        )


def _reached(settings: ServiceSettings) -> Iterator[Remark]:
    access, public_url = settings.access, settings.places.public_url
    is_shared = not settings.database_url.startswith("sqlite")
    if public_url is None and (is_shared or not access.listens_on_loopback):
        yield _advice(
            "public URL",
            "how the service is reached from outside is not known, so proof links name no host, whatever the header "
            "Host of a request says; they are whole for requests to this machine's own names alone",
            "set DISCWRIGHT_PUBLIC_URL to how customers reach the service, unless only this machine uses it",
        )
    elif public_url is not None and access.listens_on_loopback and access.open_layouts is None:
        yield _wrong(
            "public URL",
            "DISCWRIGHT_ON_LOOPBACK is yes, so that layouts are open to this machine, but the service is reached from "
            "outside: behind a proxy that hides who asks, everybody would be this machine",
            "unset DISCWRIGHT_ON_LOOPBACK, or set DISCWRIGHT_OPEN_LAYOUTS=no",
        )
    elif public_url is not None:
        yield _good("public URL", f"links are made for {public_url}")
    if access.open_layouts:
        yield _advice(
            "layouts",
            "DISCWRIGHT_OPEN_LAYOUTS is yes: whoever reaches the service may have it compute, without a key",
            "unset it, unless that is meant",
        )
    if settings.hooks.allow_http:
        yield _advice(
            "hooks", "DISCWRIGHT_HOOK_HTTP is yes: messages to hooks may be read on their way", "unset it where you can"
        )


def _why_not_writable(folder: Path) -> str | None:
    probe = folder / f".probe-{secrets.token_hex(8)}"
    try:
        folder.mkdir(parents=True, exist_ok=True)
        probe.write_bytes(b"")
        probe.unlink()
    except OSError as fault:
        return fault.strerror or type(fault).__name__
    return None


def _plain(text: str) -> str:
    return " ".join(text.split())


def _good(about: str, told: str) -> Remark:
    return Remark(about=about, level=Level.GOOD, told=told)


def _advice(about: str, told: str, remedy: str) -> Remark:
    return Remark(about=about, level=Level.ADVICE, told=told, remedy=remedy)


def _wrong(about: str, told: str, remedy: str) -> Remark:
    return Remark(about=about, level=Level.WRONG, told=told, remedy=remedy)
