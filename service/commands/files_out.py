"""A folder that gets the files of a layout, each whole or not at all."""

import contextlib
import os
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path

from layout.walk import CUTTING_FILES
from service.commands.errors import CommandError


def write_files(folder: Path, files: Mapping[str, bytes]) -> tuple[str, ...]:
    """Write the files of a layout into a folder, made where it does not exist; files of other names stay.

    Everything is written in a folder inside first, on the same disk, then renamed. Cutting files of an
    earlier layout go first and new ones come last: whenever it is interrupted, no cutting file stands
    beside files of another layout.

    Args:
        folder: Where to.
        files: By name.

    Returns:
        The cutting files of an earlier layout that were removed and not replaced.

    Raises:
        CommandError: Something cannot be written; says what. A folder made for it is removed again.
    """
    made = _make(folder)
    ready = None
    try:
        for name in {*files, *CUTTING_FILES}:
            if (folder / name).is_dir():
                raise CommandError(f"{str(folder / name)!r} is a folder; remove it or choose another --out")
        ready = Path(tempfile.mkdtemp(prefix=".discwright-", dir=folder))
        for name, content in files.items():
            (ready / name).write_bytes(content)
        stale = [name for name in CUTTING_FILES if (folder / name).exists()]
        for name in stale:
            (folder / name).unlink()
        for name in sorted(files, key=lambda name: name in CUTTING_FILES):
            os.replace(ready / name, folder / name)
    except OSError as refusal:
        raise CommandError(f"cannot write to {str(folder)!r}: {refusal.strerror or refusal}") from refusal
    finally:
        if ready is not None:
            shutil.rmtree(ready, ignore_errors=True)
        _remove_empty(made)
    return tuple(name for name in stale if name not in files)


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
