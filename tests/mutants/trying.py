"""Runs the tests that reach a mutant, each mutant in a process of its own, until one fails."""

import os
import resource
from dataclasses import dataclass, replace
from signal import SIGKILL, SIGXCPU
from time import process_time

from mutmut.mutation.trampoline import set_mutant_under_test
from mutmut.runners.harness import BadTestExecutionCommandsException, PytestRunner
from mutmut.state import state
from mutmut.utils.format_utils import mangled_name_from_mutant_name

TESTS_S = 8.0  # of the tests that reach a mutant the quickest, up to so much time in all
PATIENCE = 2.0  # a mutant that takes so many times longer than its tests did hangs
STARTING_S = 10.0
MEMORY_BYTES = 4 << 30

FAILED, INTERRUPTED, INTERNAL = 1, 2, 3  # how pytest ends
NOTHING_SAID = 70  # pytest did not come to an end of its own


@dataclass(frozen=True, slots=True, kw_only=True)
class Tried:
    """What came of one mutant."""

    name: str
    made_of: str  # digest of the module it is a mutant of
    outcome: str  # types, well typed (and not tried yet), killed, timeout, survived, not reached
    tests_left_out: int = 0


def tests_of(mutant: str) -> tuple[list[str], int]:
    """The tests that reach a mutant, the quickest first, and how many slower ones are left out."""
    duration = state().duration_by_test
    reaching = sorted(
        state().tests_by_mangled_function_name.get(mangled_name_from_mutant_name(mutant), set()),
        key=lambda test: (duration[test], test),
    )
    chosen: list[str] = []
    spent_s = 0.0
    for test in reaching:
        spent_s += duration[test]
        if chosen and spent_s > TESTS_S:
            break
        chosen.append(test)
    return chosen, len(reaching) - len(chosen)


def tried(mutant: Tried, runner: PytestRunner) -> Tried:
    """Runs a mutant's tests in a child: killed by the first that fails, or by time, or it survives."""
    tests, left_out = tests_of(mutant.name)
    if not tests:
        return replace(mutant, outcome="not reached")
    return replace(mutant, outcome=outcome_in_child(mutant.name, tests, runner), tests_left_out=left_out)


def see_that_tests_pass(mutant: str, runner: PytestRunner) -> None:
    """Runs the tests that reach a mutant without it, as they run with it: if these fail, no failure says anything.

    Raises:
        RuntimeError: They fail.
    """
    tests, _ = tests_of(mutant)
    if tests and outcome_in_child("", tests, runner) != "survived":
        raise RuntimeError(f"the tests that reach {mutant} fail without it: {tests}")


def outcome_in_child(mutant: str, tests: list[str], runner: PytestRunner) -> str:
    child = os.fork()
    if child == 0:
        code = NOTHING_SAID
        try:
            code = run_in_child(mutant, tests, runner)
        finally:
            os._exit(code)
    _, status = os.waitpid(child, 0)
    return outcome_of(os.waitstatus_to_exitcode(status))


def run_in_child(mutant: str, tests: list[str], runner: PytestRunner) -> int:
    limit_s = int(process_time() + STARTING_S + PATIENCE * sum(state().duration_by_test[test] for test in tests))
    resource.setrlimit(resource.RLIMIT_CPU, (limit_s, limit_s + 1))
    resource.setrlimit(resource.RLIMIT_AS, (MEMORY_BYTES, MEMORY_BYTES))
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, 1)
    os.dup2(nowhere, 2)
    set_mutant_under_test(mutant)
    try:
        return runner.run_tests(mutant_name=mutant, tests=tests)
    except BadTestExecutionCommandsException:
        # A case is named after what comes out otherwise: all cases of these tests are run, whatever their names.
        return runner.run_tests(mutant_name=mutant, tests=sorted({test.partition("[")[0] for test in tests}))


def outcome_of(exit_code: int) -> str:
    """What an end of pytest says of a mutant.

    Raises:
        RuntimeError: It ended in a way that says nothing: the tests could not be run.
    """
    if exit_code == 0:
        return "survived"
    if exit_code in (FAILED, INTERRUPTED, INTERNAL):
        return "killed"
    if exit_code in (-SIGXCPU, -SIGKILL):
        return "timeout"
    if exit_code < 0:
        return "killed"  # a library crashed on what it was given
    raise RuntimeError(f"pytest ended with {exit_code}: the tests of this mutant could not be run")
