"""Rules between the fields of one part, as a JSON Schema can say them.

Each stands beside the check of the same rule, for who has the schema alone; rules that need sums or other parts do not.
"""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

Schema = Mapping[str, Any]
LEFT_OUT: Schema = MappingProxyType({"const": None})
EMPTY: Schema = MappingProxyType({"maxItems": 0})
NO: Schema = MappingProxyType({"const": False})
STATED: Schema = MappingProxyType({"not": {"type": "null"}})


def where(field: str, value: str, fields: Mapping[str, Schema]) -> dict[str, Any]:
    """What fields must be where another has a value (JSON Schema 2020-12, section 10.2.2).

    Args:
        field: Whose value decides.
        value: The value; a field that is left out has none.
        fields: What each must be; those that must be `STATED` are needed.
    """
    return {"if": {"properties": {field: {"const": value}}, "required": [field]}, "then": _said(fields)}


def beside(
    field: str, fields: Mapping[str, Schema], *, otherwise: Mapping[str, Schema] | None = None
) -> dict[str, Any]:
    """What fields must be where another is stated, and what where it is not."""
    made = {"if": {"properties": {field: dict(STATED)}, "required": [field]}, "then": _said(fields)}
    return made if otherwise is None else {**made, "else": _said(otherwise)}


def only_where(field: str, value: str, other: str) -> dict[str, Any]:
    """That another field is stated where one has a value, and left out everywhere else."""
    return {**where(field, value, {other: STATED}), "else": {"properties": {other: dict(LEFT_OUT)}}}


def _said(fields: Mapping[str, Schema]) -> dict[str, Any]:
    needed = [name for name, said in fields.items() if said is STATED]
    said = {"properties": {name: dict(said) for name, said in fields.items()}}
    return {**said, "required": needed} if needed else said
