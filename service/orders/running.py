"""Runs: many orders asked for at once. The pairs are written down at once; workers make them orders bit by bit.

A movement or cutter named without a revision is pinned to the one in force when the run is asked for, so that all
orders of a run are alike, however long it takes to open.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.asked import NamedDocument
from service.orders.faults import InputRefusedError
from service.orders.quotes import check_hook
from service.orders.run_views import RunView, run_view
from service.store.documents import document_in_force
from service.store.holds import FileKeeper, Hold, hold
from service.store.ids import new_id
from service.store.store import Store
from service.store.tables import Run, RunItem


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


AlsoOfRun = Callable[[Session, RunView], None]


def begin_run(store: Store, keeper: FileKeeper, asker: Asker, asked: AskedRun, also: AlsoOfRun) -> RunView:
    """Write a run down; workers open it.

    Args:
        store: The database.
        keeper: Keeps the archive.
        asker: Whose run it is.
        asked: What is ordered; its pairs name tunes of the archive.
        also: What is written in the same transaction.

    Raises:
        InputRefusedError: Its hook is none of the owner's.
        StoreError: It could not be kept; nothing was ordered.
    """
    [digest] = keeper.keep([asked.archive])
    made: list[str] = []

    def beginning(session: Session) -> RunView:
        now = store.now(session)
        made[:] = made or [new_id("run", now)]
        run = session.get(Run, made[0])
        if run is not None:  # the connection was lost after the commit
            return run_view(session, run)
        check_hook(session, asker, asked.hook_id)
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
        view = run_view(session, run)
        also(session, view)
        return view

    return store.again(beginning)


def pinned(session: Session, asker: Asker, kind: str, named: NamedDocument, pointer: str) -> NamedDocument:
    """A document by the revision that is in force now.

    Args:
        session: A transaction.
        asker: Whose run it is.
        kind: "movement" or "cutter".
        named: As it is asked for.
        pointer: JSON pointer of where it is named.

    Raises:
        InputRefusedError: There is none for the asker.
    """
    found = document_in_force(session, asker.owner_id, kind, named.id, revision=named.revision)
    if found is None:
        of = "" if named.revision is None else f" of revision {named.revision}"
        raise InputRefusedError(pointer, f"there is no {kind} {named.id!r}{of}; GET /v1/{kind}s lists those there are")
    return NamedDocument(id=found.id, revision=found.revision)


def _facts(asked: AskedRun) -> dict[str, Any]:
    return {
        "cutter": {"id": asked.cutter.id, "revision": asked.cutter.revision},
        "settings": asked.settings.decode(),
        "quantity": asked.quantity,
        "most_lost_share": asked.most_lost_share,
        "release_alone": asked.release_alone,
        "hook": asked.hook_id,
    }
