"""A movement or a cutter as it was asked for: by the id of one that ships or is kept, or as a document sent along."""

from dataclasses import dataclass, replace
from functools import lru_cache

from layout.documents import (
    Cutter,
    Movement,
    Settings,
    read_cutter,
    read_movement,
    read_settings,
    shipped_cutter,
    shipped_cutter_ids,
    shipped_movement,
)
from service.store.documents import document_in_force
from service.store.store import Store

READ_AT_HAND = 16  # threes of documents; a layout's are asked for with each of its files


@dataclass(frozen=True, slots=True, kw_only=True)
class Shipped:
    """The document that ships under an id."""

    id: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Written:
    """A document of the asker's own, as its text; what it says of the worth of numbers is in there too."""

    text: bytes


Source = Shipped | Written


def kept_for(store: Store, owner_id: str | None, kind: str, source: Source) -> Source:
    """What an id names for an owner: the text of its own document or the shop's; left as it is where there is none.

    Args:
        store: The database; not asked where nobody in particular asks, or the document was sent along.
        owner_id: Who asks; None for nobody in particular, for whom there is what ships alone.
        kind: "movement" or "cutter".
        source: As it was asked for.

    Raises:
        StoreBusyError: The database does not answer.
    """
    if owner_id is None or isinstance(source, Written):
        return source
    with store.reading() as session:
        kept = document_in_force(session, owner_id, kind, source.id)
    return source if kept is None or kept.owner_id is None else Written(text=kept.text)


def default_cutter() -> Source:
    """The cutter meant where none is named."""
    return Shipped(id=shipped_cutter_ids()[0])


def movement_from(source: Source) -> Movement:
    """The movement that was asked for.

    Raises:
        NotShippedError: No movement of that id ships.
        DocumentError: The text is no valid movement.
    """
    if isinstance(source, Shipped):
        return shipped_movement(source.id)
    return read_movement(source.text)


def cutter_from(source: Source) -> Cutter:
    """The cutter that was asked for.

    Raises:
        NotShippedError: No cutter of that id ships.
        DocumentError: The text is no valid cutter.
    """
    if isinstance(source, Shipped):
        return shipped_cutter(source.id)
    return read_cutter(source.text)


def settings_from_text(text: bytes) -> Settings:
    """The settings of a document.

    Raises:
        DocumentError: The text is no valid settings document.
    """
    return read_settings(text)


@dataclass(frozen=True, slots=True, kw_only=True)
class Inputs:
    """All that decides a layout, as it was given.

    Attributes:
        tune: The bytes of the MIDI file.
        movement: Which movement.
        cutter: Which cutter.
        settings: Text of the settings document; `{}` for the defaults.
    """

    tune: bytes
    movement: Source
    cutter: Source
    settings: bytes

    def kept_for(self, store: Store, owner_id: str | None) -> "Inputs":
        """The same, with the texts of the documents that their ids name for an owner."""
        return replace(
            self,
            movement=kept_for(store, owner_id, "movement", self.movement),
            cutter=kept_for(store, owner_id, "cutter", self.cutter),
        )

    def read(self) -> "Documents":
        """The documents, checked.

        Raises:
            NotShippedError: An id that does not ship.
            DocumentError: A document that is not valid.
        """
        return _documents_read(self.movement, self.cutter, self.settings)


@dataclass(frozen=True, slots=True, kw_only=True)
class Documents:
    """The three documents a layout rests on."""

    movement: Movement
    cutter: Cutter
    settings: Settings


@lru_cache(maxsize=READ_AT_HAND)
def _documents_read(movement: Source, cutter: Source, settings: bytes) -> Documents:
    return Documents(
        movement=movement_from(movement), cutter=cutter_from(cutter), settings=settings_from_text(settings)
    )
