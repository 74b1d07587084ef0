"""Texts told to a person, kept short whatever was sent."""

from layout.errors import DocumentError


def shortened(text: str, most_characters: int) -> str:
    """The text in one line, cut off with an ellipsis where it is longer than allowed."""
    line = " ".join(text.split())
    return line if len(line) <= most_characters else line[: most_characters - 1] + "…"


def told_in_short(error: DocumentError, most_characters: int) -> str:
    """The first fault of a document and how many more there are, in one line.

    Args:
        error: What is wrong with the document.
        most_characters: How much is told of the fault and of its place.
    """
    first, *others = error.problems
    place = shortened(first.pointer or "(whole document)", most_characters)
    more = f"; and {len(others)} more" if others else ""
    return f"{error.document}: {place}: {shortened(first.message, most_characters)}{more}"
