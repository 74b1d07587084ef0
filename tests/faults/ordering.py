"""Orders as a web process would place them, and what must be true of them in the end."""

import hashlib
import io
from collections import Counter as Counted
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path

import mido
from sqlalchemy import select

from service.orders.asked import AskedOrder
from service.orders.planned import OrderInputs, PlannedOrder
from service.orders.planning import plan_order
from service.parts import Parts
from service.planner import AnyPlanner
from service.store.files import FileStore
from service.store.holds import FileKeeper
from service.store.migrating import migrate
from service.store.store import Store
from service.store.tables import Event, Order, Plan, PlanFile
from tests.faults.planner import QuietPlanner
from tests.service.shop import placed

SHIPPED = files("layout.documents.shipped")
MOVEMENT = SHIPPED.joinpath("fernhollow-31.json").read_bytes()
CUTTER = SHIPPED.joinpath("fibre-laser.json").read_bytes()


def tune_called(name: str) -> bytes:
    """A tune of one note."""
    tune = mido.MidiFile()
    track = mido.MidiTrack([mido.MetaMessage("track_name", name=name)])
    track += [mido.Message("note_on", note=72, velocity=90), mido.Message("note_off", note=72, time=480)]
    tune.tracks.append(track)
    written = io.BytesIO()
    tune.save(file=written)
    return written.getvalue()


def place(parts: Parts, tune: bytes) -> str:
    """Place an order of a shop that is open, and tell nobody; gives its id."""
    # The planner of these tests leaves out a part of every tune; no person shall be asked for that.
    asked = AskedOrder(tune=tune, movement=MOVEMENT, cutter=CUTTER, most_lost_share=1.0)
    return placed(parts, asked).id


@dataclass(frozen=True)
class Seen:
    """What the database holds of an order."""

    state: str
    reason: str | None
    attempt: int
    killed: int
    plans: list[Plan]
    files: list[PlanFile]
    events: list[str]


def look(parts: Parts, order_id: str) -> Seen:
    """The order as it is now."""
    with parts.store.reading() as session:
        order = session.get_one(Order, order_id)
        return Seen(
            state=order.state,
            reason=order.reason,
            attempt=order.attempt,
            killed=order.killed,
            plans=list(session.scalars(select(Plan).where(Plan.order_id == order_id))),
            files=list(session.scalars(select(PlanFile).where(PlanFile.order_id == order_id))),
            events=list(session.scalars(select(Event.type).where(Event.order_id == order_id).order_by(Event.seq))),
        )


def states(parts: Parts, order_ids: list[str]) -> Counted[str]:
    """How many orders are in which state."""
    with parts.store.reading() as session:
        found = dict(session.execute(select(Order.id, Order.state)).all())
    return Counted(found[order_id] for order_id in order_ids)


def assert_planned_once(parts: Parts, order_id: str, expected: PlannedOrder, *, ends: str = "ready") -> None:
    """The order has one plan, one event of each kind, and its files are those that `expected` names.

    Args:
        parts: Of the shop.
        order_id: The order.
        expected: Its plan, made elsewhere.
        ends: The state it ends in, ready or released.
    """
    seen = look(parts, order_id)
    assert (seen.state, seen.reason) == (ends, None)
    assert [plan.revision for plan in seen.plans] == [1]
    assert seen.plans[0].told == expected.told
    ended = [] if ends == "ready" else [f"order.{ends}"]
    assert seen.events == ["order.received", "order.planned", "order.ready", *ended]
    kept = {(file.disc, file.name): (file.digest, file.byte_count) for file in seen.files}
    assert kept == {(file.disc, file.name): (file.digest, file.byte_count) for file in expected.files}
    for digest, byte_count in kept.values():
        content = parts.files.read(digest)
        assert (hashlib.sha256(content).hexdigest(), len(content)) == (digest, byte_count)


def assert_events_without_gaps(parts: Parts) -> None:
    """Events are numbered from 1 on."""
    with parts.store.reading() as session:
        numbers = list(session.scalars(select(Event.seq).order_by(Event.seq)))
    assert numbers == list(range(1, len(numbers) + 1))


class PlansHere:
    """Plans made by this process, their files kept apart."""

    def __init__(self, folder: Path, planner: AnyPlanner | None = None) -> None:
        """Make a place of its own in a folder; the planner is that of these tests, but does no deeds."""
        self._planner = planner or QuietPlanner()
        store = Store(f"sqlite:///{folder / 'here.sqlite'}")
        migrate(store)
        self._keeper = FileKeeper(store, FileStore(f"file://{folder / 'here'}"))

    def of(self, tune: bytes) -> PlannedOrder:
        """The plan of a tune."""
        inputs = OrderInputs(tune=tune, movement=MOVEMENT, cutter=CUTTER, settings=b"{}")
        return plan_order(inputs, self._planner, self._keeper)
