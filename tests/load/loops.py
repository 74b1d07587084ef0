"""Two ways to ask: clients who wait for one answer before they ask again, and arrivals that wait for nobody.

The second alone tells what users meet: who asks at a time of his own waits from then on, also while the client itself
is late. So a time is counted from the moment an arrival was due, not from when it was sent.
"""

import asyncio
import random
from collections.abc import Iterator
from dataclasses import dataclass

from tests.load.asking import NO_ANSWER, Answer, ask, now_s
from tests.load.mix import HEALTH, Asked, Kind, Shelf, deck

TOO_MANY = (429, 503)
HEALTH_EVERY_S = 0.25


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """What came of one request.

    Attributes:
        kind: Of request.
        status: Of the answer; NO_ANSWER where none came whole.
        fault: What was wrong; empty where nothing was, or it was refused as it should be.
        due_s: When it was to be sent.
        late_s: How much later it was sent.
        took_s: From when it was due to the end of its answer.
    """

    kind: str
    status: int
    fault: str
    due_s: float
    late_s: float
    took_s: float

    @property
    def is_refused(self) -> bool:
        """Whether the service said, as it should, that it comes too often or has too much to do."""
        return self.status in TOO_MANY and not self.fault


class Client:
    """Asks one service."""

    def __init__(self, port: int, shelf: Shelf, chance: random.Random) -> None:
        """Note where, what is known of it, and what decides on kinds."""
        self._port = port
        self._shelf = shelf
        self._chance = chance
        self._deck = deck(chance)

    async def all_at_once(self, kind: Kind, count: int) -> list[Told]:
        """So many requests of a kind at the same moment."""
        due_s = now_s()
        asked = [one for _ in range(count) if (one := kind.make(self._shelf, self._chance)) is not None]
        return list(await asyncio.gather(*(self._one(kind, one, due_s) for one in asked)))

    async def closed(self, clients: int, for_s: float) -> list[Told]:
        """Some clients who ask again as soon as they are answered."""
        until_s = now_s() + for_s
        told: list[Told] = []

        async def go_on() -> None:
            while (due_s := now_s()) < until_s:
                told.append(await self._one(*next(self._makeable()), due_s))

        await asyncio.gather(*(go_on() for _ in range(clients)))
        return told

    async def open(self, per_s: float, for_s: float) -> list[Told]:
        """Arrivals at fixed times, so many a second, and health asked beside them; ends when all are answered."""
        begun_s = now_s()
        arrivals, looks = await asyncio.gather(
            self._arrivals(begun_s, per_s, for_s, self._makeable()),
            self._arrivals(begun_s, 1 / HEALTH_EVERY_S, for_s, self._health()),
        )
        return [*arrivals, *looks]

    async def _arrivals(
        self, begun_s: float, per_s: float, for_s: float, kinds: Iterator[tuple[Kind, Asked]]
    ) -> list[Told]:
        under_way = []
        for number in range(int(for_s * per_s)):
            due_s = begun_s + number / per_s
            if (wait_s := due_s - now_s()) > 0:
                await asyncio.sleep(wait_s)
            under_way.append(asyncio.create_task(self._one(*next(kinds), due_s)))
        return list(await asyncio.gather(*under_way))

    def _health(self) -> Iterator[tuple[Kind, Asked]]:
        while (asked := HEALTH.make(self._shelf, self._chance)) is not None:
            yield HEALTH, asked

    def _makeable(self) -> Iterator[tuple[Kind, Asked]]:
        for kind in self._deck:
            asked = kind.make(self._shelf, self._chance)
            if asked is not None:
                yield kind, asked

    async def _one(self, kind: Kind, asked: Asked, due_s: float) -> Told:
        sent_s = now_s()
        answer = await ask(self._port, asked.request)
        took_s = now_s() - due_s
        fault = fault_in(kind, answer)
        if not fault and answer.status == kind.status:
            asked.learn(answer)
        return Told(
            kind=kind.name, status=answer.status, fault=fault, due_s=due_s, late_s=sent_s - due_s, took_s=took_s
        )


def fault_in(kind: Kind, answer: Answer) -> str:
    """What is wrong with an answer; empty for the one wanted, and for a refusal that says when to come again."""
    if answer.status == kind.status:
        return ""
    if answer.status == NO_ANSWER:
        return answer.fault
    if answer.status in TOO_MANY:
        return "" if answer.fields.get("retry-after", "").isdigit() else f"{answer.status} without Retry-After"
    return f"{answer.status} {answer.body[:200]!r}"
