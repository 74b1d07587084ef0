"""Wording shared by the errors of reading: how bytes are shown, and what the user can do."""

DAMAGED = "the file is damaged or cut short; export it again, or fetch it again in binary mode"
NOT_MIDI = "export the tune as a Standard MIDI File (.mid) and send that"
WRITER = "the program that wrote the file made a mistake here; export the tune with another one"

_MOST_BYTES_SHOWN = 8


def shown(found: bytes) -> str:
    """Bytes as a reader of a hexdump sees them, with their text where all of it is printable.

    At most the first eight bytes are shown; no bytes at all read "the end of the file".
    """
    if not found:
        return "the end of the file"
    head = found[:_MOST_BYTES_SHOWN]
    text = f' ("{head.decode("ascii")}")' if head.isascii() and head.decode("ascii").isprintable() else ""
    more = " ..." if len(found) > _MOST_BYTES_SHOWN else ""
    return f"{head.hex(' ').upper()}{text}{more}"


def counted(count: int, one: str, many: str) -> str:
    """A count with its noun: "1 byte", "3 bytes"."""
    return f"{count} {one if count == 1 else many}"
