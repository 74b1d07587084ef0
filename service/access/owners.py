"""Owners: the shop itself, and the integrators whose orders it takes."""

from dataclasses import dataclass
from datetime import datetime

from sqlalchemy import select, text
from sqlalchemy.orm import Session

from service.store.ids import new_id
from service.store.tables import Owner

SHOP_TITLE = "the shop"
MOST_TITLE_CHARACTERS = 200  # as the columns have
ACCESS_LOCK = 0x6B65_7973  # any number that nothing else locks: "keys"


@dataclass(frozen=True, slots=True, kw_only=True)
class OwnerTold:
    """An owner.

    Attributes:
        id: Of the owner.
        title: What it is called.
        is_shop: Whether it is the shop itself.
    """

    id: str
    title: str
    is_shop: bool


class TitleError(ValueError):
    """A title cannot be used; the text says why and what is allowed."""


def checked_title(title: str) -> str:
    """A title of an owner or a key, without spaces round it.

    Raises:
        TitleError: It is empty, too long, or would not stand on one line.
    """
    checked = title.strip()
    if not 1 <= len(checked) <= MOST_TITLE_CHARACTERS or not checked.isprintable():
        raise TitleError(
            f"a title is 1 to {MOST_TITLE_CHARACTERS} characters that can be shown on one line; this has {len(checked)}"
        )
    return checked


def hold_access(session: Session) -> None:
    """Let no other process make owners or keys until this transaction ends, so that none is made twice."""
    # SQLite has one writer at a time in any case.
    if session.get_bind().dialect.name == "postgresql":
        session.execute(text("SELECT pg_advisory_xact_lock(:number)"), {"number": ACCESS_LOCK})


def the_shop(session: Session, now: datetime) -> OwnerTold:
    """The shop, made where it does not exist yet; the caller holds access."""
    found = session.scalars(select(Owner).where(Owner.is_shop)).first()
    return _told(found or _made(session, SHOP_TITLE, now, is_shop=True))


def owner_titled(session: Session, title: str, now: datetime) -> OwnerTold:
    """The owner of this title, made as an integrator where there is none; the caller holds access.

    Args:
        session: Of a transaction that writes.
        title: Checked; compared letter for letter.
        now: When it is made.
    """
    found = session.scalars(select(Owner).where(Owner.title == title).order_by(Owner.id)).first()
    return _told(found or _made(session, title, now, is_shop=False))


def _made(session: Session, title: str, now: datetime, *, is_shop: bool) -> Owner:
    row = Owner(id=new_id("owner", now), title=title, is_shop=is_shop, created_at=now)
    session.add(row)
    session.flush()
    return row


def _told(row: Owner) -> OwnerTold:
    return OwnerTold(id=row.id, title=row.title, is_shop=row.is_shop)
