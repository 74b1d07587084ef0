"""Movements and cutters as they are kept: the asker's own, else the shop's, else those that ship.

The store numbers the revisions of an id, from the shipped document's own where the id is that of one. How they come
to be: `service.store.revising`.
"""

import hashlib
from dataclasses import dataclass
from datetime import datetime

from sqlalchemy import Select, func, or_, select
from sqlalchemy.orm import Session

from layout.documents import (
    read_cutter,
    read_movement,
    shipped_cutter_ids,
    shipped_movement,
    shipped_movement_ids,
    shipped_text,
)
from service.store.tables import Key, Owner, StoredDocument

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
    seen = _seen_by(owner_id, kind).where(StoredDocument.id == document_id)
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


@dataclass(frozen=True, slots=True, kw_only=True)
class KeptRevision:
    """That there is a revision of a document.

    Attributes:
        revision: From 1.
        digest: SHA-256 of its text, in hex digits.
        owner_id: Whose it is; None for one that ships.
        saved_at: When; None for one that ships.
        saved_by: The title of the key; None for one that ships.
        withdrawn_at: Since when it is not offered any more; None where it is.
    """

    revision: int
    digest: str
    owner_id: str | None
    saved_at: datetime | None = None
    saved_by: str | None = None
    withdrawn_at: datetime | None = None


def revisions_of(session: Session, owner_id: str | None, kind: str, document_id: str) -> tuple[KeptRevision, ...]:
    """Every revision of an id that an owner can name, the newest first; of one number its own hides the shop's.

    Args:
        session: A transaction.
        owner_id: Who asks; None for nobody, who sees what ships.
        kind: "movement" or "cutter".
        document_id: Which.
    """
    shipped = shipped_document(kind, document_id)
    found: dict[int, KeptRevision] = {}
    if shipped is not None:
        found[shipped.revision] = KeptRevision(revision=shipped.revision, digest=shipped.digest, owner_id=None)
    if owner_id is not None:
        own_last = (StoredDocument.owner_id == owner_id).asc()
        rows = _seen_by(owner_id, kind).where(StoredDocument.id == document_id).order_by(own_last)
        with_key = rows.add_columns(Key.title).outerjoin(Key, Key.id == StoredDocument.key_id)
        for row, title in session.execute(with_key):
            found[row.revision] = KeptRevision(
                revision=row.revision,
                digest=row.digest,
                owner_id=row.owner_id,
                saved_at=row.created_at,
                saved_by=title,
                withdrawn_at=row.withdrawn_at,
            )
    return tuple(found[number] for number in sorted(found, reverse=True))


def documents_in_force(
    session: Session, owner_id: str | None, kind: str, *, after: str, most: int
) -> tuple[KeptDocument, ...]:
    """The newest of each document that an owner sees, by id.

    Args:
        session: A transaction.
        owner_id: Who asks; None for nobody, who sees what ships.
        kind: "movement" or "cutter".
        after: Only ids past this one; "" for all.
        most: How many at most.
    """
    ids = {known for known in SHIPPED_IDS[kind]() if known > after}
    if owner_id is not None:
        offered = _seen_by(owner_id, kind).where(StoredDocument.withdrawn_at.is_(None), StoredDocument.id > after)
        narrowed = offered.with_only_columns(StoredDocument.id).distinct().order_by(StoredDocument.id).limit(most)
        ids |= set(session.scalars(narrowed))
    found = []
    for known in sorted(ids)[:most]:
        document = (
            shipped_document(kind, known) if owner_id is None else document_in_force(session, owner_id, kind, known)
        )
        if document is not None:
            found.append(document)
    return tuple(found)


def newest_own_revision(session: Session, owner_id: str, kind: str, document_id: str) -> int:
    """The highest number an owner's own document ever had, withdrawn or not; 0 where there is none."""
    highest = select(func.max(StoredDocument.revision)).where(
        StoredDocument.owner_id == owner_id, StoredDocument.kind == kind, StoredDocument.id == document_id
    )
    return session.scalars(highest).one() or 0


def check_text(kind: str, text: bytes) -> str:
    """See that a text is a valid document of its kind, and give its id.

    Raises:
        DocumentError: It is not; names every fault with a pointer.
    """
    return (read_movement(text) if kind == "movement" else read_cutter(text)).id


def _seen_by(owner_id: str, kind: str) -> Select[StoredDocument]:
    return (
        select(StoredDocument)
        .join(Owner, Owner.id == StoredDocument.owner_id)
        .where(StoredDocument.kind == kind)
        .where(or_(StoredDocument.owner_id == owner_id, Owner.is_shop))
    )
