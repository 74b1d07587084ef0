"""A light client: one request over a connection of its own, as the service has it, in one thread for thousands."""

import asyncio
import time
from collections.abc import Mapping
from dataclasses import dataclass, field

GIVE_UP_S = 60.0
NO_ANSWER = 0
NOT_MODIFIED = 304  # tells the length of what it does not send


@dataclass(frozen=True, slots=True, kw_only=True)
class Request:
    """What is sent.

    Attributes:
        head: First line and fields, without the empty line, the host and what ends the connection.
        body: What follows.
    """

    head: str
    body: bytes = b""

    def text(self, port: int) -> bytes:
        """All bytes of it."""
        fields = f"Host: 127.0.0.1:{port}\r\nConnection: close\r\nContent-Length: {len(self.body)}"
        return f"{self.head}\r\n{fields}\r\n\r\n".encode() + self.body


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What came of a request.

    Attributes:
        status: NO_ANSWER where none came whole.
        fault: Why none did, such as "ConnectionResetError"; empty where one did.
        fields: The header's, their names in lower case.
        body: Of the answer.
    """

    status: int
    fault: str = ""
    fields: Mapping[str, str] = field(default_factory=dict)
    body: bytes = b""


async def ask(port: int, request: Request) -> Answer:
    """Send a request, and wait until its answer is whole."""
    loop = asyncio.get_running_loop()
    try:
        async with asyncio.timeout(GIVE_UP_S):
            ended = loop.create_future()
            _, line = await loop.create_connection(lambda: _Line(ended, request.text(port)), "127.0.0.1", port)
            await ended
    except (OSError, TimeoutError) as fault:
        return Answer(status=NO_ANSWER, fault=type(fault).__name__)
    return answer_in(b"".join(line.pieces))


def answer_in(text: bytes) -> Answer:
    """The answer that a connection brought until it ended."""
    head, end, body = text.partition(b"\r\n\r\n")
    if not end:
        return Answer(status=NO_ANSWER, fault="cut short" if head else "closed without an answer")
    first, *lines = head.decode("latin-1").split("\r\n")
    fields = {name.lower(): value for name, value in (line.split(": ", 1) for line in lines)}
    status = int(first.split()[1])
    announced = fields.get("content-length")
    if status != NOT_MODIFIED and announced is not None and int(announced) != len(body):
        return Answer(status=NO_ANSWER, fault="cut short")
    return Answer(status=status, fields=fields, body=body)


class _Line(asyncio.Protocol):
    """One connection: sends all at once, and keeps what comes until the other side ends."""

    def __init__(self, ended: "asyncio.Future[None]", text: bytes) -> None:
        self._ended = ended
        self._text = text
        self.pieces: list[bytes] = []

    def connection_made(self, transport: asyncio.BaseTransport) -> None:
        assert isinstance(transport, asyncio.Transport)
        transport.write(self._text)

    def data_received(self, data: bytes) -> None:
        self.pieces.append(data)

    def connection_lost(self, exc: Exception | None) -> None:
        if self._ended.done():
            return  # given up meanwhile
        if exc is None:
            self._ended.set_result(None)
        else:
            self._ended.set_exception(exc)


def now_s() -> float:
    """The clock of all times here."""
    return time.perf_counter()
