"""A planner in this process that is used in turn: its walks are the long computations of a request."""

from typing import Any

from layout.documents import Cutter, Movement, Settings
from service.api.computing_queue import ComputingQueue
from service.planner import AnyPlanner, CheckedDrawing, Clock


class InTurn:
    """Computes as another planner does, when it is one's turn."""

    def __init__(self, planner: AnyPlanner, queue: ComputingQueue) -> None:
        """Take turns.

        Args:
            planner: Computes.
            queue: Where turns are waited for.
        """
        self._planner = planner
        self._queue = queue

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[Any, ...]:
        """As the planner does."""
        with self._queue.admitted():  # waiting takes nothing of the time of the search
            discs: tuple[Any, ...] = self._planner.lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)
        return discs

    def fingerprint_of(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1
    ) -> str:
        """As the planner does, at once."""
        return self._planner.fingerprint_of(tune, movement, cutter, settings, number)

    def files_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the planner does."""
        with self._queue.admitted():
            return self._planner.files_of(laid_out, not_good=not_good)

    def told_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the planner does, at once: it takes little."""
        return self._planner.told_of(laid_out, not_good=not_good)

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """As the planner does."""
        with self._queue.admitted():
            return self._planner.check_drawing(dxf, movement, cutter)
