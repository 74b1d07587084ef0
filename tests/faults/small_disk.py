"""A disk so small that it can be filled: a tmpfs(5), where the tests may mount one."""

import contextlib
import errno
import subprocess
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

CHUNK_BYTES = 64 * 1024


@contextmanager
def small_disk(mib: int) -> Iterator[Path]:
    """Mount one on a folder of its own; a test that may not is left out."""
    # Among the temporary files of all: a database server runs as another user than root, who may not enter root's own.
    folder = Path(tempfile.mkdtemp(prefix="discwright-small-disk-"))
    asked = ["mount", "-t", "tmpfs", "-o", f"size={mib}m,mode=755", "tmpfs", str(folder)]
    try:
        _mount(asked)
        try:
            yield folder
        finally:
            subprocess.run(["umount", "--lazy", str(folder)], check=True)
    finally:
        folder.rmdir()


def _mount(asked: list[str]) -> None:
    try:
        mounted = subprocess.run(asked, capture_output=True, text=True, check=False)
    except FileNotFoundError:
        pytest.skip("there is no command to mount a tmpfs with")
    if mounted.returncode:
        pytest.skip(f"no tmpfs may be mounted here: {mounted.stderr.strip()}")


@contextmanager
def filled(disk: Path) -> Iterator[None]:
    """Fill a disk to its last byte, and make room again at the end."""
    path = disk / "filler"
    with path.open("wb", buffering=0) as file:
        for size in (CHUNK_BYTES, 4096, 1):
            with contextlib.suppress(_NoRoom), _told_apart():
                while True:
                    file.write(bytes(size))
    try:
        yield
    finally:
        path.unlink()


class _NoRoom(Exception):
    """The disk is full."""


@contextmanager
def _told_apart() -> Iterator[None]:
    try:
        yield
    except OSError as fault:
        if fault.errno != errno.ENOSPC:
            raise
        raise _NoRoom from fault
