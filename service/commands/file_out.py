"""One file that a command writes piece by piece, whole or not at all."""

import contextlib
import os
import secrets
from collections.abc import Callable
from pathlib import Path
from typing import BinaryIO

from service.commands.errors import CommandError


def write_file(path: Path, write: Callable[[BinaryIO], None]) -> None:
    """Write a file beside its name, then rename it; a file that stands there stays until then.

    Args:
        path: Its folder is made where it does not exist.
        write: Gives the content.

    Raises:
        CommandError: It cannot be written; says why.
    """
    part = path.with_name(f".discwright-{secrets.token_hex(8)}")
    try:
        if path.is_dir():
            raise CommandError(f"{str(path)!r} is a folder; --out names a file")
        path.parent.mkdir(parents=True, exist_ok=True)
        with part.open("xb") as file:
            write(file)
        os.replace(part, path)
    except (OSError, ValueError) as refusal:  # ValueError: a null character in the path
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise CommandError(f"cannot write to {str(path)!r}: {why}") from refusal
    finally:
        with contextlib.suppress(OSError, ValueError):
            part.unlink(missing_ok=True)
