"""Errors of the computation as plain values, to be told by one process and raised in another."""

from dataclasses import asdict
from typing import Any

from layout.errors import DocumentError, LayoutError, MidiReadError, Problem, RulingError

_OF_DOCUMENTS = {one.__name__: one for one in (DocumentError, RulingError)}


def told_of_error(error: LayoutError) -> dict[str, Any]:
    """An error as plain values; of a kind that no layout leads to its text alone."""
    match error:
        case MidiReadError():
            fields = ("byte_offset", "found", "expected", "remedy")
            return {"type": "MidiReadError", **{name: getattr(error, name) for name in fields}}
        case DocumentError():
            problems = [asdict(problem) for problem in error.problems]
            return {"type": type(error).__name__, "document": error.document, "problems": problems}
    return {"type": "LayoutError", "text": str(error)}


def error_from_told(told: dict[str, Any]) -> LayoutError:
    """The error that `told_of_error` told."""
    kind, fields = told["type"], {name: value for name, value in told.items() if name != "type"}
    if kind == "MidiReadError":
        return MidiReadError(**fields)
    if kind in _OF_DOCUMENTS:
        problems = tuple(Problem(**problem) for problem in fields["problems"])
        return _OF_DOCUMENTS[kind](document=fields["document"], problems=problems)
    return LayoutError(fields["text"])
