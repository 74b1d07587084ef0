"""Archives of tunes: what a ZIP file holds, read so that no archive can do harm.

An archive is somebody else's: its names are labels and never paths, what it says of sizes is not believed, and
nothing of it is unpacked but one tune at a time, up to its limit.
"""

import io
import zipfile
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import PurePosixPath
from typing import BinaryIO

TUNE_SUFFIXES = (".mid", ".midi")
ENCRYPTED = 0x1  # the bit of a ZIP entry's flags (APPNOTE section 4.4.4)
MOST_NAME = 200  # characters


class ArchiveError(Exception):
    """The archive cannot be used; the text says why."""


class TuneArchive:
    """An open archive of tunes."""

    def __init__(self, archive: zipfile.ZipFile, *, most_bytes: int) -> None:
        self._archive = archive
        self._most_bytes = most_bytes

    def tune_names(self, *, most: int) -> list[str]:
        """The names of the tunes in it, in the order of the archive.

        Folders and files that are no MIDI files by their name are left aside.

        Raises:
            ArchiveError: There are none or too many, one is packed with a password, or a name comes twice or
                cannot be shown.
        """
        names = [entry.filename for entry in self._archive.infolist() if _is_tune(entry)]
        if not names:
            raise ArchiveError(f"the archive holds no tune: no name in it ends in {' or '.join(TUNE_SUFFIXES)}")
        if len(names) > most:
            raise ArchiveError(f"the archive holds {len(names)} tunes; at most {most} are taken")
        for name in names:
            if len(name) > MOST_NAME or not name.isprintable():
                raise ArchiveError(
                    f"the name {name[:60]!r} is too long or cannot be shown; use up to {MOST_NAME} letters"
                )
        twice = len(names) - len(set(names))
        if twice:
            raise ArchiveError(f"{twice} name(s) come twice in the archive")
        return names

    def tune(self, name: str) -> bytes:
        """One tune.

        Raises:
            ArchiveError: It is not there, too large, or damaged.
        """
        try:
            entry = self._archive.getinfo(name)
            if entry.flag_bits & ENCRYPTED:
                raise ArchiveError(f"{name[:60]!r} is packed with a password")
            with self._archive.open(entry) as packed:
                content = packed.read(self._most_bytes + 1)
        except KeyError as fault:
            raise ArchiveError(f"there is no {name[:60]!r} in the archive") from fault
        except (
            zipfile.BadZipFile,
            zlib.error,
            EOFError,
            NotImplementedError,
            RuntimeError,
            ValueError,
            OSError,
        ) as fault:
            raise ArchiveError(f"{name[:60]!r} cannot be unpacked: {fault}") from fault
        if len(content) > self._most_bytes:
            raise ArchiveError(f"{name[:60]!r} is larger than {self._most_bytes} bytes")
        return content


@contextmanager
def open_archive(content: bytes | BinaryIO, *, most_bytes: int) -> Iterator[TuneArchive]:
    """An archive, opened.

    Args:
        content: Of the ZIP file.
        most_bytes: How large a tune may be.

    Raises:
        ArchiveError: It is no ZIP file.
    """
    source = io.BytesIO(content) if isinstance(content, bytes) else content
    try:
        archive = zipfile.ZipFile(source)
    except (zipfile.BadZipFile, ValueError, OSError, NotImplementedError, EOFError) as fault:
        raise ArchiveError(f"this is no ZIP archive that can be read: {fault}") from fault
    with archive:
        yield TuneArchive(archive, most_bytes=most_bytes)


def _is_tune(entry: zipfile.ZipInfo) -> bool:
    name = PurePosixPath(entry.filename).name
    return not entry.is_dir() and not name.startswith(".") and name.lower().endswith(TUNE_SUFFIXES)
