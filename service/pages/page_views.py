"""How a view says that it gives a page for people: it stands in no API document, and its errors are pages too."""

from collections.abc import Callable
from typing import Any, TypeVar

View = TypeVar("View", bound=Callable[..., Any])


def gives_page(view: View) -> View:
    """Say that a view gives a page, or what a page loads."""
    view.gives_page = True  # type: ignore[attr-defined]  # functions take attributes
    return view


def is_page(view: Callable[..., Any]) -> bool:
    """Whether a view gives a page."""
    return getattr(view, "gives_page", False) is True
