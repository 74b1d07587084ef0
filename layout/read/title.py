"""The title of a tune, from the bytes of a track-name event."""

from layout.read.limits import LIMITS


def title_of(name: bytes) -> str:
    """What a track-name event leaves to print; "" where that is nothing.

    The specification says nothing binding about the characters of a name: UTF-8 is tried, and what
    is not valid UTF-8 is read as Latin-1, which every byte fits. Control and format characters are
    dropped, since a title goes into drawings, file names and headers; the first 80 that are left
    are kept.
    """
    printable = "".join(character for character in _decoded(name) if character.isprintable())
    return printable.strip()[: LIMITS.title_characters].rstrip()


def _decoded(name: bytes) -> str:
    try:
        return name.decode("utf-8")
    except UnicodeDecodeError:
        return name.decode("latin-1")
