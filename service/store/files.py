"""Files under their digests: a folder, or a bucket that speaks S3, by one URL.

A file is written whole under a name beside its own and then moved, so that nobody reads half of one; what is
there under a digest is that file for ever. Who holds a file, and whether anybody does, stands in the database
(`service.store.holds`): this module knows bytes alone.
"""

import errno
import hashlib
import os
import secrets
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import PurePosixPath
from typing import Any

import fsspec

from service.store.faults import StoreBusyError, StoreError, StoreFullError

CHUNK_BYTES = 256 * 1024  # bytes read at a time: constant memory, whatever the file's size
NO_ROOM = (errno.ENOSPC, errno.EDQUOT)


class FileLostError(StoreError):
    """The database names a file that the store of files does not have."""


class FileStore:
    """The store of files. Made after a process has forked, never before."""

    def __init__(self, url: str) -> None:
        """Get ready; a folder is made, a bucket must exist.

        Args:
            url: file:///path or s3://bucket/path; how to reach S3 comes from the variables of its own clients.

        Raises:
            StoreError: The folder cannot be made.
        """
        self._files, root = fsspec.core.url_to_fs(url)
        self._root = PurePosixPath(root)
        self._is_folder = url.startswith("file:")
        if self._is_folder:
            with _told("the folder of files cannot be made"):
                self._files.makedirs(str(self._root), exist_ok=True)

    def put(self, content: bytes) -> str:
        """Keep a file, and give its digest; one that is there already costs no writing."""
        digest = hashlib.sha256(content).hexdigest()
        path = self._path(digest)
        with _told("the file could not be kept"):
            if self._files.exists(path):
                return digest
            if not self._is_folder:
                self._files.pipe_file(path, content)  # S3 shows an object only when all of it is there
                return digest
            part = f"{path}.{secrets.token_hex(8)}.part"
            self._files.makedirs(str(PurePosixPath(path).parent), exist_ok=True)
            try:
                with self._files.open(part, "wb") as file:
                    file.write(content)
                    file.flush()
                    _to_disk(file)
                self._files.mv(part, path)
            except BaseException:
                if self._files.exists(part):
                    self._files.rm_file(part)
                raise
        return digest

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
        try:
            with _told("the file could not be read"):
                file = self._files.open(self._path(digest), "rb")
        except FileNotFoundError as fault:
            raise FileLostError(f"the file {digest} is not in the store of files; restore it from a backup") from fault
        return _pieces(file, start, end)

    def has(self, digest: str) -> bool:
        """Whether the file is there."""
        with _told("the store of files could not be asked"):
            return bool(self._files.exists(self._path(digest)))

    def remove(self, digest: str) -> None:
        """Let a file go; one that is not there is gone already."""
        with _told("the file could not be removed"):
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
        """Every file that is there, for a sweep of what nobody holds."""
        with _told("the store of files could not be listed"):
            for path in self._files.find(str(self._root)):
                name = PurePosixPath(path).name
                if not name.endswith(".part"):
                    yield name

    def _path(self, digest: str) -> str:
        return str(self._root / digest[:2] / digest)


def _pieces(file: Any, start: int, end: int | None) -> Iterator[bytes]:
    with file, _told("the file could not be read"):
        file.seek(start)
        left = None if end is None else end - start
        while left is None or left > 0:
            piece = file.read(CHUNK_BYTES if left is None else min(CHUNK_BYTES, left))
            if not piece:
                return
            left = None if left is None else left - len(piece)
            yield piece


def _to_disk(file: Any) -> None:
    # A file that the database names must outlive a loss of power, as the database's own rows do.
    os.fsync(file.fileno())


@contextmanager
def _told(what: str) -> Iterator[None]:
    """Faults of the store in our own words; a file that is not there is the caller's to tell."""
    try:
        yield
    except FileNotFoundError:
        raise
    except OSError as fault:
        if fault.errno in NO_ROOM:
            raise StoreFullError("there is no room left in the store of files") from fault
        raise StoreBusyError(f"{what}: {fault.strerror or fault}") from fault
