"""Whether this process is about to stop: requests that only wait, and streams, then end early."""

from collections.abc import Callable

from flask import Flask, current_app

STOPPING = "discwright stopping"


def tell_stopping(app: Flask, stopping: Callable[[], bool]) -> None:
    """Let an app know when its process stops.

    Args:
        app: The app.
        stopping: Says whether it does, at any moment.
    """
    app.extensions[STOPPING] = stopping


def stopping() -> Callable[[], bool]:
    """What says whether the process of the request at hand stops; asked also after the request's context has ended."""
    asked: Callable[[], bool] = current_app.extensions.get(STOPPING, lambda: False)
    return asked
