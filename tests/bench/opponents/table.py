"""Tables on standard output."""

import sys
from collections.abc import Sequence


def say(text: str = "") -> None:
    sys.stdout.write(text + "\n")
    sys.stdout.flush()


def say_table(heads: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Columns as wide as their widest cell, the first to the left and the others to the right."""
    widths = [max(len(row[column]) for row in (heads, *rows)) for column in range(len(heads))]
    for row in (heads, ["-" * width for width in widths], *rows):
        first, *others = (
            cell.rjust(width) if column else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(row, widths, strict=True))
        )
        say("  ".join([first, *others]).rstrip())
    say()
