"""What a child does for the test tunes that cannot lead to their state by themselves."""

import os
import signal
import time

from service.background.messages import PlanRequest
from service.orders.test_tunes import REFUSAL, SLOW_S, Deed, deed_of


def act_out(request: PlanRequest) -> str | None:
    """Do what the tune of a test key's order asks for; nothing for any other order.

    Returns:
        Why the order is refused; None where it is to be planned.
    """
    deed = deed_of(request.tune) if request.is_test else Deed.NOTHING
    if deed is Deed.DIE:
        os.kill(os.getpid(), signal.SIGKILL)
    if deed is Deed.WAIT:
        time.sleep(SLOW_S)
    return REFUSAL if deed is Deed.REFUSE else None
