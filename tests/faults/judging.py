"""Judges the end of a test of faults: what must be true of every order, whatever happened in between."""

import hashlib
from collections import Counter
from collections.abc import Mapping
from pathlib import Path

from sqlalchemy import select

from layout import walk
from service.parts import Parts
from service.store.files import DIGEST
from service.store.tables import Event, Order
from tests.faults.asking import Asking
from tests.faults.ordering import PlansHere, assert_events_without_gaps, assert_planned_once
from tests.faults.pipeline import Wanted
from tests.faults.receiver import Receiver


def assert_all_planned_once(parts: Parts, tunes: Mapping[str, bytes], folder: Path) -> None:
    """Every order has one plan, the one this process makes of its tune; no event is missing or doubled.

    Args:
        parts: Of the shop.
        tunes: By the ids of their orders.
        folder: Where this process may keep its own files.
    """
    assert len(tunes) > 0
    here = PlansHere(folder)
    for order_id, tune in tunes.items():
        assert_planned_once(parts, order_id, here.of(tune))
    assert_events_without_gaps(parts)


def sent_again(asking: Asking, placed: list[Wanted]) -> list[str]:
    """Send everything once more with its key: the answer is the one that was given, byte for byte."""
    faults = []
    for order in placed:
        for first, again in ((order.placed, order.place), (order.released, order.release)):
            if first is None:
                continue
            told = again(asking)
            if (told.status, told.body) != (first.status, first.body):
                faults.append(f"{order.reference} sent again: {told.status} {told.body[:200]!r}")
    return faults


def orders_judged(parts: Parts, orders: list[Wanted], folder: Path) -> list[str]:
    """Every order was accepted once, and ended right once."""
    faults = [f"{order.reference} was never accepted" for order in orders if order.placed is None]
    accepted = [order for order in orders if order.placed is not None]
    with parts.store.reading() as session:
        kept = Counter(session.execute(select(Order.id, Order.reference)))
    if kept != Counter((order.id, order.reference) for order in accepted):
        faults.append(f"the database holds {len(kept)} orders, and {len(accepted)} were accepted")
    here = PlansHere(folder, walk)
    for order in accepted:
        try:
            ends = "released" if order.is_released else "ready"
            assert_planned_once(parts, order.id, here.of(order.tune), ends=ends)
        except AssertionError as fault:
            faults.append(f"{order.reference}: {fault}")
    try:
        assert_events_without_gaps(parts)
    except AssertionError as fault:
        faults.append(f"events: {fault}")
    return faults


def hooks_judged(parts: Parts, receiver: Receiver) -> list[str]:
    """Every event reached the hook under one id, and every message of an id was the same."""
    with parts.store.reading() as session:
        happened = {seq: kind for seq, kind in session.execute(select(Event.seq, Event.type))}
    faults = [f"event {seq}, {kind}, never came" for seq, kind in happened.items() if seq not in receiver.ids_of]
    faults += [f"event {seq} came as {ids}" for seq, ids in receiver.ids_of.items() if len(ids) != 1]
    faults += [f"{name} came with several bodies" for name, bodies in receiver.bodies_of.items() if len(bodies) != 1]
    untrue = [seq for seq, kind in receiver.kinds.items() if happened.get(seq) != kind]
    return faults + [f"event {seq} was told, and never was" for seq in untrue]


def files_judged(folder: Path) -> list[str]:
    """Every file under a digest is that file, whole."""
    files = [path for path in (folder / "data" / "files").rglob("*") if DIGEST.fullmatch(path.name)]
    return [f"{path} is not whole" for path in files if hashlib.sha256(path.read_bytes()).hexdigest() != path.name]
