"""The child of a worker, `python -m service.background.child`: plans orders one after another, and may be killed.

It imports the computation once and serves many orders. It is told digests, reads and keeps files, and answers with
a plan: it changes no order, that is its worker's to do. It ends when its worker does.

Memory is limited by RLIMIT_AS (setrlimit(2)), set anew before each order to what the process has plus what one
plan may take: the kernel itself keeps to it, so that no burst between two looks can fill the machine, and what is
refused is a MemoryError here, which can be told, and not a process that is suddenly gone. What a process reserves
is never less than what it uses, so the limit is on the safe side.
"""

import ctypes
import gc
import importlib
import logging
import os
import resource
import signal
import sys
import traceback
from typing import BinaryIO

from layout.errors import LayoutError
from service.background.frames import read_frame, write_frame
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
from service.orders.planned import OrderInputs
from service.orders.planning import plan_order
from service.planner import AnyPlanner
from service.store.faults import StoreError
from service.store.files import FileLostError, FileStore
from service.store.holds import FileKeeper
from service.store.store import Store

PR_SET_PDEATHSIG = 1  # linux/prctl.h
MIB = 1024 * 1024
SIZE_FIELD, RESIDENT_FIELD = 0, 1  # of /proc/self/statm, in pages: proc(5)


def main() -> int:
    """Serve orders until the worker has gone."""
    orders, answers = _own_pipes()
    for number in (signal.SIGINT, signal.SIGTERM):
        signal.signal(number, signal.SIG_IGN)  # sent to a whole group of processes: the worker decides what ends when
    told = read_frame(orders)
    if told is None:
        return 0
    setup = setup_from_json(told)
    _die_with(setup.parent_pid)
    logging.getLogger("ezdxf").setLevel(logging.CRITICAL)  # its remarks about a damaged file; ours is the reason
    planner: AnyPlanner = importlib.import_module(setup.planner)
    keeper = FileKeeper(Store(setup.database_url), FileStore(setup.files_url))
    gc.freeze()  # what is imported stays: looking for garbage among it takes a fifth of the time of a layout
    write_frame(answers, answer_as_json(ChildAnswer(kind=Kind.WARM, resident_mib=_resident_mib())))
    while (text := read_frame(orders)) is not None:
        answer = _within_memory(request_from_json(text), setup, planner, keeper)
        write_frame(answers, answer_as_json(answer))
    return 0


def _own_pipes() -> tuple[BinaryIO, BinaryIO]:
    """The pipes of the worker, under numbers of their own: what a library prints goes where errors go."""
    orders = os.fdopen(os.dup(0), "rb")
    answers = os.fdopen(os.dup(1), "wb")
    nothing = os.open(os.devnull, os.O_RDONLY)
    os.dup2(nothing, 0)
    os.close(nothing)
    os.dup2(2, 1)
    return orders, answers


def _die_with(parent_pid: int) -> None:
    # The signal comes when the thread ends that started this process; a worker's slot lives as long as its child.
    ctypes.CDLL(None, use_errno=True).prctl(PR_SET_PDEATHSIG, signal.SIGKILL, 0, 0, 0)
    if os.getppid() != parent_pid:
        sys.exit(0)  # it went before the line above


def _within_memory(request: PlanRequest, setup: ChildSetup, planner: AnyPlanner, keeper: FileKeeper) -> ChildAnswer:
    usual, most = resource.getrlimit(resource.RLIMIT_AS)
    wanted = _pages_bytes(SIZE_FIELD) + setup.memory_mib * MIB
    resource.setrlimit(resource.RLIMIT_AS, (wanted if most == resource.RLIM_INFINITY else min(wanted, most), most))
    try:
        answer = _planned(request, planner, keeper)
    except MemoryError:
        answer = None
    finally:
        resource.setrlimit(resource.RLIMIT_AS, (usual, most))
    if answer is None:
        reason = (
            f"planning needs more than {setup.memory_mib} MiB of memory; shorten the tune or split it over discs, "
            "or ask the shop to raise DISCWRIGHT_PLAN_MEMORY_MIB"
        )
        answer = ChildAnswer(kind=Kind.REFUSED, reason=reason, resident_mib=_resident_mib())
    return answer


def _planned(request: PlanRequest, planner: AnyPlanner, keeper: FileKeeper) -> ChildAnswer:
    refusal = act_out(request)
    if refusal is not None:
        return ChildAnswer(kind=Kind.REFUSED, reason=refusal, resident_mib=_resident_mib())
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
        return ChildAnswer(kind=Kind.REFUSED, reason=str(fault), resident_mib=_resident_mib())
    except StoreError as fault:
        return ChildAnswer(kind=Kind.AWAY, reason=str(fault), resident_mib=_resident_mib())
    except MemoryError:
        raise
    except Exception as fault:  # noqa: BLE001 -- told to the worker, which logs it under the order's id
        reason = (
            f"planning met a fault of the program itself ({type(fault).__name__}), logged under this order's id; "
            "tell the shop, and order again when it is mended"
        )
        trace = traceback.format_exc()
        return ChildAnswer(kind=Kind.REFUSED, reason=reason, trace=trace, resident_mib=_resident_mib())
    return ChildAnswer(kind=Kind.PLANNED, planned=planned, resident_mib=_resident_mib(), took_s=watch.took_s)


def _resident_mib() -> float:
    return _pages_bytes(RESIDENT_FIELD) / MIB


def _pages_bytes(which: int) -> int:
    with open("/proc/self/statm", encoding="ascii") as file:
        return int(file.read().split()[which]) * resource.getpagesize()


if __name__ == "__main__":
    sys.exit(main())
