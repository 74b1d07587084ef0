"""Judges the end of a test of faults: what must be true of every order, whatever happened in between."""

from collections.abc import Mapping
from pathlib import Path

from service.parts import Parts
from tests.faults.ordering import PlansHere, assert_events_without_gaps, assert_planned_once


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
