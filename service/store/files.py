"""Files under their digests: a folder, or a bucket that speaks S3, by one URL.

A file is written whole under a name beside its own and then moved, so that nobody reads half of one; what is
there under a digest is that file for ever. Who holds a file, and whether anybody does, stands in the database
(`service.store.holds`): this module knows bytes alone.

Beside them stand the notes of what was deleted. They must outlive the database, for a backup of that does not know
what was deleted after it; and they must be one for all machines.
"""

import errno
import hashlib
import os
import re
import secrets
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path, PurePosixPath
from typing import BinaryIO

import fsspec

from service.store.faults import StoreBusyError, StoreError, StoreFullError

CHUNK_BYTES = 256 * 1024  # bytes read at a time: constant memory, whatever the file's size
S3_PIECE_BYTES = 4 * 1024 * 1024  # bytes asked for at a time: each is a request, and most files take one
NO_ROOM = (errno.ENOSPC, errno.EDQUOT)
DIGEST = re.compile(r"[0-9a-f]{64}")
PART = ".part"  # ends the name of a file that is being written
NOTES = "erased"  # where the notes are
NOTE = re.compile(r"[a-z0-9_]{1,64}")
ABANDONED_S = 3600  # s; writing a file takes seconds
# Listings are never remembered, since other machines write too. A bucket that is away is told of within seconds.
S3_OPTIONS = {
    "use_listings_cache": False,
    "skip_instance_cache": True,
    "config_kwargs": {"connect_timeout": 5, "read_timeout": 20, "retries": {"max_attempts": 2}},
}


class FileLostError(StoreError):
    """The database names a file that the store of files does not have."""


