"""Inserting what may be there already, on every database."""

from sqlalchemy.dialects import postgresql, sqlite
from sqlalchemy.orm import Session

from service.store.tables import Row


def insert_into(session: Session, kind: type[Row]) -> sqlite.Insert | postgresql.Insert:
    """An insert that knows what to do on a conflict; both databases spell it alike."""
    return sqlite.insert(kind) if session.get_bind().dialect.name == "sqlite" else postgresql.insert(kind)
