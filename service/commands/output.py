"""What a command writes on its standard output."""

import json
import sys
from collections.abc import Iterable
from typing import Any


def say(lines: Iterable[str]) -> None:
    """Write lines for a person."""
    sys.stdout.write("".join(f"{line}\n" for line in lines))


def say_json(value: Any) -> None:
    """Write a value for a program: JSON in ASCII, whatever letters the terminal knows."""
    sys.stdout.write(json.dumps(value, indent=2, allow_nan=False) + "\n")


def aligned(rows: Iterable[tuple[str, ...]]) -> list[str]:
    """Rows of a table as lines, each column as wide as its widest cell."""
    listed = list(rows)
    widths = [max(map(len, column)) for column in zip(*listed, strict=True)]
    return ["  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in listed]
