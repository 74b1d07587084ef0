"""From a fault of an order or of the store to the problem that tells it."""

import logging

from service.api.problems import ProblemError
from service.limits import Limits
from service.orders.faults import (
    ChangedMeanwhileError,
    FindingsStandError,
    InputRefusedError,
    NotPricedError,
    OrderFault,
    OrderUnknownError,
    StateForbidsError,
)
from service.store.faults import StoreError, StoreFullError
from service.wording import shortened

log = logging.getLogger("discwright")

RETRY_AFTER_S = 5  # s; a database that was started anew answers by then
ROOM_AFTER_S = 300  # s; people make room

_NAMES: dict[type[OrderFault], str] = {
    OrderUnknownError: "order-unknown",
    StateForbidsError: "state-forbids",
    FindingsStandError: "findings-stand",
    ChangedMeanwhileError: "order-changed",
    NotPricedError: "not-priced",
}


def problem_of_order(fault: OrderFault, limits: Limits) -> ProblemError:
    """The problem that tells why something cannot be done with an order."""
    if isinstance(fault, InputRefusedError):
        detail = shortened(str(fault), limits.shown_characters)
        told = [{"pointer": fault.pointer, "detail": detail}]
        return ProblemError(
            name="document-invalid",
            detail=f"order, {fault.pointer}: {detail}",
            more={"document": "order", "invalid_params": told, "problem_count": 1},
        )
    return ProblemError(name=_NAMES[type(fault)], detail=str(fault))


def problem_of_store(fault: StoreError) -> ProblemError:
    """The problem that tells that nothing could be kept or found."""
    log.warning("%s", fault)
    is_full = isinstance(fault, StoreFullError)
    return ProblemError(
        name="store-full" if is_full else "store-busy",
        detail=str(fault),
        headers={"Retry-After": str(ROOM_AFTER_S if is_full else RETRY_AFTER_S)},
    )
