"""How a table of limits is written: a frozen dataclass whose fields carry value, unit and reason."""

from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """A limit as it is shown to users."""

    name: str
    value: int
    unit: str
    reason: str


def limit(value: int, unit: str, reason: str) -> Any:
    """A dataclass field that is a limit; typed Any as `dataclasses.field` is, so that it can be an int."""
    return field(default=value, metadata={"unit": unit, "reason": reason})


def limits_told(table: "DataclassInstance", *, prefix: str = "") -> tuple[Limit, ...]:
    """Every limit of a table, in the order of its fields, under their names with a prefix."""
    return tuple(
        Limit(
            name=prefix + part.name,
            value=getattr(table, part.name),
            unit=part.metadata["unit"],
            reason=part.metadata["reason"],
        )
        for part in fields(table)
    )
