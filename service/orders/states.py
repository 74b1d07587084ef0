"""The states of an order, and what may follow what.

    received → planning → ready → released → received (replanned: the released plan is superseded)
               planning → released (asked for beforehand, and nothing stands; or despite findings, with a reason)
               planning → attention → released, or → received (replanned, or to be made despite findings)
               planning → failed → received (replanned)
               planning → received (handed back by a worker that stops, or taken from one that never came back)
    received → released (a repeat: the stored files again)
    any → cancelled; released → cancelled only where the shop confirms the recall

Clients ignore states they do not know: more may come.
"""

from enum import StrEnum


class State(StrEnum):
    """Where an order stands."""

    RECEIVED = "received"  # kept, waits for a worker
    PLANNING = "planning"  # a worker holds it
    ATTENTION = "attention"  # a person must decide
    READY = "ready"  # nothing stands; waits for release
    RELEASED = "released"  # its cutting files may be taken
    FAILED = "failed"  # it cannot be planned; its reason says why
    CANCELLED = "cancelled"


MAY_FOLLOW: dict[State, frozenset[State]] = {
    State.RECEIVED: frozenset({State.PLANNING, State.RELEASED, State.FAILED, State.CANCELLED}),
    State.PLANNING: frozenset(
        {State.RECEIVED, State.ATTENTION, State.READY, State.RELEASED, State.FAILED, State.CANCELLED}
    ),
    State.ATTENTION: frozenset({State.RECEIVED, State.RELEASED, State.CANCELLED}),
    State.READY: frozenset({State.RECEIVED, State.RELEASED, State.CANCELLED}),
    State.RELEASED: frozenset({State.RECEIVED, State.CANCELLED}),
    State.FAILED: frozenset({State.RECEIVED, State.CANCELLED}),
    State.CANCELLED: frozenset(),
}
OPEN = frozenset({State.RECEIVED, State.PLANNING, State.ATTENTION, State.READY})  # something is still to come
FINISHED = frozenset(State) - OPEN


class EventType(StrEnum):
    """What can happen to an order: the types of events, and of messages to hooks. More may come."""

    RECEIVED = "order.received"
    PLANNED = "order.planned"  # a plan was made; data says which state it led to
    ATTENTION = "order.attention"
    READY = "order.ready"
    RELEASED = "order.released"
    FAILED = "order.failed"
    CANCELLED = "order.cancelled"
    SUPERSEDED = "order.superseded"  # the released plan is not the one to cut any more
    ACCEPTED = "order.accepted"  # by the customer, on a proof
    DECLINED = "order.declined"
    TAKEN = "order.taken"  # the shop has taken the files
    CUT = "order.cut"
    SCRAPPED = "order.scrapped"
    MEASURED = "order.measured"
    ERASED = "order.erased"
