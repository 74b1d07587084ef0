"""Movements and cutters saved and withdrawn: each change is a new revision, and none is lost to another's.

Who changes a document says which one it has seen. Of two who saw the same, one alone succeeds: where a row of the
id is there it is locked first, and a number is given once in any case, since it is part of the table's key.
"""

import json
from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import select, update
from sqlalchemy.orm import Session

from layout.errors import DocumentError, Problem
from service.store.documents import KeptDocument, check_text, document_in_force, newest_own_revision
from service.store.inserting import insert_into
from service.store.store import Store
from service.store.tables import StoredDocument

AsExpected = Callable[[KeptDocument | None], bool]


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """A document as it shall be.

    Attributes:
        kind: "movement" or "cutter".
        id: Under which it is kept; the text must say the same.
        text: JSON.
    """

    kind: str
    id: str
    text: bytes


@dataclass(frozen=True, slots=True, kw_only=True)
class Writer:
    """Who changes documents: an owner, by one of its keys."""

    owner_id: str
    key_id: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Saved:
    """What came of saving.

    Attributes:
        document: As it is in force now.
        is_new: Whether nothing of that id was in force before.
        is_changed: Whether a revision was made; not where the text says what the newest does.
    """

    document: KeptDocument
    is_new: bool
    is_changed: bool


class DocumentMovedError(Exception):
    """The document is not the one that was seen; the text says what it is."""


class DocumentNotOwnError(Exception):
    """The document in force is the shop's, or ships: it is not the asker's to withdraw."""


class DocumentAbsentError(Exception):
    """There is no document of that id."""


def save_document(store: Store, writer: Writer, draft: Draft, as_expected: AsExpected) -> Saved:
    """Keep a document as the newest revision of its id.

    A movement's text states its revision, which drawings carry: it is made to say the number that the store gives.

    Args:
        store: The database.
        writer: Whose it is from then on.
        draft: The document.
        as_expected: Whether the one in force before, if any, is the one the asker has seen.

    Raises:
        DocumentError: It is not valid, or is of another id.
        DocumentMovedError: It is not as expected, or another change came first.
        StoreError: It could not be kept.
    """
    if check_text(draft.kind, draft.text) != draft.id:
        problem = Problem(pointer="/id", message=f"the document is kept as {draft.id}; write that, or PUT it elsewhere")
        raise DocumentError(document=draft.kind, problems=(problem,))
    with store.writing() as session:
        own, before = _locked(session, writer, draft.kind, draft.id)
        if not as_expected(before):
            raise DocumentMovedError(_moved(before))
        if before is not None and _says_the_same(draft, before):
            return Saved(document=before, is_new=False, is_changed=False)
        number = max(own, 0 if before is None else before.revision) + 1
        document = KeptDocument(
            kind=draft.kind,
            id=draft.id,
            revision=number,
            text=_stamped(draft, number),
            owner_id=writer.owner_id,
        )
        if not _inserted(session, document, writer, store.now(session)):
            raise DocumentMovedError("another change of the document came first")
    return Saved(document=document, is_new=before is None, is_changed=True)


def withdraw_document(store: Store, writer: Writer, kind: str, document_id: str, as_expected: AsExpected) -> None:
    """Offer a document no more; orders keep what they were planned with, and its revisions can be read.

    Raises:
        DocumentAbsentError: There is none in force.
        DocumentMovedError: It is not as expected.
        DocumentNotOwnError: It is not the asker's own.
        StoreError: It could not be done.
    """
    with store.writing() as session:
        _, before = _locked(session, writer, kind, document_id)
        if before is None:
            raise DocumentAbsentError
        if not as_expected(before):
            raise DocumentMovedError(_moved(before))
        if before.owner_id != writer.owner_id:
            raise DocumentNotOwnError
        offered = (*_own(writer, kind, document_id), StoredDocument.withdrawn_at.is_(None))
        session.execute(update(StoredDocument).where(*offered).values(withdrawn_at=store.now(session)))


def _locked(session: Session, writer: Writer, kind: str, document_id: str) -> tuple[int, KeptDocument | None]:
    """The highest number of the owner's own, and the document in force, read after every other change has ended.

    Where the owner has no row of the id yet there is nothing to lock. So the number is read before the document: of
    two who make it at the same moment, one either sees the other's or takes the same number, and fails by that.
    """
    rows = select(StoredDocument.revision).where(*_own(writer, kind, document_id))
    session.execute(rows.order_by(StoredDocument.revision).with_for_update()).all()
    own = newest_own_revision(session, writer.owner_id, kind, document_id)
    return own, document_in_force(session, writer.owner_id, kind, document_id)


def _own(writer: Writer, kind: str, document_id: str) -> tuple[Any, ...]:
    return (
        StoredDocument.owner_id == writer.owner_id,
        StoredDocument.kind == kind,
        StoredDocument.id == document_id,
    )


def _inserted(session: Session, document: KeptDocument, writer: Writer, now: datetime) -> bool:
    row = {
        "owner_id": writer.owner_id,
        "kind": document.kind,
        "id": document.id,
        "revision": document.revision,
        "body": document.text.decode(),
        "digest": document.digest,
        "key_id": writer.key_id,
        "created_at": now,
    }
    new = insert_into(session, StoredDocument).values(row).on_conflict_do_nothing()
    # Asked for by what it gives back: on PostgreSQL the count of such an insert is not told.
    return session.execute(new.returning(StoredDocument.revision)).first() is not None


def _says_the_same(draft: Draft, before: KeptDocument) -> bool:
    return bool(json.loads(_stamped(draft, before.revision)) == json.loads(before.text))


def _stamped(draft: Draft, number: int) -> bytes:
    """The text with its revision; as it was written where it states that one already, or is a cutter's."""
    value = json.loads(draft.text)
    if draft.kind == "movement" and value.get("revision", 1) != number:
        value["revision"] = number
    elif _is_utf_8(draft.text):
        return draft.text
    return json.dumps(value, ensure_ascii=False, indent=2).encode("utf-8", "backslashreplace")


def _is_utf_8(text: bytes) -> bool:
    try:
        text.decode()
    except UnicodeDecodeError:
        return False
    return True


def _moved(before: KeptDocument | None) -> str:
    if before is None:
        return "there is no document of that id, so none that was seen"
    return f"the document is at revision {before.revision}, not the one that was seen"
