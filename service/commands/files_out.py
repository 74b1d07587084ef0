"""Folders that get the files of layouts, each whole or not at all."""

import contextlib
import os
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path

from layout.file_names import CUTTING_FILES
from service.commands.errors import CommandError


def write_folders(folders: Mapping[Path, Mapping[str, bytes]]) -> dict[Path, tuple[str, ...]]:
    """Write the files of layouts that belong together, each into its folder; files of other names stay.

    Folders are made where they do not exist. Everything is written in a folder inside each first, on the
    same disk, then renamed. Cutting files of earlier layouts go first and new ones come last: whenever it is
    interrupted, no cutting file stands beside files of another layout, nor beside another set's.

    Args:
        folders: The files by name, by their folder. A folder without files is not made, and only its cutting
            files are removed.

    Returns:
        By folder, the cutting files of an earlier layout that were removed and not replaced.

    Raises:
        CommandError: Something cannot be written; says what. Folders made for it are removed again.
    """
    made: list[Path] = []
    ready: dict[Path, Path] = {}
    try:
        for folder, files in folders.items():
            _check_free(folder, files)
            made += _make(folder) if files else []
        for folder, files in folders.items():
            if files:
                ready[folder] = _written_inside(folder, files)
        stale = {folder: _without_cutting_files(folder) for folder in folders}
        for cutting in (False, True):
            for folder, inside in ready.items():
                _move_out(inside, folder, [name for name in folders[folder] if (name in CUTTING_FILES) == cutting])
    except OSError as refusal:
        where = ", ".join(repr(str(folder)) for folder in folders)
        raise CommandError(f"cannot write to {where}: {refusal.strerror or refusal}") from refusal
    finally:
        for inside in ready.values():
            shutil.rmtree(inside, ignore_errors=True)
        _remove_empty(made)
    return {folder: tuple(name for name in stale[folder] if name not in files) for folder, files in folders.items()}


def _check_free(folder: Path, files: Mapping[str, bytes]) -> None:
    for name in sorted({*files, *CUTTING_FILES}):
        if (folder / name).is_dir():
            raise CommandError(f"{str(folder / name)!r} is a folder; remove it or choose another --out")


def _written_inside(folder: Path, files: Mapping[str, bytes]) -> Path:
    """The files in a new folder inside this one; gone again where it cannot be."""
    inside = Path(tempfile.mkdtemp(prefix=".discwright-", dir=folder))
    try:
        for name, content in files.items():
            (inside / name).write_bytes(content)
    except BaseException:
        shutil.rmtree(inside, ignore_errors=True)
        raise
    return inside


def _without_cutting_files(folder: Path) -> list[str]:
    stale = [name for name in CUTTING_FILES if (folder / name).exists()]
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
        with contextlib.suppress(OSError):  # it is not there, or something is in it
            folder.rmdir()
