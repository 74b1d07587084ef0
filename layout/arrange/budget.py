"""What a search may spend: counts of its work, so that answers do not depend on the machine, and time as a last resort.

Nodes and states are what programs take. Looks are all the rest: posing, rows, loads, fitting, nudging,
and what a program takes before its first node. One is about a microsecond of one core of a desk computer,
so what each kind of work takes in looks was measured; it need not be exact, only never far too little.
"""

from collections.abc import Callable
from functools import cached_property
from typing import Literal

# Over everything searched for one tune. Real pieces take up to 250,000 states and 700 nodes; these
# let the worst go on for some tens of seconds.
MOST_NODES = 4_000  # nodes of integer programs, as layout.arrange.integer_program counts them
MOST_STATES = 400_000  # states of dynamic programs
MOST_LOOKS = 20_000_000  # real pieces proved in some seconds take one to two millions

# Beside these, for what must be known before there is any answer: whether the rulings can be followed.
MOST_NODES_FOR_RULINGS = 2_000  # nodes
MOST_LOOKS_FOR_RULINGS = 10_000_000
MOST_S_FOR_RULINGS = 15.0  # seconds after the time limit, where there is one

# Looks that each kind of work takes.
LOOKS_TO_POSE = 6  # by spot: to pose a problem and take it apart
LOOKS_TO_NARROW = 120  # by pluck of a part too crowded for all its states
LOOKS_TO_BEGIN = 3_000  # by program, whatever its size
LOOKS_TO_WRITE = 3  # by entry of a program's rows, and by spot lifted at a moment while they are sought
LOOKS_TO_FIT = 60  # by pluck put down by hand
ENTRIES_A_LOOK = 100  # loads of one spot at moments, worked out in one go
LOOKS_TO_TRY = 60  # by pluck that must sound, to see whether some of them have room
LOOKS_TO_PLAY = 200  # by pluck nudged to its moment
LOOKS_TO_JUDGE = 5  # by pluck held against every rule


class Budget:
    """Nodes, states, looks and seconds left; one for a whole search, spent as it goes."""

    def __init__(
        self,
        *,
        nodes: int = MOST_NODES,
        states: int = MOST_STATES,
        looks: int = MOST_LOOKS,
        time_limit_s: float | None = None,
        clock: Callable[[], float] | None = None,
    ) -> None:
        self._nodes = nodes
        self.nodes_left = nodes
        self.states_left = states
        self.looks_left = looks
        self.looks_spent = 0  # what was taken when none were left counted in
        self._clock = clock
        self._ends_s = None if time_limit_s is None or clock is None else clock() + time_limit_s

    def spend(self, nodes: int) -> None:
        """Take nodes off."""
        self.nodes_left = max(self.nodes_left - nodes, 0)

    def spend_states(self, states: int) -> None:
        """Take states off."""
        self.states_left = max(self.states_left - states, 0)

    def spend_looks(self, looks: int) -> None:
        """Take looks off."""
        self.looks_left = max(self.looks_left - looks, 0)
        self.looks_spent += looks

    @cached_property
    def for_rulings(self) -> "Budget":
        """What a whole search may spend on finding out whether rulings can be followed, when its own is spent too."""
        left_s = self.seconds_left()
        return Budget(
            nodes=MOST_NODES_FOR_RULINGS,
            looks=MOST_LOOKS_FOR_RULINGS,
            time_limit_s=None if left_s is None else left_s + MOST_S_FOR_RULINGS,
            clock=self._clock,
        )

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
        return "nodes" if 0 in (self.nodes_left, self.states_left, self.looks_left) else None

    @property
    def spent(self) -> bool:
        """Whether nothing is left."""
        return self.stopped is not None
