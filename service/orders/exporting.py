"""All that is kept of one owner, as files of an archive, each read piece by piece when its turn comes.

Lists are lines of JSON, one for each row, in files of a bounded length; documents and files stand as they were sent
and made. Secrets, and what only the service itself needs, are left out.
"""

import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime
from itertools import chain, islice
from typing import Any

from sqlalchemy import ColumnElement, select, tuple_

from layout.version import ENGINE_VERSION
from service.moments import moment_text, utc_now
from service.store.files import FileLostError, FileStore
from service.store.store import Store
from service.store.tables import (
    Delivery,
    Event,
    FileHold,
    Hook,
    Key,
    Order,
    Owner,
    Plan,
    PlanFile,
    Quote,
    Row,
    Run,
    RunItem,
    StoredDocument,
)

FORMAT = "discwright-export/1"
PAGE = 500  # rows read at a time, each page in a transaction of its own
MOST_LINES = 100_000  # of one file: about 100 MB of orders, which programs still read
# Secrets, the text of documents, which are files of their own, and what workers note for themselves.
LEFT_OUT = {"secret_sha256", "secrets", "body", "attempt", "taken_by", "lease_until", "killed"}

Pieces = Iterable[bytes]


@dataclass(frozen=True, slots=True, kw_only=True)
class _List:
    """The rows of a table that are an owner's."""

    name: str
    table: type[Row]
    is_mine: ColumnElement[bool]


def find_owner(store: Store, named: str) -> str | None:
    """The id of the owner of this id, or else of this title, where one alone has it; None where there is none."""
    with store.reading() as session:
        found = session.scalars(select(Owner.id).where(Owner.id == named)).all()
        found = found or session.scalars(select(Owner.id).where(Owner.title == named)).all()
    return found[0] if len(found) == 1 else None


def export_of(store: Store, files: FileStore, owner_id: str) -> Iterator[tuple[str, Pieces]]:
    """The files of an export: name and content. Each is to be read before the next is taken.

    Args:
        store: The database.
        files: The store of files. One that it has lost is named in lost-files.json, and the rest goes on.
        owner_id: Of an owner that exists.

    Raises:
        StoreError: The database or the store of files does not answer.
    """
    with store.reading() as session:
        owner = session.get_one(Owner, owner_id)
        title, is_shop = owner.title, owner.is_shop
    about = {
        "format": FORMAT,
        "owner": {"id": owner_id, "title": title, "is_shop": is_shop},
        "exported_at": moment_text(utc_now()),
        "engine_version": ENGINE_VERSION,
    }
    yield "about.json", [_line(about)]
    for one in _lists_of(owner_id):
        yield from _in_files(one.name, (_line(_told(row)) for row in _rows(store, one.table, one.is_mine)))
    for row in _rows(store, StoredDocument, StoredDocument.owner_id == owner_id):
        yield f"{row.kind}s/{row.id}-r{row.revision}.json", [row.body.encode()]
    yield from _held_files(store, files, owner_id)


def _lists_of(owner_id: str) -> tuple[_List, ...]:
    orders = select(Order.id).where(Order.owner_id == owner_id)
    runs = select(Run.id).where(Run.owner_id == owner_id)
    hooks = select(Hook.id).where(Hook.owner_id == owner_id)
    return (
        _List(name="keys", table=Key, is_mine=Key.owner_id == owner_id),
        _List(name="documents", table=StoredDocument, is_mine=StoredDocument.owner_id == owner_id),
        _List(name="quotes", table=Quote, is_mine=Quote.owner_id == owner_id),
        _List(name="runs", table=Run, is_mine=Run.owner_id == owner_id),
        _List(name="run-items", table=RunItem, is_mine=RunItem.run_id.in_(runs)),
        _List(name="orders", table=Order, is_mine=Order.owner_id == owner_id),
        _List(name="plans", table=Plan, is_mine=Plan.order_id.in_(orders)),
        _List(name="plan-files", table=PlanFile, is_mine=PlanFile.order_id.in_(orders)),
        _List(name="events", table=Event, is_mine=Event.owner_id == owner_id),
        _List(name="hooks", table=Hook, is_mine=Hook.owner_id == owner_id),
        _List(name="messages", table=Delivery, is_mine=Delivery.hook_id.in_(hooks)),
        _List(name="holds", table=FileHold, is_mine=FileHold.owner_id == owner_id),
    )


def _held_files(store: Store, files: FileStore, owner_id: str) -> Iterator[tuple[str, Pieces]]:
    """Every file held for the owner, once, and at last which of them are lost."""
    lost, before = [], ""
    for row in _rows(store, FileHold, FileHold.owner_id == owner_id):  # in the order of their digests
        if row.digest == before:
            continue
        before = row.digest
        try:
            yield f"files/{before}", files.chunks(before)
        except FileLostError:
            lost.append(before)
    if lost:
        yield "lost-files.json", [_line({"lost": lost})]


def _rows(store: Store, table: type[Any], is_mine: ColumnElement[bool]) -> Iterator[Any]:
    """All rows in the order of their key, page by page: no transaction is held while they are sent."""
    key = [getattr(table, column.key) for column in table.__table__.primary_key]
    page = select(table).where(is_mine).order_by(*key).limit(PAGE)
    after: list[Any] = []
    while True:
        with store.reading() as session:
            found = session.scalars(page.where(tuple_(*key) > tuple(after)) if after else page).all()
        yield from found
        if len(found) < PAGE:
            return
        after = [getattr(found[-1], column.key) for column in key]


def _in_files(name: str, lines: Iterator[bytes]) -> Iterator[tuple[str, Pieces]]:
    number = 1
    while (first := next(lines, None)) is not None:
        yield f"{name}-{number:04}.jsonl", islice(chain([first], lines), MOST_LINES)
        number += 1


def _told(row: Row) -> dict[str, Any]:
    names = [column.key for column in row.__table__.columns if column.key not in LEFT_OUT]
    told = {name: _plain(getattr(row, name)) for name in names}
    return {**told, "body": row.body} if isinstance(row, Delivery) else told


def _plain(value: Any) -> Any:
    return moment_text(value) if isinstance(value, datetime) else value


def _line(told: Mapping[str, Any]) -> bytes:
    text = json.dumps(told, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    return (text + "\n").encode("utf-8", "backslashreplace")
