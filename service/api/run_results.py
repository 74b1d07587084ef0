"""The files of a run's orders in one archive, made while it is sent."""

from collections.abc import Iterator
from pathlib import PurePosixPath
from typing import Any

from service.access.asker import Asker
from service.api.answers import json_bytes
from service.api.zip_stream import Packed
from service.download_names import slug
from service.orders.finding import find_order
from service.orders.run_views import ItemView, items_of
from service.orders.states import State
from service.orders.views import FileView, OrderView
from service.parts import Parts

LIST = "run.json"
ITEMS_AT_A_TIME = 50  # pairs read in one look, between which nothing of the database is held
LONGEST_NAME = 60  # characters of a folder's name that are the tune's


def results_of(parts: Parts, asker: Asker, run_id: str) -> Iterator[Packed]:
    """A folder for each order with a plan, in the order asked, and last a list of all pairs, run.json.

    Cutting files are in it where the order is released, and is not planned anew or called back since; each order is
    as it stood when its turn came. The same state gives the same names and bytes.

    Raises:
        OrderUnknownError: There is no such run for the asker.
        StoreError: Something cannot be read; the archive is then left without its end, and cannot be opened.
    """
    told: list[dict[str, Any]] = []
    for item, order in _looked_through(parts, asker, run_id):
        folder = folder_of(item)
        files = _given(order)
        for file in files:
            yield Packed(name=f"{folder}/{file.saved_as}", pieces=parts.files.chunks(file.sha256))
        told.append({**item_told(item), "folder": folder if files else None})
    yield Packed(name=LIST, pieces=[json_bytes({"run": run_id, "items": told})])


def folder_of(item: ItemView) -> str:
    """The folder of a pair: its number, its tune and its movement."""
    tune = slug(PurePosixPath(item.tune).stem, LONGEST_NAME) or "tune"
    return f"{item.number:05d}_{tune}_{item.movement_id}"


def item_told(item: ItemView) -> dict[str, Any]:
    """A pair as plain values."""
    return {
        "number": item.number,
        "tune": item.tune,
        "movement": item.movement_id,
        "order": item.order_id,
        "state": item.state,
        "reason": item.reason,
    }


def _looked_through(parts: Parts, asker: Asker, run_id: str) -> Iterator[tuple[ItemView, OrderView | None]]:
    after = 0
    while True:
        with parts.store.reading() as session:
            page = items_of(session, asker, run_id, after=after, most=ITEMS_AT_A_TIME)
            orders = [None if item.order_id is None else find_order(session, asker, item.order_id) for item in page]
        yield from zip(page, orders, strict=True)
        if len(page) < ITEMS_AT_A_TIME:
            return
        after = page[-1].number


def _given(order: OrderView | None) -> list[FileView]:
    plan = None if order is None else order.plan
    if order is None or plan is None or plan.superseded_at is not None or order.state == State.CANCELLED:
        return []
    is_released = order.state == State.RELEASED and plan.released_at is not None
    return [file for file in plan.files if is_released or not file.is_for_cutting]
