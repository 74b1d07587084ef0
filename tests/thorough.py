"""How much is tried: TESTS=thorough in the environment asks for the long tests, TESTS=mutants for few examples.

What is tried by default is a small part of the same; each place says which. Mutants are tried with the same few
examples each, so that a mutant caught once is always caught.
"""

import os
from collections.abc import Iterable, Mapping
from typing import Any

import pytest

from layout.documents import Cutter, Movement

THOROUGH = os.environ.get("TESTS") == "thorough"
MUTANTS = os.environ.get("TESTS") == "mutants"


def tried(examples: int) -> int:
    """How many examples of so many hypothesis tries by default: a third, and ten at least; ten on mutants."""
    if MUTANTS:
        return min(examples, 10)
    return examples if THOROUGH else min(examples, max(examples // 3, 10))


def pairs_of(movements: Iterable[Movement], cutters: Mapping[str, Cutter]) -> list[Any]:
    """What a test is given of movements and cutters: every pair, or by default a third, each of both among them."""
    return [
        pytest.param(movement, cutter, id=f"{name}-{movement.id}")
        for row, (name, cutter) in enumerate(cutters.items())
        for place, movement in enumerate(movements)
        if THOROUGH or (row + place) % 3 == 0
    ]
