"""Messages between a process and its child: each a length in eight bytes, and then its bytes."""

import os
import selectors
import struct
import time
from typing import IO

LENGTH = struct.Struct(">Q")
MOST_BYTES = 64 * 1024 * 1024  # bytes; a hundred times what is told of the longest tune
CHUNK_BYTES = 256 * 1024


class BrokenFrameError(Exception):
    """The other side has ended within a message, or wrote what is none."""


def write_frame(file: IO[bytes], content: bytes) -> None:
    """Write one message.

    Raises:
        OSError: The other side has gone.
    """
    file.write(LENGTH.pack(len(content)) + content)
    file.flush()


def read_frame(file: IO[bytes]) -> bytes | None:
    """The next message, None where the other side has ended.

    Raises:
        BrokenFrameError: It ended within one.
    """
    head = file.read(LENGTH.size)
    if not head:
        return None
    if len(head) < LENGTH.size:
        raise BrokenFrameError("ended within the length of a message")
    size = _checked(LENGTH.unpack(head)[0])
    content = file.read(size)
    if len(content) < size:
        raise BrokenFrameError(f"ended after {len(content)} of {size} bytes of a message")
    return content


class FrameReader:
    """Reads messages without ever waiting longer than it is told to, even for the second half of one."""

    def __init__(self, descriptor: int) -> None:
        """Read from an open descriptor, which stays the caller's to close."""
        self._descriptor = descriptor
        self._kept = bytearray()

    def read_within(self, within_s: float) -> bytes | None:
        """The next message, None where it has not all come within that time.

        Raises:
            BrokenFrameError: The other side has ended, or wrote what is no message.
        """
        last_s = time.monotonic() + within_s
        with selectors.DefaultSelector() as selector:
            selector.register(self._descriptor, selectors.EVENT_READ)
            while (content := self._whole()) is None:
                left_s = last_s - time.monotonic()
                if not selector.select(max(left_s, 0.0)):
                    return None
                piece = os.read(self._descriptor, CHUNK_BYTES)
                if not piece:
                    raise BrokenFrameError("the other side has ended")
                self._kept += piece
        return content

    def _whole(self) -> bytes | None:
        if len(self._kept) < LENGTH.size:
            return None
        end = LENGTH.size + _checked(LENGTH.unpack_from(self._kept)[0])
        if len(self._kept) < end:
            return None
        content = bytes(self._kept[LENGTH.size : end])
        del self._kept[:end]
        return content


def _checked(size: int) -> int:
    if size > MOST_BYTES:
        raise BrokenFrameError(f"a message of {size} bytes; at most {MOST_BYTES} are sent")
    return size
