"""Tries mutants of geometry, checks and arranging: python -m tests.mutants [EACH [MODULES...]], in its own environment.

mutmut makes the mutants and finds which tests reach them. Trying all of them takes most of a day, so of each module
EACH are tried, chosen by a seed. What came of each is kept in mutants/tried.jsonl: a run that is cut off goes on from
there, and the next run tries again what lived.
"""

import json
import sys
from collections.abc import Iterator
from dataclasses import asdict, replace
from pathlib import Path

from mutmut.__main__ import (
    collect_or_load_stats,
    copy_also_copy_files,
    copy_src_dir,
    create_mutants,
    get_mutant_runner,
    setup_source_paths,
)
from mutmut.mutation.trampoline import set_mutant_under_test
from mutmut.runners.harness import PytestRunner

from tests.mutants.sample import digest_of, in_turns, modules_under, mutants_of, sample
from tests.mutants.trying import Tried, see_that_tests_pass, tried
from tests.mutants.type_errors import caught_by_types

KEPT = Path("mutants/tried.jsonl")
EACH = 30
AT_ONCE = 3  # of a module, before the next module's turn
LEAST_CAUGHT = 0.85
SEEN_TO_PASS_EVERY = 25  # mutants: the tests of one are run without it too
NOT_YET = "well typed"
ALIVE = ("survived", "not reached")


def main(arguments: list[str]) -> int:
    """Makes, tries and tells: 0 where enough of them were caught."""
    each = int(arguments[0]) if arguments else EACH
    sampled = sample_made(modules_under(arguments[1:]), each)
    known = kept(sampled)
    with KEPT.open("a") as file:
        for outcome in outcomes(sampled, known):
            known[outcome.name] = outcome
            file.write(json.dumps(asdict(outcome)) + "\n")
            file.flush()
    return tell(sampled, known)


def sample_made(modules: list[Path], each: int) -> dict[Path, list[str]]:
    """Makes the mutants of all modules, where they are not made yet, and chooses of these."""
    set_mutant_under_test("mutant_generation")
    Path("mutants").mkdir(exist_ok=True)
    copy_src_dir()
    copy_also_copy_files()
    setup_source_paths()
    create_mutants(1)
    return sample(modules, each)


def kept(sampled: dict[Path, list[str]]) -> dict[str, Tried]:
    """What came of these mutants before, of modules as they are now; those that lived are to be tried again."""
    of_name = {name: digest_of(module) for module, names in sampled.items() for name in names}
    lines = KEPT.read_text().splitlines() if KEPT.exists() else []
    before = [one for one in (Tried(**json.loads(line)) for line in lines) if of_name.get(one.name) == one.made_of]
    return {one.name: replace(one, outcome=NOT_YET) if one.outcome in ALIVE else one for one in before}


def outcomes(sampled: dict[Path, list[str]], known: dict[str, Tried]) -> Iterator[Tried]:
    """What comes of each mutant that is not known yet, as it comes."""
    fresh = {module: [name for name in names if name not in known] for module, names in sampled.items()}
    caught = caught_by_types(fresh) if any(fresh.values()) else set()
    digests = {name: digest_of(module) for module, names in sampled.items() for name in names}
    for name in in_turns(fresh, AT_ONCE):
        yield Tried(name=name, made_of=digests[name], outcome="types" if name in caught else NOT_YET)
    collect_or_load_stats(get_mutant_runner(1))
    set_mutant_under_test("")
    runner = PytestRunner()
    to_try = [name for name in in_turns(sampled, AT_ONCE) if known[name].outcome == NOT_YET]
    for place, name in enumerate(to_try):
        if place % SEEN_TO_PASS_EVERY == 0:
            see_that_tests_pass(name, runner)
        yield tried(known[name], runner)


def tell(sampled: dict[Path, list[str]], known: dict[str, Tried]) -> int:
    """Prints what came of each module's mutants, the survivors by name, and whether enough were caught."""
    told = [f"{'module':40} {'made':>6} {'tried':>6} {'caught':>7} {'left':>5}"]
    left: list[Tried] = []
    caught = 0
    for module, names in sampled.items():
        came = [known[name] for name in names if name in known and known[name].outcome != NOT_YET]
        alive = [one for one in came if one.outcome in ALIVE]
        left += alive
        caught += len(came) - len(alive)
        made = len(mutants_of(module))
        told.append(f"{module!s:40} {made:6} {len(came):6} {len(came) - len(alive):7} {len(alive):5}")
    for one in left:
        slower = f", {one.tests_left_out} slower tests not run" if one.tests_left_out else ""
        told.append(f"{one.outcome}: {one.name}{slower}")
    share = caught / max(caught + len(left), 1)
    told.append(f"caught {caught} of {caught + len(left)}: {share:.1%}; at least {LEAST_CAUGHT:.0%} are asked for")
    sys.stdout.write("\n".join(told) + "\n")
    return 0 if share >= LEAST_CAUGHT else 1


sys.exit(main(sys.argv[1:]))
