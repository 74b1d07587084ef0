"""Movements and cutters as they are kept: the asker's own, else the shop's, else those that ship.

A document's own text says no revision that counts; the store numbers the revisions of an id, from the shipped
document's own where the id is that of one.
"""

import hashlib
from dataclasses import dataclass

from sqlalchemy import or_, select
from sqlalchemy.orm import Session

from layout.documents import (
    read_cutter,
    read_movement,
    shipped_cutter_ids,
    shipped_movement,
    shipped_movement_ids,
    shipped_text,
)
from service.store.tables import Owner, StoredDocument

SHIPPED_IDS = {"movement": shipped_movement_ids, "cutter": shipped_cutter_ids}
FIRST_REVISION = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class KeptDocument:
    """One revision of a movement or a cutter.

    Attributes:
        kind: "movement" or "cutter".
        id: As the document says.
        revision: From 1.
        text: As it was written.
        owner_id: Whose it is; None for one that ships.
    """

    kind: str
    id: str
    revision: int
    text: bytes
    owner_id: str | None

    @property
    def digest(self) -> str:
        """SHA-256 of the text, in hex digits."""
        return hashlib.sha256(self.text).hexdigest()


def document_in_force(
    session: Session, owner_id: str, kind: str, document_id: str, *, revision: int | None = None
) -> KeptDocument | None:
    """A document as an owner sees it; None where there is none of that id, or of that revision.

    Args:
        session: A transaction.
        owner_id: Who asks: its own documents come before the shop's.
        kind: "movement" or "cutter".
        document_id: Which.
        revision: Which revision; None for the newest. A withdrawn one is found by its number alone.
    """
    seen = (
        select(StoredDocument)
        .join(Owner, Owner.id == StoredDocument.owner_id)
        .where(StoredDocument.kind == kind, StoredDocument.id == document_id)
        .where(or_(StoredDocument.owner_id == owner_id, Owner.is_shop))
    )
    wanted = StoredDocument.withdrawn_at.is_(None) if revision is None else StoredDocument.revision == revision
    own_first = (StoredDocument.owner_id == owner_id).desc()
    row = session.scalars(seen.where(wanted).order_by(own_first, StoredDocument.revision.desc()).limit(1)).first()
    if row is not None:
        return KeptDocument(kind=kind, id=row.id, revision=row.revision, text=row.body.encode(), owner_id=row.owner_id)
    return shipped_document(kind, document_id, revision)


def shipped_document(kind: str, document_id: str, revision: int | None = None) -> KeptDocument | None:
    """A document that ships, where there is one of that kind, id and revision."""
    if document_id not in SHIPPED_IDS[kind]():
        return None
    number = shipped_movement(document_id).revision if kind == "movement" else FIRST_REVISION
    if revision not in (None, number):
        return None
    return KeptDocument(kind=kind, id=document_id, revision=number, text=shipped_text(document_id), owner_id=None)


def check_text(kind: str, text: bytes) -> str:
    """See that a text is a valid document of its kind, and give its id.

    Raises:
        DocumentError: It is not; names every fault with a pointer.
    """
    return (read_movement(text) if kind == "movement" else read_cutter(text)).id
