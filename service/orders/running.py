"""Runs: many orders asked for at once. The pairs are written down at once; workers make them orders bit by bit.

A pair becomes an order in one transaction with the note that it did, so however often a worker is killed in
between, each pair is one order.
"""

from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import func, select, update
from sqlalchemy.orm import Session

from layout.errors import LayoutError
from service.access.asker import Asker
from service.access.scopes import scopes_of
from service.orders.archives import ArchiveError, TuneArchive, open_archive
from service.orders.asked import AskedOrder, NamedDocument
from service.orders.faults import OrderFault, OrderUnknownError
from service.orders.placing import place_order
from service.orders.views import OrderView
from service.store.holds import FileKeeper, Hold, hold
from service.store.ids import new_id
from service.store.store import Store
from service.store.tables import Key, Order, Owner, Run, RunItem

WAITS = "waits"  # of a pair that is no order yet
REFUSED = "refused"


@dataclass(frozen=True, slots=True, kw_only=True)
class Pair:
    """One tune for one movement."""

    tune: str
    movement: NamedDocument
    reference: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class AskedRun:
    """Many orders.

    Attributes:
        archive: A ZIP file with the tunes.
        pairs: Which tune for which movement.
        cutter: The cutter of all.
        settings: The settings document's text of all.
        quantity: Copies of each disc.
        most_lost_share: As in `AskedOrder`.
        release_alone: So.
        hook_id: So.
        reference: Of the run; orders without one of their own get it with their number.
    """

    archive: bytes
    pairs: tuple[Pair, ...]
    cutter: NamedDocument
    settings: bytes = b"{}"
    quantity: int = 1
    most_lost_share: float = 0.05
    release_alone: bool = False
    hook_id: str | None = None
    reference: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class RunView:
    """A run, and how far it is.

    Attributes:
        id: Its id.
        reference: The sender's own.
        order_count: How many pairs were asked for.
        counts: How many of them are in which state; "waits" before they are orders, "refused" where they cannot be.
        created_at: When it was asked for.
        is_finished: Whether no pair waits and no order is received or planning.
    """

    id: str
    reference: str | None
    order_count: int
    counts: Mapping[str, int]
    created_at: datetime
    is_finished: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class ItemView:
    """A pair of a run, and what became of it."""

    number: int
    tune: str
    movement_id: str
    order_id: str | None
    state: str
    reason: str | None


AlsoOfRun = Callable[[Session, RunView], None]


def begin_run(store: Store, keeper: FileKeeper, asker: Asker, asked: AskedRun, also: AlsoOfRun) -> RunView:
    """Write a run down; workers open it.

    Args:
        store: The database.
        keeper: Keeps the archive.
        asker: Whose run it is.
        asked: What is ordered; its pairs name tunes of the archive.
        also: What is written in the same transaction.
    """
    [digest] = keeper.keep([asked.archive])
    made: list[str] = []

    def beginning(session: Session) -> RunView:
        now = store.now(session)
        made[:] = made or [new_id("run", now)]
        run = session.get(Run, made[0])
        if run is not None:  # the connection was lost after the commit
            return _view(session, run)
        run = Run(
            id=made[0],
            owner_id=asker.owner_id,
            key_id=asker.key_id,
            is_test=asker.is_test,
            reference=asked.reference,
            archive_digest=digest,
            asked=_facts(asked),
            order_count=len(asked.pairs),
            created_at=now,
        )
        session.add(run)
        session.flush()
        session.add_all(
            RunItem(
                run_id=run.id,
                number=number,
                tune_name=pair.tune,
                movement_id=pair.movement.id,
                movement_revision=pair.movement.revision,
                reference=pair.reference,
            )
            for number, pair in enumerate(asked.pairs, start=1)
        )
        session.flush()
        hold(session, Hold(digest=digest, owner_id=asker.owner_id, holder_id=run.id, what="tune"))
        view = _view(session, run)
        also(session, view)
        return view

    return store.again(beginning)


def find_run(session: Session, asker: Asker, run_id: str) -> RunView:
    """A run that exists for an asker.

    Raises:
        OrderUnknownError: There is none, or it is another's.
    """
    return _view(session, _row(session, asker, run_id))


def items_of(session: Session, asker: Asker, run_id: str, *, after: int, most: int) -> tuple[ItemView, ...]:
    """Pairs of a run past a number, in the order asked.

    Raises:
        OrderUnknownError: There is no such run for the asker.
    """
    run = _row(session, asker, run_id)
    rows = (
        select(RunItem, Order.state, Order.reason)
        .outerjoin(Order, Order.id == RunItem.order_id)
        .where(RunItem.run_id == run.id, RunItem.number > after)
        .order_by(RunItem.number)
        .limit(most)
    )
    return tuple(
        ItemView(
            number=item.number,
            tune=item.tune_name,
            movement_id=item.movement_id,
            order_id=item.order_id,
            state=state or (REFUSED if item.refused is not None else WAITS),
            reason=item.refused if item.refused is not None else reason,
        )
        for item, state, reason in session.execute(rows)
    )


