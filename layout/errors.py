"""The one tree of exceptions: raised where the work cannot go on.

    LayoutError
    ├── MidiReadError      the tune is not a Standard MIDI File we can read
    ├── DocumentError      a movement, cutter or settings document is not valid
    │   └── RulingError    the settings' rulings contradict each other or the comb
    ├── NotShippedError    no shipped document has that id
    └── DrawingReadError   a drawing cannot be read back into a disc

What is wrong with a disc that could be made is not an exception but a Finding.
"""

from dataclasses import dataclass


class LayoutError(Exception):
    """Root of every error the computation raises; its text is fit to show to a user."""


class MidiReadError(LayoutError):
    """The tune cannot be read as a Standard MIDI File.

    Attributes:
        byte_offset: Where in the file it went wrong, counted from 0.
        found: What stands there.
        expected: What was allowed there.
        remedy: What the user can do next.
    """

    def __init__(self, *, byte_offset: int, found: str, expected: str, remedy: str) -> None:
        self.byte_offset = byte_offset
        self.found = found
        self.expected = expected
        self.remedy = remedy
        super().__init__(f"tune, byte {byte_offset}: found {found}, expected {expected}; {remedy}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """One fault in a document: where (RFC 6901 JSON pointer) and what."""

    pointer: str
    message: str


class DocumentError(LayoutError):
    """A movement, cutter or settings document is not valid.

    Attributes:
        document: Which document, e.g. "movement".
        problems: Every fault found, in document order; never empty.
    """

    def __init__(self, *, document: str, problems: tuple[Problem, ...]) -> None:
        self.document = document
        self.problems = problems
        lines = "; ".join(f"{p.pointer or '(whole document)'}: {p.message}" for p in problems)
        super().__init__(f"{document}: {lines}")


class RulingError(DocumentError):
    """Rulings that contradict each other, the tune or the comb."""


class NotShippedError(LayoutError):
    """No shipped document has the id asked for.

    Attributes:
        document: "movement" or "cutter".
        document_id: The id asked for.
        known_ids: The ids that exist.
    """

    def __init__(self, *, document: str, document_id: str, known_ids: tuple[str, ...]) -> None:
        self.document = document
        self.document_id = document_id
        self.known_ids = known_ids
        super().__init__(f"no {document} has the id {document_id!r}; known: {', '.join(known_ids)}")


class DrawingReadError(LayoutError):
    """A drawing's bytes cannot be read back into a disc."""
