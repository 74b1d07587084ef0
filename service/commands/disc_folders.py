"""The folders of a set of discs: DIR for one, DIR/1, DIR/2, … for several; and those that an earlier run left."""

import json
from pathlib import Path
from typing import Any

from layout.documents.settings import MOST_DISCS


def disc_folders(out: Path, disc_count: int) -> list[Path]:
    """The folder of each disc, in order.

    Args:
        out: The folder asked for.
        disc_count: How many discs there are.
    """
    return [out] if disc_count == 1 else [out / str(number) for number in range(1, disc_count + 1)]


def earlier_folders(out: Path, disc_count: int) -> list[Path]:
    """Folders in which an earlier run with another number of discs left what this one does not replace.

    A folder counts only where its layout.json says that it is that disc of a set, or the one disc in
    `out`; anything else there is someone's own.

    Args:
        out: The folder asked for.
        disc_count: How many discs there are now.
    """
    now = set(disc_folders(out, disc_count))
    alone = [out] if out not in now and _disc_in(out) == (1, 1) else []
    of_sets = [
        folder
        for number, folder in enumerate(disc_folders(out, MOST_DISCS), start=1)
        if folder not in now and _is_of_a_set(_disc_in(folder), number)
    ]
    return alone + of_sets


def _is_of_a_set(disc: tuple[Any, Any] | None, number: int) -> bool:
    return disc is not None and disc[0] == number and disc[1] != 1


def _disc_in(folder: Path) -> tuple[Any, Any] | None:
    """The number of the disc whose layout stands in a folder, and of how many; None where none can be read."""
    try:
        disc = json.loads((folder / "layout.json").read_bytes()).get("disc", {})
        return disc.get("number", 1), disc.get("of", 1)
    except (OSError, ValueError, AttributeError, RecursionError):
        return None
