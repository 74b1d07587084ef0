"""What the service can be set to, by variables of its environment."""

import os
import tempfile
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path

from service.limits import Limits

MOST_DIGITS = 18  # digits; a number of bytes that still fits eight of them


class SettingsError(Exception):
    """The environment asks for something the service cannot do; the text is one line fit to show."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ServiceSettings:
    """The service's settings.

    Attributes:
        cache_directory: Where layouts are kept for their links; all workers share it.
        limits: What the service takes, keeps and tells at most.
    """

    cache_directory: Path
    limits: Limits = field(default_factory=Limits)


def settings_from(environment: Mapping[str, str]) -> ServiceSettings:
    """The settings that environment variables ask for.

    Args:
        environment: Read are DISCWRIGHT_CACHE (a folder that all workers share; by default one of this
            user's in the system's folder for temporary files), DISCWRIGHT_CACHE_LAYOUTS and
            DISCWRIGHT_CACHE_BYTES (whole numbers from 1).

    Raises:
        SettingsError: A number is none; names the variable and what it may be.
    """
    asked = {
        name: _whole_number(environment, variable)
        for name, variable in (
            ("cache_layouts", "DISCWRIGHT_CACHE_LAYOUTS"),
            ("cache_bytes", "DISCWRIGHT_CACHE_BYTES"),
        )
        if environment.get(variable)
    }
    folder = environment.get("DISCWRIGHT_CACHE")
    return ServiceSettings(
        cache_directory=Path(folder) if folder else _own_temporary_folder(),
        limits=replace(Limits(), **asked),
    )


def _own_temporary_folder() -> Path:
    # One folder per user, the same for every worker: a layout made by one must be found by the others.
    return Path(tempfile.gettempdir()) / f"discwright-layouts-{os.getuid()}"


def _whole_number(environment: Mapping[str, str], variable: str) -> int:
    text = environment[variable]
    if not (text.isascii() and text.isdigit() and len(text) <= MOST_DIGITS and int(text) > 0):
        raise SettingsError(f"{variable} is {text!r}; it must be a whole number from 1, e.g. {variable}=100")
    return int(text)
