"""The service's parts, opened for a command on its own machine."""

import os
from collections.abc import Iterator
from contextlib import contextmanager

from service.commands.errors import CommandError
from service.parts import Parts, open_parts
from service.settings import SettingsError, settings_from
from service.store.faults import StoreError


@contextmanager
def parts_opened() -> Iterator[Parts]:
    """The parts that the environment names, closed at the end.

    Raises:
        CommandError: They cannot be opened, or fail while they are used.
    """
    try:
        parts = open_parts(settings_from(os.environ))
    except (SettingsError, StoreError) as fault:
        raise CommandError(str(fault)) from fault
    try:
        yield parts
    except StoreError as fault:
        raise CommandError(str(fault)) from fault
    finally:
        parts.store.close()
