"""Channel messages, as mido knows them: how long each status is, and what a note message says.

mido decodes every note message, each distinct one once: building a message object takes mido
about 3 microseconds, so a 2 MiB file of a million messages would otherwise take it 3 s.
Other channel messages say nothing a disc can play; mido's table gives their length.
"""

from typing import NamedTuple

import mido
from mido.messages import SPEC_BY_STATUS


class NoteMessage(NamedTuple):
    """A decoded note message.

    Attributes:
        key: channel * 128 + pitch, channel from 0: what a note-off must share with its note-on.
        velocity: 1 to 127 begins a note; 0 ends one (a note-off's own velocity is not kept).
    """

    key: int
    velocity: int


class NoteMessages(dict[bytes, NoteMessage]):
    """The note messages of one status byte by their data bytes, decoded by mido when first met.

    A note-off is looked up by its pitch byte alone, since its velocity is not used; so at most
    16 * 128 of them are ever decoded.
    """

    def __init__(self, status: int) -> None:
        super().__init__()
        self._status = status

    def __missing__(self, data: bytes) -> NoteMessage:
        message = mido.Message.from_bytes((self._status, *data.ljust(2, b"\0")))
        velocity = message.velocity if message.type == "note_on" else 0
        decoded = NoteMessage(message.channel * 128 + message.note, velocity)
        self[data] = decoded
        return decoded


class ChannelStatus(NamedTuple):
    """What follows one channel status byte.

    Attributes:
        kind: mido's name for the message.
        data_bytes: How many data bytes follow.
        key_bytes: How many of them tell one note message from another; 0 for other messages.
        notes: The decoded messages; None where the status is no note message.
    """

    kind: str
    data_bytes: int
    key_bytes: int
    notes: NoteMessages | None


_KEY_BYTES = {"note_off": 1, "note_on": 2}


class ChannelStatuses(dict[int, ChannelStatus]):
    """What follows each channel status byte 80 to EF, looked up in mido's table when first met."""

    def __missing__(self, status: int) -> ChannelStatus:
        spec = SPEC_BY_STATUS[status]
        kind = spec["type"]
        key_bytes = _KEY_BYTES.get(kind, 0)
        notes = NoteMessages(status) if key_bytes else None
        # mido counts the status byte in the length.
        self[status] = ChannelStatus(kind, spec["length"] - 1, key_bytes, notes)
        return self[status]
