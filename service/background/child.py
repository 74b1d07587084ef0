"""The child of a worker, `python -m service.background.child`: plans orders one after another, and may be killed.

It imports the computation once and serves many orders. It is told digests, reads and keeps files, and answers with
a plan: it changes no order, that is its worker's to do. It ends when its worker does.
"""

import ctypes
import gc
import importlib
import os
import signal
import sys
import traceback
from contextlib import suppress

from layout.errors import LayoutError
from service.background.messages import (
    ChildAnswer,
    ChildSetup,
    Kind,
    PlanRequest,
    answer_as_json,
    request_from_json,
    setup_from_json,
)
from service.background.stage_watch import StageWatch, TimedKeeper, TimedPlanner
from service.background.test_deeds import act_out
from service.children.frames import read_frame, write_frame
from service.children.inside import own_pipes, resident_mib, within_memory
from service.orders.planned import OrderInputs
from service.orders.planning import plan_order
from service.planner import AnyPlanner
from service.store.faults import StoreError
from service.store.files import FileLostError, FileStore
from service.store.holds import FileKeeper
from service.store.store import Store

PR_SET_PDEATHSIG = 1  # linux/prctl.h
GIVING_WAY = 15  # of nice(2): an order waits, and a person who looks at a layout does not


def main() -> int:
    """Serve orders until the worker has gone."""
    orders, answers = own_pipes()
    os.nice(GIVING_WAY)
    told = read_frame(orders)
    if told is None:
        return 0
    setup = setup_from_json(told)
    _die_with(setup.parent_pid)
    planner: AnyPlanner = importlib.import_module(setup.planner)
    keeper = FileKeeper(Store(setup.database_url), FileStore(setup.files_url))
    gc.freeze()  # what is imported stays: looking for garbage among it takes a fifth of the time of a layout
    write_frame(answers, answer_as_json(ChildAnswer(kind=Kind.WARM, resident_mib=resident_mib())))
    while (text := read_frame(orders)) is not None:
        answer = _within_memory(request_from_json(text), setup, planner, keeper)
        write_frame(answers, answer_as_json(answer))
    return 0


def _die_with(parent_pid: int) -> None:
    # The signal comes when the thread ends that started this process; a worker's slot lives as long as its child.
    ctypes.CDLL(None, use_errno=True).prctl(PR_SET_PDEATHSIG, signal.SIGKILL, 0, 0, 0)
    if os.getppid() != parent_pid:
        sys.exit(0)  # it went before the line above


def _within_memory(request: PlanRequest, setup: ChildSetup, planner: AnyPlanner, keeper: FileKeeper) -> ChildAnswer:
    with suppress(MemoryError), within_memory(setup.memory_mib):
        return _planned(request, planner, keeper)
    reason = (
        f"planning needs more than {setup.memory_mib} MiB of memory; shorten the tune or split it over discs, "
        "or ask the shop to raise DISCWRIGHT_PLAN_MEMORY_MIB"
    )
    return ChildAnswer(kind=Kind.REFUSED, reason=reason, resident_mib=resident_mib())


def _planned(request: PlanRequest, planner: AnyPlanner, keeper: FileKeeper) -> ChildAnswer:
    refusal = act_out(request)
    if refusal is not None:
        return ChildAnswer(kind=Kind.REFUSED, reason=refusal, resident_mib=resident_mib())
    watch = StageWatch()
    try:
        with watch.timing("reading"):
            inputs = OrderInputs(
                tune=keeper.read(request.tune),
                movement=keeper.read(request.movement),
                cutter=keeper.read(request.cutter),
                settings=keeper.read(request.settings),
                not_good=request.not_good,
            )
        planned = plan_order(inputs, TimedPlanner(planner, watch), TimedKeeper(keeper, watch))
    except (LayoutError, FileLostError) as fault:
        return ChildAnswer(kind=Kind.REFUSED, reason=str(fault), resident_mib=resident_mib())
    except StoreError as fault:
        return ChildAnswer(kind=Kind.AWAY, reason=str(fault), resident_mib=resident_mib())
    except MemoryError:
        raise
    except Exception as fault:  # noqa: BLE001 -- told to the worker, which logs it under the order's id
        reason = (
            f"planning met a fault of the program itself ({type(fault).__name__}), logged under this order's id; "
            "tell the shop, and order again when it is mended"
        )
        trace = traceback.format_exc()
        return ChildAnswer(kind=Kind.REFUSED, reason=reason, trace=trace, resident_mib=resident_mib())
    return ChildAnswer(kind=Kind.PLANNED, planned=planned, resident_mib=resident_mib(), took_s=watch.took_s)


if __name__ == "__main__":
    sys.exit(main())
