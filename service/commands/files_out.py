"""Folders that get the files of a command, each whole or not at all: one way for all commands."""

import contextlib
import fcntl
import os
import re
import shutil
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from service.commands.errors import CommandError

INSIDE = ".discwright-half-written-"  # begins the name of a folder in which files are written before they are moved out
_IS_INSIDE = re.compile(rf"{re.escape(INSIDE)}[a-z0-9_]{{8}}")  # with what `mkdtemp` adds to it


@dataclass(frozen=True, slots=True, kw_only=True)
class _Inside:
    """A folder inside another, and the lock on it, which ends with the process that holds it."""

    path: Path
    lock: int

    def remove(self) -> None:
        shutil.rmtree(self.path, ignore_errors=True)
        os.close(self.lock)


def write_folders(
    folders: Mapping[Path, Mapping[str, bytes]], *, cutting: Sequence[str]
) -> dict[Path, tuple[str, ...]]:
    """Write the files that belong together, each into its folder; files of other names stay.

    Folders are made where they do not exist. Everything is written in a folder inside each first, on the
    same disk, then renamed. Cutting files of an earlier run go first and new ones come last: whenever it is
    interrupted, no cutting file stands beside files of another run, nor beside another set's. What one that was
    killed left half-written inside goes when its folder is written to again.

    Args:
        folders: The files by name, by their folder. A folder without files is not made, and only its cutting
            files are removed.
        cutting: The names of this command's cutting files; those of other commands stay as other files do.

    Returns:
        By folder, the cutting files of an earlier run that were removed and not replaced.

    Raises:
        CommandError: Something cannot be written; says what. Folders made for it are removed again.
    """
    made: list[Path] = []
    ready: dict[Path, _Inside] = {}
    try:
        for folder, files in folders.items():
            _check_free(folder, {*files, *cutting})
            made += _make(folder) if files else []
        for folder, files in folders.items():
            if files:
                ready[folder] = _written_inside(folder, files)
        stale = {folder: _without(folder, cutting) for folder in folders}
        for last in (False, True):
            for folder, inside in ready.items():
                _move_out(inside.path, folder, [name for name in folders[folder] if (name in cutting) == last])
    except OSError as refusal:
        where = ", ".join(repr(str(folder)) for folder in folders)
        raise CommandError(f"cannot write to {where}: {refusal.strerror or refusal}") from refusal
    finally:
        for inside in ready.values():
            inside.remove()
        _remove_empty(made)
    return {folder: tuple(name for name in stale[folder] if name not in files) for folder, files in folders.items()}


def _check_free(folder: Path, names: set[str]) -> None:
    for name in sorted(names):
        if (folder / name).is_dir():
            raise CommandError(f"{str(folder / name)!r} is a folder; remove it or choose another --out")


def _written_inside(folder: Path, files: Mapping[str, bytes]) -> _Inside:
    """The files in a new folder inside this one; gone again where it cannot be."""
    inside = _new_inside(folder)
    try:
        for name, content in files.items():
            (inside.path / name).write_bytes(content)
    except BaseException:
        inside.remove()
        raise
    return inside


def _new_inside(folder: Path) -> _Inside:
    """A new folder inside this one, held; what was left there before is cleared away.

    One at a time, by a lock on the folder round it: a new folder that is not held yet is not taken for a left one.
    """
    outer = os.open(folder, os.O_RDONLY)
    try:
        with contextlib.suppress(OSError):  # a disk that knows no locks, where nothing is cleared away either
            fcntl.flock(outer, fcntl.LOCK_EX)
        _clear_abandoned(folder)
        path = Path(tempfile.mkdtemp(prefix=INSIDE, dir=folder))
        try:
            lock = os.open(path, os.O_RDONLY)
        except OSError:
            path.rmdir()
            raise
        with contextlib.suppress(OSError):
            fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
        return _Inside(path=path, lock=lock)
    finally:
        os.close(outer)


def _clear_abandoned(folder: Path) -> None:
    """Remove what runs that were killed left inside a folder: of our own names, what no process holds the lock of."""
    for path in [path for path in folder.iterdir() if _IS_INSIDE.fullmatch(path.name)]:
        with contextlib.suppress(OSError):  # held, no folder, or gone by now
            lock = os.open(path, os.O_RDONLY)
            try:
                fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
                shutil.rmtree(path)
            finally:
                os.close(lock)


def _without(folder: Path, cutting: Sequence[str]) -> list[str]:
    stale = [name for name in cutting if (folder / name).exists()]
    for name in stale:
        (folder / name).unlink()
    return stale


def _move_out(inside: Path, folder: Path, names: list[str]) -> None:
    for name in names:
        os.replace(inside / name, folder / name)


def _make(folder: Path) -> list[Path]:
    """Make a folder and those above it; gives the ones that did not exist, outermost first."""
    missing: list[Path] = []
    try:
        missing = [path for path in (folder, *folder.parents) if not path.exists()][::-1]
        folder.mkdir(parents=True, exist_ok=True)
    except FileExistsError as refusal:
        raise CommandError(f"{str(folder)!r} is a file; --out names a folder") from refusal
    except (OSError, ValueError) as refusal:  # ValueError: a null character in the path
        _remove_empty(missing)
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise CommandError(f"the folder {str(folder)!r} cannot be made: {why}") from refusal
    return missing


def _remove_empty(folders: list[Path]) -> None:
    for folder in reversed(folders):
        with contextlib.suppress(OSError, ValueError):  # not there, or not empty; ValueError: a null character
            folder.rmdir()
