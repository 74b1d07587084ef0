"""The load test in short: what it says of errors and of what is held open, exactly; of times nothing at all."""

import asyncio
import random
from pathlib import Path

from tests.load.loops import Client, Told
from tests.load.mix import HEALTH, KINDS, Shelf
from tests.load.phases import rest
from tests.load.serving import Service, serving
from tests.load.watching import Held, held

PAGE = next(kind for kind in KINDS if kind.name == "page")
TAKEN = 40  # at a time: more than both processes have threads, fewer than one of them lets wait
TOO_MANY = 200  # more than both take and let wait, 2 times 16 + 64; no more than one has places for, while they leave


async def course_of(service: Service) -> tuple[dict[str, list[Told]], Held, Held]:
    """What came of each part, and what was held at rest before and after."""
    client = Client(service.port, Shelf(service.key), random.Random(1))
    told = {"warm": await client.all_at_once(PAGE, TAKEN)}
    told["warm health"] = await client.all_at_once(HEALTH, TAKEN)
    for _ in range(2):  # so that every thread of both processes has begun
        await client.all_at_once(PAGE, TOO_MANY)
    await rest(service)
    before = held(service.pid)
    too_many = asyncio.create_task(client.all_at_once(PAGE, TOO_MANY))
    told["health"] = [one for _ in range(TAKEN) for one in await client.all_at_once(HEALTH, 1)]
    told["too many"] = await too_many
    told["pages again"] = await client.all_at_once(PAGE, TAKEN)
    await rest(service)
    return told, before, held(service.pid)


def test_what_is_too_much_is_refused_without_a_fault_and_leaves_nothing_open(tmp_path: Path) -> None:
    with serving(tmp_path) as service:
        told, before, after = asyncio.run(course_of(service))
        faults = service.faults()

    assert [one for part in told.values() for one in part if one.fault] == []
    assert faults == []
    refused = {name: sum(one.is_refused for one in part) for name, part in told.items()}
    assert 0 < refused.pop("too many") < TOO_MANY
    assert (refused["warm"], refused["pages again"]) == (0, 0)
    assert before.pids == after.pids
    assert after.threads <= before.threads
    assert after.handles <= before.handles
    assert after.sockets <= before.sockets
    assert after.connections <= before.connections
