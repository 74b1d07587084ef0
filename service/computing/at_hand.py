"""Discs laid out last, kept as they were found, so that what is asked of them next need not be searched for again."""

from collections.abc import Sequence
from itertools import accumulate, islice
from typing import Generic, TypeVar

AT_HAND_DISCS = 16  # discs, or the last set alone where it has more; one takes 200 kB to 700 kB of memory, measured

DiscT = TypeVar("DiscT")


class SetsAtHand(Generic[DiscT]):
    """The sets of discs laid out last, each under a name. Of two threads that add at a time one may be forgotten."""

    def __init__(self) -> None:
        """Hold none yet."""
        self._sets: tuple[tuple[str, tuple[DiscT, ...]], ...] = ()

    def add(self, name: str, discs: Sequence[DiscT]) -> None:
        """Hold another set, and let those go for which there is no room any more, the oldest first."""
        before = self._sets
        counts = accumulate(len(one) for one in (discs, *(of_set for _, of_set in before)))
        fitting = [one for one, count in zip(before, islice(counts, 1, None), strict=True) if count <= AT_HAND_DISCS]
        self._sets = ((name, tuple(discs)), *fitting)

    def called(self, name: str) -> tuple[DiscT, ...]:
        """The set last added under a name; empty where it is held no more."""
        return next((discs for held, discs in self._sets if held == name), ())

    @property
    def sets(self) -> tuple[tuple[DiscT, ...], ...]:
        """All sets, the last first."""
        return tuple(discs for _, discs in self._sets)
