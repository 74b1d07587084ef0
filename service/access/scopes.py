"""What a key may do."""

from collections.abc import Iterable
from enum import StrEnum


class Scope(StrEnum):
    """One thing that a key may be allowed; the values stand in the database and in answers."""

    READ = "read"
    ORDER = "order"
    RELEASE = "release"
    MOVEMENTS = "movements"
    ADMIN = "admin"


# What each allows, as a person who makes a key is told.
MEANINGS = {
    Scope.READ: "see orders, their files, movements and cutters",
    Scope.ORDER: "plan tunes, ask for quotes, place orders and runs, cancel orders",
    Scope.RELEASE: "release orders for cutting, also despite findings, with a reason",
    Scope.MOVEMENTS: "store and revise movements and cutters",
    Scope.ADMIN: "make, list and revoke keys; delete and export data",
}


class ScopeError(ValueError):
    """A word is no scope; the text names it and those there are."""


def scopes_of(words: Iterable[str]) -> frozenset[Scope]:
    """The scopes that words name; none for no words.

    Raises:
        ScopeError: A word is no scope.
    """
    found = set()
    for word in words:
        try:
            found.add(Scope(word))
        except ValueError as fault:
            raise ScopeError(f"{word!r} is no scope; scopes are {', '.join(Scope)}") from fault
    return frozenset(found)


def in_order(scopes: Iterable[Scope]) -> tuple[Scope, ...]:
    """Scopes in the order in which they are always told."""
    wanted = frozenset(scopes)
    return tuple(scope for scope in Scope if scope in wanted)
