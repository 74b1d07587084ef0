"""Whether the long tests are asked for: TESTS=thorough in the environment.

What is tried by default is a small part of the same; each place says which.
"""

import os

THOROUGH = os.environ.get("TESTS") == "thorough"


def tried(examples: int) -> int:
    """How many examples of so many hypothesis tries by default: a third, and ten at least."""
    return examples if THOROUGH else min(examples, max(examples // 3, 10))
