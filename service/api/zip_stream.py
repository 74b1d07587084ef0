"""A ZIP archive made piece by piece while it is sent: no more of it is in memory than one piece of one file."""

import io
import zipfile
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

LONG_AGO = (1980, 1, 1, 0, 0, 0)  # the earliest time a ZIP entry can tell: the same files give the same archive


@dataclass(frozen=True, slots=True, kw_only=True)
class Packed:
    """A file that goes into an archive.

    Attributes:
        name: Its name in the archive.
        pieces: Its bytes, read when its turn comes.
    """

    name: str
    pieces: Iterable[bytes]


def zip_stream(files: Iterable[Packed]) -> Iterator[bytes]:
    """The archive of some files, in pieces; each file is packed while it is read."""
    sink = _Sink()
    with zipfile.ZipFile(sink, "w", zipfile.ZIP_DEFLATED) as archive:
        for file in files:
            entry = zipfile.ZipInfo(file.name, LONG_AGO)
            entry.compress_type = zipfile.ZIP_DEFLATED
            entry.external_attr = 0o644 << 16  # a plain file that its owner may write
            with archive.open(entry, "w") as packed:
                for piece in file.pieces:
                    packed.write(piece)
                    yield from sink.taken()
            yield from sink.taken()
    yield from sink.taken()


class _Sink(io.RawIOBase):
    """Takes what is written, in order; it cannot be sought in, so that sizes follow each file (APPNOTE 4.3.9)."""

    def __init__(self) -> None:
        super().__init__()
        self._written = bytearray()

    def writable(self) -> bool:
        return True

    def write(self, content: object) -> int:
        piece = bytes(content)  # type: ignore[call-overload]  # any buffer, as the base class says
        self._written += piece
        return len(piece)

    def taken(self) -> Iterator[bytes]:
        """What was written since the last time."""
        if self._written:
            yield bytes(self._written)
            self._written.clear()
