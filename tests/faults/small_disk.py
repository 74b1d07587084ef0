"""A disk so small that it can be filled: a tmpfs(5), where the tests may mount one."""

import contextlib
import errno
import subprocess
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

CHUNK_BYTES = 64 * 1024


@contextmanager
def small_disk(folder: Path, mib: int) -> Iterator[Path]:
    """Mount one on a folder that is made for it; a test that may not is left out."""
    folder.mkdir(parents=True)
    asked = ["mount", "-t", "tmpfs", "-o", f"size={mib}m,mode=700", "tmpfs", str(folder)]
    try:
        mounted = subprocess.run(asked, capture_output=True, text=True, check=False)
    except FileNotFoundError:
        pytest.skip("there is no command to mount a tmpfs with")
    if mounted.returncode:
        pytest.skip(f"no tmpfs may be mounted here: {mounted.stderr.strip()}")
    try:
        yield folder
    finally:
        subprocess.run(["umount", "--lazy", str(folder)], check=True)


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
