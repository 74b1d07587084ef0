"""Archives of tunes: what a ZIP file holds, read so that no archive can do harm.

An archive is somebody else's: its names are labels and never paths, what it says of sizes is held against it and
not believed, and nothing of it is unpacked but one tune at a time, up to its limit.
"""

import io
import struct
import zipfile
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import PurePosixPath

from service.limits import Limits

TUNE_SUFFIXES = (".mid", ".midi")
ENCRYPTED = 0x1  # the bit of a ZIP entry's flags (APPNOTE section 4.4.4)
ENTRY_SIGN = b"PK\x01\x02"  # begins each entry of the directory (APPNOTE section 4.3.12)
# Those that unpack no further than they are asked to: the others of the library unpack all that they have read.
METHODS = (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED)
MOST_NAME = 200  # characters
NAMES_SHOWN = 60  # characters
# What the library raises of a file that is damaged or lies; OverflowError: of a place beyond all memory.
FAULTS = (zipfile.BadZipFile, zlib.error, struct.error, EOFError, RuntimeError, ValueError, OverflowError, OSError)


class ArchiveError(Exception):
    """The archive cannot be used; the text says why."""


class TuneArchive:
    """An open archive of tunes."""

    def __init__(self, archive: zipfile.ZipFile, limits: Limits) -> None:
        self._archive = archive
        self._limits = limits

    def tune_names(self) -> list[str]:
        """The names of the tunes in it, in the order of the archive.

        Folders and files that are no MIDI files by their name are left aside. Nothing is unpacked.

        Raises:
            ArchiveError: There are none or too many, they unpack to too much, one is packed in a way that is not
                taken, or a name comes twice or cannot be shown.
        """
        entries = [entry for entry in self._archive.infolist() if _is_tune(entry)]
        if not entries:
            raise ArchiveError(f"the archive holds no tune: no name in it ends in {' or '.join(TUNE_SUFFIXES)}")
        most, most_bytes = self._limits.run_orders, self._limits.run_unpacked_bytes
        if len(entries) > most:
            raise ArchiveError(f"the archive holds {len(entries)} tunes; at most {most} are taken")
        for entry in entries:
            _check(entry)
        # A tune that unpacks to more than is said of it here is cut off there, so the sum holds.
        unpacked = sum(entry.file_size for entry in entries)
        if unpacked > most_bytes:
            raise ArchiveError(f"its tunes unpack to {unpacked} bytes; at most {most_bytes} are taken")
        names = [entry.filename for entry in entries]
        twice = len(names) - len(set(names))
        if twice:
            raise ArchiveError(f"{twice} name(s) come twice in the archive")
        return names

    def tune(self, name: str) -> bytes:
        """One tune.

        Raises:
            ArchiveError: It is not there, too large, or damaged.
        """
        most_bytes = self._limits.upload_bytes
        try:
            entry = self._archive.getinfo(name)
            _check(entry)
            with self._archive.open(entry) as packed:
                content = packed.read(most_bytes + 1)
        except KeyError as fault:
            raise ArchiveError(f"there is no {_shown(name)} in the archive") from fault
        except FAULTS as fault:
            raise ArchiveError(f"{_shown(name)} cannot be unpacked: {fault}") from fault
        if len(content) > most_bytes:
            raise ArchiveError(f"{_shown(name)} is larger than {most_bytes} bytes")
        return content


@contextmanager
def open_archive(content: bytes, limits: Limits) -> Iterator[TuneArchive]:
    """An archive, opened.

    Args:
        content: Of the ZIP file.
        limits: Read for those of tunes and runs.

    Raises:
        ArchiveError: It is no ZIP file, or has too many entries.
    """
    # Counted before the library makes an object of each: whatever the archive says, it can have no more than these.
    entries = content.count(ENTRY_SIGN)
    if entries > limits.run_entries:
        raise ArchiveError(f"the archive holds {entries} files and folders; at most {limits.run_entries} are taken")
    try:
        archive = zipfile.ZipFile(io.BytesIO(content))
    except FAULTS as fault:
        raise ArchiveError(f"this is no ZIP archive that can be read: {fault}") from fault
    with archive:
        yield TuneArchive(archive, limits)


def _is_tune(entry: zipfile.ZipInfo) -> bool:
    name = PurePosixPath(entry.filename).name
    return not entry.is_dir() and not name.startswith(".") and name.lower().endswith(TUNE_SUFFIXES)


def _check(entry: zipfile.ZipInfo) -> None:
    """See that an entry may be unpacked and shown.

    Raises:
        ArchiveError: It may not.
    """
    name = entry.filename
    if len(name) > MOST_NAME or not name.isprintable():
        raise ArchiveError(f"the name {_shown(name)} is too long or cannot be shown; use up to {MOST_NAME} letters")
    if entry.flag_bits & ENCRYPTED:
        raise ArchiveError(f"{_shown(name)} is packed with a password")
    if entry.compress_type not in METHODS:
        raise ArchiveError(f"{_shown(name)} is packed by method {entry.compress_type}; use plain ZIP (deflate)")


def _shown(name: str) -> str:
    return repr(name[:NAMES_SHOWN])
