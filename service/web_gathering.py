"""What has arrived of a request, and till when the rest may take: bytes and times alone, without sockets.

A thread is too dear to wait for a slow client in. So a request is gathered first, and a thread takes it when all of
it is there; see `service.web_worker`. What the head says is read here for that one decision: the request itself is
read by gunicorn, from the very same bytes.
"""

from dataclasses import dataclass
from enum import Enum

from service.limits import Limits


class SlowBodyError(Exception):
    """A body came more slowly than is waited for."""


END_OF_HEAD = b"\r\n\r\n"
MOST_DIGITS = 18  # of a length: as many as fit eight bytes


class Step(Enum):
    """What is to be done with what has arrived."""

    WAIT = "wait"
    ANSWER = "answer"  # all of it is there
    READ_ON = "read on"  # the rest is too long to be gathered, or of a length nobody knows
    REFUSE = "refuse"  # the head does not end


@dataclass(frozen=True, slots=True, kw_only=True)
class Pace:
    """How fast a body must come.

    Attributes:
        begun_s: When its head was whole, on a clock that only goes forward.
        pause_s: Seconds that it may take beside its bytes.
        bytes_per_s: The slowest sender that is waited for.
    """

    begun_s: float
    pause_s: float
    bytes_per_s: int

    def due_s(self, arrived_bytes: int) -> float:
        """When more must have come, or all be there, after so many bytes of the body."""
        return self.begun_s + self.pause_s + arrived_bytes / self.bytes_per_s


class Gathering:
    """One request on its way."""

    def __init__(self, limits: Limits, now_s: float) -> None:
        """Begin with nothing.

        Args:
            limits: Read for sizes and times.
            now_s: When the connection came, on a clock that only goes forward.
        """
        self._limits = limits
        self._begun_s = now_s
        self._arrived = bytearray()
        self._head_bytes = 0  # with the empty line; 0 where it is not whole
        self._body_bytes: int | None = 0  # that are announced; None where the sender does not say, or waits for us
        self._pace: Pace | None = None

    @property
    def arrived(self) -> bytes:
        """All bytes so far."""
        return bytes(self._arrived)

    @property
    def is_silent(self) -> bool:
        """Whether nothing has come."""
        return not self._arrived

    @property
    def body_arrived_bytes(self) -> int:
        """How much of the body is there."""
        return len(self._arrived) - self._head_bytes if self._head_bytes else 0

    @property
    def pace(self) -> Pace | None:
        """How fast the body must come; None where the head is not whole."""
        return self._pace

    @property
    def path(self) -> str:
        """The path of the request, without its query; empty where the head is not whole or begins oddly."""
        words = self._arrived.partition(b"\r\n")[0].split(b" ") if self._head_bytes else []
        return words[1].partition(b"?")[0].decode("latin-1") if len(words) > 1 else ""

    @property
    def due_s(self) -> float:
        """When more must have come."""
        if self._pace is None:
            return self._begun_s + self._limits.head_s
        return self._pace.due_s(self.body_arrived_bytes)

    def begin_pace_anew(self, now_s: float) -> None:
        """Wait for the body from now on: so far it was us who did not read."""
        self._pace = Pace(
            begun_s=now_s - self.body_arrived_bytes / self._limits.body_bytes_per_s,
            pause_s=self._limits.body_s,
            bytes_per_s=self._limits.body_bytes_per_s,
        )

    def take(self, piece: bytes, now_s: float) -> Step:
        """Take what came, and say what is to be done.

        Args:
            piece: The bytes that came; not empty.
            now_s: When.
        """
        looked_at = max(0, len(self._arrived) - len(END_OF_HEAD) + 1)
        self._arrived += piece
        if not self._head_bytes:
            end = self._arrived.find(END_OF_HEAD, looked_at, self._limits.head_bytes)
            if end < 0:
                return Step.REFUSE if len(self._arrived) >= self._limits.head_bytes else Step.WAIT
            self._head_bytes = end + len(END_OF_HEAD)
            self._body_bytes = _announced(bytes(self._arrived[:end]))
            self._pace = Pace(begun_s=now_s, pause_s=self._limits.body_s, bytes_per_s=self._limits.body_bytes_per_s)
        if self._body_bytes is None:
            return Step.READ_ON
        if self.body_arrived_bytes >= self._body_bytes:
            return Step.ANSWER
        return Step.READ_ON if self._body_bytes > self._limits.gathered_bytes else Step.WAIT


def _announced(head: bytes) -> int | None:
    """How long the body will be; None where the head does not say so plainly, or the sender waits for a word first."""
    lengths = set()
    for line in head.split(b"\r\n")[1:]:
        name, _, value = line.partition(b":")
        match name.strip().lower():
            case b"content-length":
                lengths.add(value.strip())
            case b"transfer-encoding" | b"expect":
                return None
    if not lengths:
        return 0
    [length, *others] = lengths
    is_plain = not others and length.isdigit() and len(length) <= MOST_DIGITS
    return int(length) if is_plain else None
