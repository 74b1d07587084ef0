"""A planner in this process that is used in turn: its walks are the long computations of a request."""

from contextlib import nullcontext

from service.api.computing_queue import ComputingQueue
from service.planner import AnyPlanner, PlannerAround


def in_turn(planner: AnyPlanner, queue: ComputingQueue) -> PlannerAround:
    """A planner that lays out and makes files when it is one's turn; what needs no plan is told at once.

    Waiting takes nothing of the time of a search.

    Args:
        planner: Computes.
        queue: Where turns are waited for.
    """
    return PlannerAround(planner, lambda part: nullcontext() if part == "telling" else queue.admitted())
