"""The load test's parts, one after the other on one service: capacity, a steady load below it, twice as much, after."""

import asyncio
import time
from collections.abc import Awaitable
from dataclasses import dataclass

from tests.load.asking import now_s
from tests.load.loops import Client, Told
from tests.load.mix import ORDER
from tests.load.serving import Service
from tests.load.watching import Held, held, machine_busy_s, memory_bytes, processes_of, processor_s

STEADY_SHARE = 0.8  # of the capacity
OVERLOAD = 2.0  # times the capacity
CLIENTS = (1, 2, 4, 8, 12, 16, 24, 32)  # fewer than the service lets wait, so that none is refused
RISES = 1.03  # times the best rate so far; less is no rise
ORDERS_AT_ONCE = 64  # twice the threads of both processes
PATIENCE = 2  # steps without a rise
MEMORY_EVERY_S = 5.0
QUIET_S = 3.0  # s; longer than a connection may linger
QUIET_SHARE = 0.1  # of a processor, taken by the service while it rests
QUIET_WITHIN_S = 180.0  # s; orders that were placed are planned first


@dataclass(frozen=True, slots=True, kw_only=True)
class Lengths:
    """How long each part takes, in seconds.

    Attributes:
        step_s: One number of clients.
        capacity_s: The best of these numbers, for the capacity.
        steady_s: The steady load.
        overload_s: Twice the capacity.
        after_s: The steady load once more.
    """

    step_s: float
    capacity_s: float
    steady_s: float
    overload_s: float
    after_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """One part.

    Attributes:
        told: What came of each request.
        wanted_per_s: Arrivals a second; 0 where clients waited for answers.
        took_s: From the first to the last.
        client_share: Of one processor, taken by the client.
        service_share: Of one processor, taken by the service.
        machine_share: Of one processor, taken by all that runs on the machine.
        memory_at_s: When memory was looked at.
        memory_bytes: What it was.
    """

    told: list[Told]
    wanted_per_s: float
    took_s: float
    client_share: float
    service_share: float
    machine_share: float
    memory_at_s: list[float]
    memory_bytes: list[int]

    @property
    def served_per_s(self) -> float:
        """Answers a second that were what was asked for."""
        return sum(not (one.fault or one.is_refused) for one in self.told) / self.took_s


@dataclass(frozen=True, slots=True, kw_only=True)
class Course:
    """All parts.

    Attributes:
        steps: The closed loops, by their numbers of clients.
        longest_step: The best of these numbers for longer.
        planned_after_s: How long afterwards its last orders were planned: answered at once, they are part of the work.
        before: What the service held before the open loops.
        steady: The steady load.
        overload: Twice the capacity.
        after: The steady load once more, from the moment the overload ended.
        rested: What it held at the end.
    """

    steps: dict[int, Measured]
    longest_step: Measured
    planned_after_s: float
    before: Held
    steady: Measured
    overload: Measured
    after: Measured
    rested: Held

    @property
    def capacity_per_s(self) -> float:
        """What is served a second, orders planned too, and no more than can go on."""
        return sustained_per_s(self.longest_step, self.planned_after_s)


async def run_course(service: Service, client: Client, lengths: Lengths) -> Course:
    """Go through all parts."""
    await warm_up(client, lengths.step_s)
    steps = await _steps(service, client, lengths.step_s)
    await rest(service)
    best = max(steps, key=lambda clients: steps[clients].served_per_s)
    longest_step = await measured(service, client.closed(best, lengths.capacity_s))
    planned_after_s = await rest(service)
    capacity_per_s = sustained_per_s(longest_step, planned_after_s)
    steady_per_s = STEADY_SHARE * capacity_per_s
    before = held(service.pid)
    steady = await measured(service, client.open(steady_per_s, lengths.steady_s), steady_per_s)
    await rest(service)
    much_per_s = OVERLOAD * capacity_per_s
    overload = await measured(service, client.open(much_per_s, lengths.overload_s), much_per_s)
    after = await measured(service, client.open(steady_per_s, lengths.after_s), steady_per_s)
    await rest(service)
    return Course(
        steps=steps,
        longest_step=longest_step,
        planned_after_s=planned_after_s,
        before=before,
        steady=steady,
        overload=overload,
        after=after,
        rested=held(service.pid),
    )


def sustained_per_s(part: Measured, planned_after_s: float) -> float:
    """The rate of a closed loop and of the work it left behind."""
    return part.served_per_s * part.took_s / (part.took_s + planned_after_s)


async def warm_up(client: Client, for_s: float) -> list[Told]:
    """Have all begun that begins at first use: imports, every thread, and the connections that it keeps."""
    told = await client.closed(CLIENTS[2], for_s)
    told += await client.all_at_once(ORDER, ORDERS_AT_ONCE)  # nothing opens more than an order
    return told + await client.closed(ORDERS_AT_ONCE, for_s)


async def _steps(service: Service, client: Client, step_s: float) -> dict[int, Measured]:
    """Rising numbers of clients until the rate no longer rises."""
    steps: dict[int, Measured] = {}
    best_per_s, without_rise = 0.0, 0
    for clients in CLIENTS:
        steps[clients] = step = await measured(service, client.closed(clients, step_s))
        without_rise = 0 if step.served_per_s > RISES * best_per_s else without_rise + 1
        best_per_s = max(best_per_s, step.served_per_s)
        if without_rise == PATIENCE:
            break
    return steps


async def measured(service: Service, asking: Awaitable[list[Told]], wanted_per_s: float = 0.0) -> Measured:
    """One part, and what it took of the machine meanwhile."""
    pids = processes_of(service.pid)
    at_s: list[float] = []
    memory: list[int] = []
    looking = asyncio.create_task(_look_at_memory(pids, at_s, memory))
    own_s, service_s, machine_s, begun_s = time.process_time(), processor_s(pids), machine_busy_s(), now_s()
    told = await asking
    took_s = now_s() - begun_s
    looking.cancel()
    return Measured(
        told=told,
        wanted_per_s=wanted_per_s,
        took_s=took_s,
        client_share=(time.process_time() - own_s) / took_s,
        service_share=(processor_s(pids) - service_s) / took_s,
        machine_share=(machine_busy_s() - machine_s) / took_s,
        memory_at_s=at_s,
        memory_bytes=memory,
    )


async def _look_at_memory(pids: list[int], at_s: list[float], memory: list[int]) -> None:
    while True:
        found = await asyncio.to_thread(memory_bytes, pids)
        at_s.append(now_s())
        memory.append(found)
        await asyncio.sleep(MEMORY_EVERY_S)


async def rest(service: Service) -> float:
    """Wait until the service has nothing left to do, its last connections closed and its last orders planned.

    Gives for how many seconds it had still much to do, in whole looks of QUIET_S.
    """
    begun_s = looked_s = now_s()
    while looked_s < begun_s + QUIET_WITHIN_S:
        pids = processes_of(service.pid)
        before_s = processor_s(pids)
        await asyncio.sleep(QUIET_S)
        if processor_s(pids) - before_s < QUIET_SHARE * QUIET_S:
            break
        looked_s = now_s()
    return looked_s - begun_s
