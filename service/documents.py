"""A movement or a cutter as it was asked for: by the id of one that ships, or as a document of one's own."""

from dataclasses import dataclass

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


@dataclass(frozen=True, slots=True, kw_only=True)
class Shipped:
    """The document that ships under an id."""

    id: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Written:
    """A document of the asker's own, as its text; what it says of the worth of numbers is in there too."""

    text: bytes


Source = Shipped | Written


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

    def read(self) -> "Documents":
        """The documents, checked.

        Raises:
            NotShippedError: An id that does not ship.
            DocumentError: A document that is not valid.
        """
        return Documents(
            movement=movement_from(self.movement),
            cutter=cutter_from(self.cutter),
            settings=settings_from_text(self.settings),
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Documents:
    """The three documents a layout rests on."""

    movement: Movement
    cutter: Cutter
    settings: Settings
