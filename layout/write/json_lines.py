"""How JSON files are written: one field to a line, and one entry of a list to a line."""

import json
from collections.abc import Iterator
from typing import Any

_WRITER = json.JSONEncoder(ensure_ascii=False, allow_nan=False)  # json.dumps makes one for every line


def json_lines(record: dict[str, Any]) -> bytes:
    """The record as UTF-8 JSON, its fields in their order.

    Args:
        record: Its lists may also be iterators, so that the entries of a long one are not all there at once.

    Raises:
        ValueError: A number is not finite: a fault of the program, never of an input.
    """
    lines = ",\n".join(f"{_json(name)}: {_value(value)}" for name, value in record.items())
    # JSON writes half a surrogate pair as \udXXX, which is also what this error handler writes.
    return f"{{\n{lines}\n}}\n".encode("utf-8", errors="backslashreplace")


def _value(value: Any) -> str:
    if isinstance(value, list | Iterator):
        entries = ",\n".join(map(_json, value))
        return f"[\n{entries}\n]" if entries else "[]"
    return _json(value)


def _json(value: Any) -> str:
    return _WRITER.encode(value)
