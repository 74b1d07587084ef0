"""Opening runs: their pairs become orders, bit by bit, beside what else a worker does.

A pair becomes an order in one transaction with the note that it did, so however often a worker is killed in
between, and however many open the same run, each pair is one order. A run that was taken goes on though its key is
revoked meanwhile, as an order does that was placed with it: whoever wants neither cancels them.
"""

import logging
from collections.abc import Callable, Sequence
from typing import Any

from sqlalchemy import func, select, update
from sqlalchemy.orm import Session

from layout.errors import LayoutError
from service.access.asker import Asker
from service.access.scopes import scopes_of
from service.limits import Limits
from service.orders.archives import ArchiveError, open_archive
from service.orders.asked import AskedOrder, NamedDocument
from service.orders.faults import OrderFault
from service.orders.placing import place_order
from service.orders.run_forgetting import forget_run
from service.orders.states import State
from service.orders.views import OrderView
from service.store.faults import StoreError
from service.store.files import FileLostError
from service.store.holds import FileKeeper, let_go
from service.store.store import Store
from service.store.tables import Key, Order, Owner, Run, RunItem

REASON_CHARACTERS = 500  # as the column

log = logging.getLogger(__name__)


class RunOpener:
    """Opens runs for one worker, a few pairs of each in turn, so that a long run holds up no short one."""

    def __init__(self, store: Store, keeper: FileKeeper, send: Callable[[str], object], limits: Limits) -> None:
        """Begin with the oldest run.

        Args:
            store: The database.
            keeper: Keeps archives and tunes.
            send: Tells the workers of an order, after it is kept.
            limits: Read for those of tunes and runs.
        """
        self._store = store
        self._keeper = keeper
        self._send = send
        self._limits = limits
        self._last_id = ""  # of the run that had its turn
        self._archive: tuple[str, bytes] = ("", b"")  # the one read last, with its digest

    def open_all(self) -> None:
        """Go on until no pair is left, or enough orders of runs wait for workers."""
        while self.open_some():
            pass
        self._archive = ("", b"")

    def open_some(self) -> int:
        """Make orders of the next pairs of one run, or close it where none is left; 0 where there is nothing to do.

        Raises:
            StoreError: The database or the store of files does not answer or is full.
        """
        with self._store.reading() as session:
            run, items = self._next(session)
            asker = None if run is None else _asker_of(session, run)
        if run is None or asker is None:
            return 0
        self._last_id = run.id
        if not items:
            self._close(run)
            return 1
        try:
            with open_archive(self._content(run.archive_digest), self._limits) as archive:
                for item in items:
                    self._open(run, item, asker, archive.tune)
        except (ArchiveError, FileLostError) as fault:
            if self._is_other_archive(run):
                return len(items)  # a tune of it was deleted; its pairs have their turn with the new one
            for item in items:
                self._refuse(item, str(fault))
        return len(items)

    def _next(self, session: Session) -> tuple[Run | None, Sequence[RunItem]]:
        """The run whose turn it is, and its next pairs; no run where none is open or enough orders wait."""
        of_runs = (Order.state == State.RECEIVED, Order.run_id.is_not(None))
        waiting = session.scalars(select(func.count()).select_from(Order).where(*of_runs)).one()
        most = min(self._limits.run_orders_at_a_time, self._limits.run_orders_waiting - waiting)
        if most <= 0:
            return None, ()
        in_turn = (Run.id <= self._last_id, Run.id)  # those past the last one first, then round again
        run = session.scalars(select(Run).where(Run.opened_at.is_(None)).order_by(*in_turn).limit(1)).first()
        if run is None:
            return None, ()
        left = (RunItem.run_id == run.id, RunItem.order_id.is_(None), RunItem.refused.is_(None))
        return run, session.scalars(select(RunItem).where(*left).order_by(RunItem.number).limit(most)).all()

    def _content(self, digest: str) -> bytes:
        if self._archive[0] != digest:
            self._archive = ("", b"")  # two are never held at a time
            self._archive = (digest, self._keeper.read(digest))
        return self._archive[1]

    def _is_other_archive(self, run: Run) -> bool:
        with self._store.reading() as session:
            return session.scalars(select(Run.archive_digest).where(Run.id == run.id)).one() != run.archive_digest

    def _open(self, run: Run, item: RunItem, asker: Asker, tune: Callable[[str], bytes]) -> None:
        def note(session: Session, order: OrderView) -> None:
            is_free = (RunItem.order_id.is_(None), RunItem.refused.is_(None))
            noted = update(RunItem).where(*_row_of(item), *is_free).values(order_id=order.id)
            if session.execute(noted).rowcount == 0:  # type: ignore[attr-defined]
                raise _TakenByAnotherError

        try:
            order = place_order(self._store, self._keeper, asker, _asked(run, item, tune), note)
        except _TakenByAnotherError:
            return
        except (ArchiveError, LayoutError, OrderFault) as refusal:
            self._refuse(item, str(refusal))
            return
        except StoreError:
            raise
        except Exception:
            # One tune that meets a fault of ours shall hold up neither its run nor those after it.
            log.exception("the pair %d of the run %s met a fault of the program itself", item.number, run.id)
            self._refuse(item, "the program itself met a fault, logged under this run's id; tell the shop")
            return
        self._send(order.id)

    def _refuse(self, item: RunItem, reason: str) -> None:
        told = reason if len(reason) <= REASON_CHARACTERS else reason[: REASON_CHARACTERS - 1] + "…"
        with self._store.writing() as session:
            session.execute(update(RunItem).where(*_row_of(item), RunItem.order_id.is_(None)).values(refused=told))

    def _close(self, run: Run) -> None:
        """Note that no pair is left; the archive is needed no more, since each order holds its own tune."""
        with self._store.writing() as session:
            still = update(Run).where(Run.id == run.id, Run.opened_at.is_(None))
            session.execute(still.values(opened_at=self._store.now(session)))
            let_go(session, holder_id=run.id)
            forget_run(session, run.id)  # all its orders may have been deleted before its last pair had its turn


class _TakenByAnotherError(Exception):
    """Another worker made an order of the pair; ours is not kept."""


def _asked(run: Run, item: RunItem, tune: Callable[[str], bytes]) -> AskedOrder:
    facts = run.asked
    reference = item.reference
    if reference is None and run.reference is not None:
        reference = f"{run.reference}-{item.number}"
    return AskedOrder(
        tune=tune(item.tune_name),
        tune_name=item.tune_name,
        movement=NamedDocument(id=item.movement_id, revision=item.movement_revision),
        cutter=NamedDocument(**facts["cutter"]),
        settings=facts["settings"].encode(),
        quantity=facts["quantity"],
        reference=reference,
        most_lost_share=facts["most_lost_share"],
        release_alone=facts["release_alone"],
        hook_id=facts["hook"],
        run_id=run.id,
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