class FileStore:
    """The store of files. Made after a process has forked, never before."""

    def __init__(self, url: str) -> None:
        """Get ready; a folder is made, a bucket must exist.

        Args:
            url: file:///path or s3://bucket/path; how to reach S3 comes from the variables of its own clients:
                AWS_ACCESS_KEY_ID, AWS_SECRET_ACCESS_KEY, AWS_DEFAULT_REGION, and AWS_ENDPOINT_URL for a
                server of one's own.

        Raises:
            StoreError: The folder cannot be made, or what speaks S3 is not installed.
        """
        self._is_folder = url.startswith("file:")
        self._faults: tuple[type[Exception], ...] = (OSError,) if self._is_folder else _faults_of_s3()
        self._files, root = fsspec.core.url_to_fs(url, **({} if self._is_folder else S3_OPTIONS))
        self._root = PurePosixPath(root)
        self._on_disk: set[PurePosixPath] = set()  # folders of which this process knows that their names will last
        if self._is_folder:
            with self._told("the folder of files cannot be made"):
                self._make_folder(self._root)

    def put(self, content: bytes) -> str:
        """Keep a file, and give its digest; one that is there already costs no writing."""
        digest = hashlib.sha256(content).hexdigest()
        path = self._path(digest)
        with self._told("the file could not be kept"):
            if not self._files.exists(path):
                self._write(path, content)
        return digest

    def _write(self, path: str, content: bytes) -> None:
        if not self._is_folder:
            try:
                self._files.pipe_file(path, content)  # S3 shows an object only when all of it is there
            except FileNotFoundError as fault:
                raise StoreBusyError(f"the store of files has no bucket {self._root.parts[0]!r}; make it") from fault
            return
        part = f"{path}.{secrets.token_hex(8)}{PART}"
        folder = PurePosixPath(path).parent
        self._make_folder(folder)
        try:
            with open(part, "wb") as file:
                file.write(content)
                file.flush()
                # A file that the database names must outlive a loss of power, as the database's own rows do.
                os.fsync(file.fileno())
            os.replace(part, path)
        except BaseException:
            Path(part).unlink(missing_ok=True)
            raise
        _folder_to_disk(folder)

    def _make_folder(self, folder: PurePosixPath) -> None:
        """Make a folder, and those above it, so that their names outlive a loss of power.

        One that is there already may have been made by another process a moment ago, which has not come so far yet.
        """
        if folder in self._on_disk:
            return
        new = [folder]
        while not os.path.lexists(new[-1].parent):
            new.append(new[-1].parent)
        self._files.makedirs(str(folder), exist_ok=True)
        for made in reversed(new):
            _folder_to_disk(made.parent)
        self._on_disk.update(new)

    def read(self, digest: str) -> bytes:
        """A file, whole.

        Raises:
            FileLostError: It is not there.
        """
        return b"".join(self.chunks(digest))

    def chunks(self, digest: str, *, start: int = 0, end: int | None = None) -> Iterator[bytes]:
        """A file in pieces, from byte `start` up to but without `end`.

        Raises:
            FileLostError: It is not there.
        """
        path = self._path(digest)
        try:
            with self._told("the file could not be read"):
                if self._is_folder:
                    return self._pieces_of_file(open(path, "rb"), start, end)
                byte_count = self._files.info(path)["size"]
        except FileNotFoundError as fault:
            raise FileLostError(f"the file {digest} is not in the store of files; restore it from a backup") from fault
        return self._pieces_of_object(path, start, byte_count if end is None else min(end, byte_count))

    def has(self, digest: str) -> bool:
        """Whether the file is there."""
        with self._told("the store of files could not be asked"):
            return bool(self._files.exists(self._path(digest)))

    def remove(self, digest: str) -> None:
        """Let a file go; one that is not there is gone already."""
        with self._told("the file could not be removed"):
            if self._files.exists(self._path(digest)):
                self._files.rm_file(self._path(digest))

    def check(self) -> None:
        """See that the store is there and takes files; costs one look.

        Raises:
            StoreBusyError: It is not, or does not.
        """
        if self._is_folder:
            if not os.access(self._root, os.W_OK | os.X_OK):
                raise StoreBusyError(f"the folder of files, {self._root}, is not there or cannot be written")
            return
        bucket = self._root.parts[0]
        with self._told("the store of files could not be asked"):
            self._files.invalidate_cache()
            if not self._files.exists(bucket):
                raise StoreBusyError(f"the store of files has no bucket {bucket!r}, or does not show it")

    def digests(self) -> Iterator[str]:
        """Every file that is there."""
        with self._told("the store of files could not be listed"):
            for path in self._files.find(str(self._root)):
                name = PurePosixPath(path).name
                if DIGEST.fullmatch(name):
                    yield name

    def note(self, what: str) -> None:
        """Note that something was deleted, so that no backup brings it back; noting it again changes nothing.

        Args:
            what: Its id.
        """
        if not NOTE.fullmatch(what):
            raise ValueError(f"{what!r} is no id")
        path = str(self._root / NOTES / what)
        with self._told("it could not be noted that something was deleted"):
            if not self._files.exists(path):
                self._write(path, b"")

    def forget_note(self, what: str) -> None:
        """Take a note back: what it says was not deleted after all."""
        path = str(self._root / NOTES / what)
        with self._told("a note of what was deleted could not be taken back"):
            if self._files.exists(path):
                self._files.rm_file(path)

    def noted(self) -> Iterator[str]:
        """The ids of all that was noted."""
        with self._told("the notes of what was deleted could not be listed"):
            for path in self._files.find(str(self._root / NOTES)):
                name = PurePosixPath(path).name
                if NOTE.fullmatch(name):
                    yield name

    def sweep_parts(self) -> int:
        """Remove what processes that were killed left half-written long ago; gives how many.

        In S3 there are none: what was sent of an object that never came to its end is never shown.
        """
        count = 0
        if self._is_folder:
            with self._told("what was left half-written could not be removed"):
                for part in Path(self._root).rglob(f"*{PART}"):
                    if part.stat().st_mtime < time.time() - ABANDONED_S:
                        part.unlink(missing_ok=True)
                        count += 1
        return count

    def _path(self, digest: str) -> str:
        return str(self._root / digest[:2] / digest)

    def _pieces_of_file(self, file: BinaryIO, start: int, end: int | None) -> Iterator[bytes]:
        with file, self._told("the file could not be read"):
            file.seek(start)
            left = None if end is None else end - start
            while left is None or left > 0:
                piece = file.read(CHUNK_BYTES if left is None else min(CHUNK_BYTES, left))
                if not piece:
                    return
                left = None if left is None else left - len(piece)
                yield piece

    def _pieces_of_object(self, path: str, start: int, end: int) -> Iterator[bytes]:
        # By plain ranges: an object written anew meanwhile has the same bytes, whatever entity tag S3 gives it.
        for begin in range(start, end, S3_PIECE_BYTES):
            with self._told("the file could not be read"):
                yield self._files.cat_file(path, start=begin, end=min(begin + S3_PIECE_BYTES, end))

    @contextmanager
    def _told(self, what: str) -> Iterator[None]:
        """Faults of the store in our own words; a file that is not there is the caller's to tell."""
        try:
            yield
        except FileNotFoundError:
            raise
        except self._faults as fault:
            if isinstance(fault, OSError) and fault.errno in NO_ROOM:
                raise StoreFullError("there is no room left in the store of files") from fault
            raise StoreBusyError(f"{what}: {getattr(fault, 'strerror', None) or fault}") from fault


def _folder_to_disk(folder: PurePosixPath) -> None:
    """Have the new names in a folder outlive a loss of power."""
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _faults_of_s3() -> tuple[type[Exception], ...]:
    try:
        from botocore.exceptions import (  # type: ignore[import-untyped]  # noqa: PLC0415 -- there only where S3 is used
            BotoCoreError,
            ClientError,
        )
    except ImportError as fault:
        raise StoreError(
            "the store of files is a bucket, but what speaks S3 is not installed; install discwright[many]"
        ) from fault
    return (OSError, BotoCoreError, ClientError)
