"""A computing child, `python -m service.computing.child`: lays tunes out one after another, and may be killed.

It imports the computation once. It knows no database and no store: all it works on comes through its pipe. It ends
when its parent does, even within a computation, for a thread of its own waits for the end of the pipe; where a library
holds the interpreter meanwhile, as soon as that returns.
"""

import gc
import importlib
import os
import threading
import time
import traceback
from contextlib import suppress
from dataclasses import replace
from queue import SimpleQueue
from typing import Any, BinaryIO

from layout.errors import LayoutError
from service.children.frames import BrokenFrameError, read_frame, write_frame
from service.children.inside import own_pipes, resident_mib, within_memory
from service.computing.at_hand import SetsAtHand
from service.computing.messages import (
    Answer,
    Asked,
    DiscTold,
    Kind,
    Want,
    Work,
    answer_as_bytes,
    asked_from_bytes,
    setup_from_bytes,
)
from service.planner import AnyPlanner

# Of nice(2): before whoever computes, the processes of the web come that give what is at hand; where they want a whole
# processor, a tenth of it is left. Orders, which nobody waits for, give way further.
GIVING_WAY = 10


def main() -> None:
    """Serve until the parent has gone."""
    orders, answers = own_pipes()
    os.nice(GIVING_WAY)
    coming: SimpleQueue[bytes] = SimpleQueue()
    threading.Thread(target=_read_on, args=(orders, coming), daemon=True).start()
    setup = setup_from_bytes(coming.get())
    planner: AnyPlanner = importlib.import_module(setup.planner)  # a module with the functions of one
    at_hand: SetsAtHand[Any] = SetsAtHand()
    gc.collect()
    gc.freeze()  # what is imported stays: looking for garbage among it takes a fifth of the time of a layout
    write_frame(answers, answer_as_bytes(Answer(kind=Kind.WARM, resident_mib=resident_mib())))
    while True:
        message, answer = coming.get(), Answer(kind=Kind.TOO_LARGE)
        with suppress(MemoryError), within_memory(setup.memory_mib):
            answer = answer_of(message, planner, at_hand)
        write_frame(answers, answer_as_bytes(replace(answer, resident_mib=resident_mib())))


def _read_on(orders: BinaryIO, coming: "SimpleQueue[bytes]") -> None:
    with suppress(BrokenFrameError, OSError):
        while (message := read_frame(orders)) is not None:
            coming.put(message)
    os._exit(0)


def answer_of(message: bytes, planner: AnyPlanner, at_hand: SetsAtHand[Any]) -> Answer:
    """What is answered to what is asked; the discs are at hand from now on.

    Raises:
        MemoryError: It takes more than there is.
    """
    try:
        return _done(asked_from_bytes(message), planner, at_hand)
    except LayoutError as error:
        return Answer(kind=Kind.REFUSED, error=error)
    except MemoryError:
        raise
    except Exception:  # noqa: BLE001 -- told to the parent, which logs it under the request's id
        return Answer(kind=Kind.FAILED, trace=traceback.format_exc())


def _done(asked: Asked, planner: AnyPlanner, at_hand: SetsAtHand[Any]) -> Answer:
    held = at_hand.called(asked.name)
    laid_out = held or _laid_out(asked.work, planner)
    if not held:
        at_hand.add(asked.name, laid_out)
    if asked.want is Want.DISCS:
        return Answer(kind=Kind.DONE, discs=tuple(_told(one, planner) for one in laid_out))
    one = laid_out[asked.disc_number - 1]
    make = planner.files_of if asked.want is Want.FILES else planner.told_of
    files = make(one, not_good=asked.not_good)
    return Answer(kind=Kind.DONE, discs=() if held else (_told(one, planner),), files=files)


def _laid_out(work: Work, planner: AnyPlanner) -> tuple[Any, ...]:
    clock = time.monotonic if work.is_timed else None
    discs: tuple[Any, ...] = planner.lay_out_discs(
        work.tune, work.movement, work.cutter, work.settings, clock, most_s=work.most_s
    )
    return discs


def _told(laid_out: Any, planner: AnyPlanner) -> DiscTold:
    return DiscTold(
        title=laid_out.title,
        fingerprint=laid_out.fingerprint,
        disc_number=laid_out.disc_number,
        disc_count=laid_out.disc_count,
        good_to_cut=laid_out.good_to_cut,
        stopped=laid_out.stopped,
        told=planner.told_of(laid_out),
    )


if __name__ == "__main__":
    main()
