"""A worker's side of its child: starts it, and gives it one order after another."""

import sys
from collections.abc import Callable

from service.background.messages import ChildAnswer, ChildSetup, PlanRequest, answer_from_json, as_json
from service.children.child_process import WARM_WITHIN_S, ChildProcess, always

CHILD = (sys.executable, "-m", "service.background.child")


class PlanningChild:
    """A child that plans. Started and used by one thread, with whose end it ends too."""

    def __init__(self, setup: ChildSetup, is_wanted: Callable[[], bool] = always) -> None:
        """Start a child, and wait until it is warm.

        Args:
            setup: What it is told.
            is_wanted: Asked now and then; where it says no, the child is killed.

        Raises:
            ChildEndedError: It ended before.
            ChildTooLongError: It did not get ready.
            ChildUnwantedError: It was not wanted any more.
        """
        self._process = ChildProcess(CHILD)
        self._most_mib = setup.memory_mib / 2
        warm = answer_from_json(self._process.ask(as_json(setup), WARM_WITHIN_S, is_wanted))
        self._warm_mib = self._resident_mib = warm.resident_mib

    @property
    def pid(self) -> int:
        """Of its process."""
        return self._process.pid

    @property
    def has_grown(self) -> bool:
        """Whether it holds half of what one plan may take more than when it was warm, and should be replaced."""
        return self._resident_mib - self._warm_mib > self._most_mib

    def plan(self, request: PlanRequest, within_s: float, is_wanted: Callable[[], bool]) -> ChildAnswer:
        """Plan an order. After any of the errors the child is gone.

        Args:
            request: The order.
            within_s: Seconds that it may take.
            is_wanted: Asked now and then; where it says no, the child is killed.

        Raises:
            ChildEndedError: It ended without an answer.
            ChildTooLongError: It took too long.
            ChildUnwantedError: It was not wanted any more.
        """
        answer = answer_from_json(self._process.ask(as_json(request), within_s, is_wanted))
        self._resident_mib = answer.resident_mib
        return answer

    def end(self) -> None:
        """Kill it, if it lives, and let its pipes go."""
        self._process.end()
