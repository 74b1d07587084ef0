"""Variable-length quantities of the Standard MIDI File: seven bits a byte, high bit set on all but the last."""

from layout.errors import MidiReadError
from layout.read.faults import DAMAGED, shown
from layout.read.limits import LIMITS


def read_quantity(body: bytes, at: int, *, base: int) -> tuple[int, int]:
    """Read the variable-length quantity that begins at `body[at]`.

    Args:
        body: The bytes of one track.
        at: Where the quantity begins in them.
        base: Where the track's bytes begin in the file, for the error.

    Returns:
        The value, 0 to 0x0FFFFFFF, and the place in `body` after it.

    Raises:
        MidiReadError: It does not end within four bytes, or the track ends inside it.
    """
    value = 0
    field = body[at : at + LIMITS.quantity_bytes]
    for after, byte in enumerate(field, start=at + 1):
        value = value << 7 | byte & 0x7F
        if not byte & 0x80:
            return value, after
    if len(field) < LIMITS.quantity_bytes:
        raise MidiReadError(
            byte_offset=base + len(body),
            found="the end of the track",
            expected=f"the rest of the variable-length quantity that begins at byte {base + at}",
            remedy=DAMAGED,
        )
    raise MidiReadError(
        byte_offset=base + at,
        found=f"{shown(field)}, which does not end with a byte below 80",
        expected=f"a variable-length quantity of at most {LIMITS.quantity_bytes} bytes",
        remedy=DAMAGED,
    )
