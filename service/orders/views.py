"""Orders as they are shown: values read in one transaction, apart from rows."""

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import select
from sqlalchemy.orm import Session

from service.store.tables import Event, Order, Plan, PlanFile


@dataclass(frozen=True, slots=True, kw_only=True)
class FileView:
    """A file of a plan."""

    disc: int
    name: str
    sha256: str
    byte_count: int
    media_type: str
    saved_as: str
    is_for_cutting: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanView:
    """A plan, with its files."""

    revision: int
    engine_version: str
    inputs: dict[str, Any]
    told: dict[str, Any]
    good_to_cut: bool
    lost_share: float
    made_at: datetime
    released_at: datetime | None
    released_by: str | None
    release_reason: str | None
    superseded_at: datetime | None
    files: tuple[FileView, ...]

    @property
    def tag(self) -> str | None:
        """Names this plan and no other: its revision and what its files are; None where they were deleted.

        A revision alone could be given twice: by a database that a backup brought back.
        """
        if not self.files:
            return None
        lines = (f"{file.disc} {file.name} {file.sha256}\n" for file in self.files)
        return f"{self.revision}-{hashlib.sha256(''.join(lines).encode()).hexdigest()}"


@dataclass(frozen=True, slots=True, kw_only=True)
class OrderView:
    """An order, with the plan in force; `plan` is None before the first, and for what was erased."""

    id: str
    owner_id: str
    version: int
    state: str
    reason: str | None
    reference: str | None
    quantity: int
    is_test: bool
    movement_id: str
    movement_revision: int
    cutter_id: str
    tune_name: str | None
    tune_digest: str
    most_lost_share: float
    release_alone: bool
    quote_id: str | None
    repeat_of: str | None
    run_id: str | None
    hook_id: str | None
    plan_revision: int
    created_at: datetime
    updated_at: datetime
    finished_at: datetime | None
    erased_at: datetime | None
    plan: PlanView | None
    superseded_revisions: tuple[int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class EventView:
    """An event of an order."""

    seq: int
    order_id: str
    type: str
    at: datetime
    by: str | None
    data: dict[str, Any]


def order_view(session: Session, order: Order) -> OrderView:
    """An order as it is shown."""
    gone = select(Plan.revision).where(Plan.order_id == order.id, Plan.superseded_at.is_not(None))
    return OrderView(
        **{name: getattr(order, name) for name in _COPIED},
        plan=plan_view(session, order.id, order.plan_revision),
        superseded_revisions=tuple(session.scalars(gone.order_by(Plan.revision))),
    )


def plan_view(session: Session, order_id: str, revision: int) -> PlanView | None:
    """A plan of an order, None where there is none of that revision."""
    plan = session.get(Plan, (order_id, revision))
    if plan is None:
        return None
    rows = session.scalars(
        select(PlanFile)
        .where(PlanFile.order_id == order_id, PlanFile.revision == revision)
        .order_by(PlanFile.disc, PlanFile.name)
    )
    return PlanView(
        **{name: getattr(plan, name) for name in _COPIED_OF_PLAN},
        files=tuple(
            FileView(
                disc=row.disc,
                name=row.name,
                sha256=row.digest,
                byte_count=row.byte_count,
                media_type=row.media_type,
                saved_as=row.saved_as,
                is_for_cutting=row.is_for_cutting,
            )
            for row in rows
        ),
    )


def event_views(rows: Sequence[Event]) -> tuple[EventView, ...]:
    """Events as they are shown."""
    return tuple(
        EventView(seq=row.seq, order_id=row.order_id, type=row.type, at=row.at, by=row.by, data=row.data)
        for row in rows
    )


_COPIED = tuple(name for name in OrderView.__dataclass_fields__ if name not in ("plan", "superseded_revisions"))
_COPIED_OF_PLAN = tuple(name for name in PlanView.__dataclass_fields__ if name != "files")
