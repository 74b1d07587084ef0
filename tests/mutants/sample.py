"""Which mutants are tried: of each module a few, chosen by a seed that is the module's own name."""

from collections.abc import Iterator
from hashlib import sha256
from itertools import zip_longest
from pathlib import Path
from random import Random

from mutmut.mutation.data import SourceFileMutationData
from mutmut.utils.file_utils import walk_mutatable_files


def mutants_of(module: Path) -> list[str]:
    """The names of all mutants that were made of a module, in the order of its lines."""
    made = SourceFileMutationData(path=module)
    made.load()
    return list(made.exit_code_by_key)


def sample(modules: list[Path], each: int) -> dict[Path, list[str]]:
    """Of each module so many mutants, or all where it has fewer. More of them begin with the same."""
    return {
        module: Random(str(module)).sample(mutants := mutants_of(module), len(mutants))[:each] for module in modules
    }


def in_turns(sampled: dict[Path, list[str]], at_once: int) -> Iterator[str]:
    """So many of each module in turn, so that a run that is cut off has tried all modules alike."""
    of_modules = [
        [mutants[first : first + at_once] for first in range(0, len(mutants), at_once)] for mutants in sampled.values()
    ]
    for of_round in zip_longest(*of_modules, fillvalue=[]):
        for mutants in of_round:
            yield from mutants


def modules_under(names: list[str]) -> list[Path]:
    """The modules that are mutated, geometry first: all of them, or those whose path begins with one of the names."""
    order = ("layout/mechanics", "layout/check", "layout/arrange")
    modules = sorted(walk_mutatable_files(), key=lambda path: (order.index(str(path.parent)), path.name))
    return [path for path in modules if not names or any(str(path).startswith(name) for name in names)]


def digest_of(module: Path) -> str:
    """A short digest of a module as it stands: another one, and its mutants are others."""
    return sha256(module.read_bytes()).hexdigest()[:12]
