"""What a search may spend: nodes, so that answers do not depend on the machine, and time as a last resort."""

from collections.abc import Callable
from typing import Literal

# Over everything searched for one tune. Real pieces take up to 250,000 states and 700 nodes; these
# let the worst go on for some tens of seconds.
MOST_NODES = 4_000  # nodes of integer programs, as layout.arrange.integer_program counts them
MOST_STATES = 400_000  # states of dynamic programs


class Budget:
    """Nodes, states and seconds left; one for a whole search, spent as it goes."""

    def __init__(
        self,
        *,
        nodes: int = MOST_NODES,
        states: int = MOST_STATES,
        time_limit_s: float | None = None,
        clock: Callable[[], float] | None = None,
    ) -> None:
        self._nodes = nodes
        self.nodes_left = nodes
        self.states_left = states
        self._clock = clock
        self._ends_s = None if time_limit_s is None or clock is None else clock() + time_limit_s

    def spend(self, nodes: int) -> None:
        """Take nodes off."""
        self.nodes_left = max(self.nodes_left - nodes, 0)

    def spend_states(self, states: int) -> None:
        """Take states off."""
        self.states_left = max(self.states_left - states, 0)

    @property
    def nodes_spent(self) -> int:
        """Nodes taken off so far."""
        return self._nodes - self.nodes_left

    def seconds_left(self) -> float | None:
        """Seconds until the time limit, not below 0; None without one."""
        if self._ends_s is None or self._clock is None:
            return None
        return max(self._ends_s - self._clock(), 0.0)

    @property
    def stopped(self) -> Literal["nodes", "time"] | None:
        """What has run out, if anything; time first, since such an answer is not the same again."""
        if self.seconds_left() == 0.0:
            return "time"
        return "nodes" if self.nodes_left == 0 or self.states_left == 0 else None

    @property
    def spent(self) -> bool:
        """Whether nothing is left."""
        return self.stopped is not None
