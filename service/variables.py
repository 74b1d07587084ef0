"""How a setting is written: a field with its variable of the environment, what it means, and how its text is read."""

import ipaddress
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING, Any, TypeVar
from urllib.parse import urlsplit

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

MOST_DIGITS = 18  # digits; a number of bytes that still fits eight of them
YES_OR_NO = {"yes": True, "no": False}

Settings = TypeVar("Settings", bound="DataclassInstance")
Network = ipaddress.IPv4Network | ipaddress.IPv6Network


class SettingsError(Exception):
    """The environment asks for something the service cannot do; the text is one line fit to show."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Variable:
    """A variable of the environment, as a user is told of it.

    Attributes:
        name: Of the variable.
        meaning: What it sets, with its unit.
        default: What holds where it is not set, as text.
        is_secret: Whether its value is shown to nobody.
    """

    name: str
    meaning: str
    default: str
    is_secret: bool


def variable(
    name: str, read: Callable[[str], Any], meaning: str, *, default: Any, shown: str = "", is_secret: bool = False
) -> Any:
    """A dataclass field that is read from a variable; typed Any as `dataclasses.field` is.

    Args:
        name: Of the variable.
        read: Makes the value of the text; raises ValueError with what is allowed.
        meaning: What it sets, with its unit.
        default: The value where the variable is not set or empty.
        shown: The default as it is told, where its value says little.
        is_secret: Whether its value is shown to nobody.
    """
    told = Variable(name=name, meaning=meaning, default=shown or _shown(default), is_secret=is_secret)
    return field(default=default, metadata={"variable": told, "read": read})


def read_variables(kind: type[Settings], environment: Mapping[str, str]) -> dict[str, Any]:
    """The values of a dataclass's fields that the environment sets.

    Raises:
        SettingsError: A text is none of what its variable allows; names the variable.
    """
    read: dict[str, Any] = {}
    for one in fields(kind):
        told: Variable | None = one.metadata.get("variable")
        text = environment.get(told.name) if told else None
        if told is None or not text:
            continue
        try:
            read[one.name] = one.metadata["read"](text)
        except ValueError as fault:
            seen = "what it is set to" if told.is_secret else repr(text)
            raise SettingsError(f"{told.name} is {seen}; it must be {fault}") from fault
    return read


def variables_of(kind: type["DataclassInstance"]) -> tuple[Variable, ...]:
    """The variables of a dataclass, in the order of its fields."""
    return tuple(one.metadata["variable"] for one in fields(kind) if "variable" in one.metadata)


def whole_number(least: int, most: int | None = None) -> Callable[[str], int]:
    """Reads a whole number from `least` to `most`."""

    def read(text: str) -> int:
        digits = text.isascii() and text.isdigit() and len(text) <= MOST_DIGITS
        if not digits or int(text) < least or (most is not None and int(text) > most):
            raise ValueError(f"a whole number from {least}" + ("" if most is None else f" to {most}"))
        return int(text)

    return read


def yes_or_no(text: str) -> bool:
    """Reads yes or no."""
    if text not in YES_OR_NO:
        raise ValueError("yes or no")
    return YES_OR_NO[text]


def words(*allowed: str) -> Callable[[str], str]:
    """Reads one of some words."""

    def read(text: str) -> str:
        if text not in allowed:
            raise ValueError(f"one of {', '.join(allowed)}")
        return text

    return read


def plain_text(text: str) -> str:
    """Takes a text as it is."""
    return text


def url_of(*schemes: str) -> Callable[[str], str]:
    """Reads a URL of one of some schemes."""

    def read(text: str) -> str:
        try:
            scheme = urlsplit(text).scheme
        except ValueError:
            scheme = ""
        if scheme not in schemes:
            raise ValueError(f"a URL that begins with {' or '.join(f'{scheme}://' for scheme in schemes)}")
        return text

    return read


def networks(text: str) -> tuple[Network, ...]:
    """Reads networks as 10.1.2.0/24, with commas between."""
    try:
        return tuple(ipaddress.ip_network(one.strip()) for one in text.split(","))
    except ValueError as fault:
        raise ValueError("networks such as 10.1.2.0/24, with commas between") from fault


def rate(text: str) -> tuple[int, int]:
    """Reads a rate such as 600/60: so many requests in so many seconds."""
    found = re.fullmatch(r"([1-9]\d{0,8})/([1-9]\d{0,5})", text)
    if found is None:
        raise ValueError("requests and seconds such as 600/60")
    return int(found[1]), int(found[2])


def _shown(default: Any) -> str:
    if default is None or default == ():
        return "not set"
    if isinstance(default, bool):
        return "yes" if default else "no"
    if isinstance(default, tuple):
        return "/".join(map(str, default))
    return str(default)
