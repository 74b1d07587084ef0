"""Every word of the pages, by key, from one file for each language; English is the only one there is."""

import json
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from types import MappingProxyType

SCRIPTS = "script."  # texts that begin so are handed to the pages' scripts


@cache
def texts() -> Mapping[str, str]:
    """The texts by key; every key is `part.name`, the parts being the pages' own."""
    text = files("service.pages").joinpath("texts_en.json").read_text(encoding="utf-8")
    return MappingProxyType(_flat(json.loads(text)))


def text_of(key: str, **values: object) -> str:
    """One text, its `{names}` filled in.

    Raises:
        KeyError: There is no such text, or a value is missing.
    """
    return texts()[key].format_map(values)


def for_scripts(parts: tuple[str, ...]) -> dict[str, str]:
    """The texts that the scripts of a page show: those of `script.common` and of the parts named.

    Args:
        parts: Such as ("disc",) for all of `script.disc`.
    """
    begins = tuple(f"{SCRIPTS}{part}." for part in ("common", *parts))
    return {key.removeprefix(SCRIPTS): text for key, text in texts().items() if key.startswith(begins)}


def _flat(tree: Mapping[str, object], before: str = "") -> dict[str, str]:
    found: dict[str, str] = {}
    for name, value in tree.items():
        if isinstance(value, Mapping):
            found |= _flat(value, f"{before}{name}.")
        else:
            found[before + name] = str(value)
    return found
