"""Messages between a process and its child: each a length in eight bytes, and then its bytes."""

import os
import select
import struct
import time
from typing import IO

LENGTH = struct.Struct(">Q")
# bytes; all files of a disc of 7,650 projections take 20 MB, what 24 such discs tell of themselves 70 MB, measured
MOST_BYTES = 256 * 1024 * 1024
CHUNK_BYTES = 256 * 1024
NO_ROOM_S = 0.005  # s; a pipe may have room for less than it takes at a time


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


def frame_of(content: bytes) -> memoryview:
    """One message as it is written, to be written by `written_on`."""
    return memoryview(LENGTH.pack(len(content)) + content)


def written_on(descriptor: int, rest: memoryview, within_s: float) -> memoryview:
    """Write of a message what there is room for within some time, and give what is left of it.

    Args:
        descriptor: Open, and set not to block.
        rest: What is still to be written.
        within_s: How long room is waited for.

    Raises:
        BrokenFrameError: The other side has gone.
    """
    last_s = time.monotonic() + within_s
    while rest and _is_ready(descriptor, select.POLLOUT, last_s):
        try:
            rest = rest[os.write(descriptor, rest[:CHUNK_BYTES]) :]
        except BlockingIOError:  # there was room for less than was tried
            time.sleep(NO_ROOM_S)
        except (BrokenPipeError, ConnectionResetError) as fault:
            raise BrokenFrameError("the other side has gone") from fault
    return rest


def _is_ready(descriptor: int, event: int, last_s: float) -> bool:
    """Whether it can be read or written, or has broken, until then; by poll, which takes no descriptor of its own."""
    polling = select.poll()
    polling.register(descriptor, event)
    return bool(polling.poll(max(last_s - time.monotonic(), 0.0) * 1000))


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
        while (content := self._whole()) is None:
            if not _is_ready(self._descriptor, select.POLLIN, last_s):
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