def open_runs(
    store: Store, keeper: FileKeeper, send: Callable[[str], object], *, most: int, most_tune_bytes: int
) -> int:
    """Make orders of the next pairs of the oldest run that has some left; gives how many pairs were dealt with.

    Every worker may do it at the same time: a pair that another has made an order of is left.
    """
    with store.reading() as session:
        run = session.scalars(select(Run).where(Run.opened_at.is_(None)).order_by(Run.created_at).limit(1)).first()
        if run is None:
            return 0
        left = (RunItem.run_id == run.id, RunItem.order_id.is_(None), RunItem.refused.is_(None))
        items = session.scalars(select(RunItem).where(*left).order_by(RunItem.number).limit(most)).all()
        asker = _asker_of(session, run)
    if not items:
        _close(store, run)
        return 0
    try:
        with open_archive(keeper.read(run.archive_digest), most_bytes=most_tune_bytes) as archive:
            for item in items:
                _open(store, keeper, asker, _Opened(run=run, item=item, archive=archive), send)
    except ArchiveError as fault:
        for item in items:
            _refuse(store, item, str(fault))
    return len(items)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Opened:
    """A pair, with the run and the archive it is from."""

    run: Run
    item: RunItem
    archive: TuneArchive

    def asked(self) -> AskedOrder:
        facts, item = self.run.asked, self.item
        reference = item.reference
        if reference is None and self.run.reference is not None:
            reference = f"{self.run.reference}-{item.number}"
        return AskedOrder(
            tune=self.archive.tune(item.tune_name),
            tune_name=item.tune_name,
            movement=NamedDocument(id=item.movement_id, revision=item.movement_revision),
            cutter=NamedDocument(**facts["cutter"]),
            settings=facts["settings"].encode(),
            quantity=facts["quantity"],
            reference=reference,
            most_lost_share=facts["most_lost_share"],
            release_alone=facts["release_alone"],
            hook_id=facts["hook"],
            run_id=self.run.id,
        )


class _TakenByAnotherError(Exception):
    """Another worker made an order of the pair; ours is not kept."""


def _open(store: Store, keeper: FileKeeper, asker: Asker, opened: _Opened, send: Callable[[str], object]) -> None:
    item = opened.item

    def note(session: Session, order: OrderView) -> None:
        is_free = (RunItem.order_id.is_(None), RunItem.refused.is_(None))
        noted = update(RunItem).where(*_row_of(item), *is_free).values(order_id=order.id)
        if session.execute(noted).rowcount == 0:  # type: ignore[attr-defined]
            raise _TakenByAnotherError

    try:
        order = place_order(store, keeper, asker, opened.asked(), note)
    except _TakenByAnotherError:
        return
    except (ArchiveError, LayoutError, OrderFault) as refusal:
        _refuse(store, item, str(refusal))
        return
    send(order.id)


def _refuse(store: Store, item: RunItem, reason: str) -> None:
    with store.writing() as session:
        session.execute(update(RunItem).where(*_row_of(item), RunItem.order_id.is_(None)).values(refused=reason[:500]))


def _close(store: Store, run: Run) -> None:
    with store.writing() as session:
        session.execute(
            update(Run).where(Run.id == run.id, Run.opened_at.is_(None)).values(opened_at=store.now(session))
        )


def _row_of(item: RunItem) -> tuple[Any, ...]:
    return (RunItem.run_id == item.run_id, RunItem.number == item.number)


def _asker_of(session: Session, run: Run) -> Asker:
    key, owner = session.get_one(Key, run.key_id), session.get_one(Owner, run.owner_id)
    return Asker(
        key_id=key.id,
        owner_id=owner.id,
        title=key.title,
        is_shop=owner.is_shop,
        is_test=run.is_test,
        scopes=scopes_of(key.scopes.split()),
    )


def _row(session: Session, asker: Asker, run_id: str) -> Run:
    rows = select(Run).where(Run.id == run_id)
    if asker.is_test:
        rows = rows.where(Run.is_test)
    if not asker.sees_all_owners:
        rows = rows.where(Run.owner_id == asker.owner_id)
    run = session.scalars(rows).one_or_none()
    if run is None:
        raise OrderUnknownError(f"there is no run {run_id[:64]!r}")
    return run


def _view(session: Session, run: Run) -> RunView:
    by_state = (
        select(Order.state, RunItem.refused.is_not(None), func.count())
        .select_from(RunItem)
        .outerjoin(Order, Order.id == RunItem.order_id)
        .where(RunItem.run_id == run.id)
        .group_by(Order.state, RunItem.refused.is_not(None))
    )
    counts: Counter[str] = Counter()
    for state, is_refused, count in session.execute(by_state):
        counts[state or (REFUSED if is_refused else WAITS)] += count
    return RunView(
        id=run.id,
        reference=run.reference,
        order_count=run.order_count,
        counts=dict(sorted(counts.items())),
        created_at=run.created_at,
        is_finished=not any(counts[state] for state in (WAITS, "received", "planning")),
    )


def _facts(asked: AskedRun) -> dict[str, Any]:
    return {
        "cutter": {"id": asked.cutter.id, "revision": asked.cutter.revision},
        "settings": asked.settings.decode(),
        "quantity": asked.quantity,
        "most_lost_share": asked.most_lost_share,
        "release_alone": asked.release_alone,
        "hook": asked.hook_id,
    }
