"""The client of the load test: what it counts as an answer, and from when it counts."""

import asyncio
import random
import time
from collections.abc import AsyncIterator
from contextlib import asynccontextmanager

import pytest

from tests.load.asking import NO_ANSWER, Answer, answer_in
from tests.load.loops import Client, Told, fault_in
from tests.load.mix import HEALTH, KINDS, Shelf, deck

WELL = b"HTTP/1.1 200 OK\r\nContent-Length: 4\r\n\r\nwell"


@asynccontextmanager
async def answering(text: bytes, after_s: float = 0.0) -> AsyncIterator[int]:
    """A server that answers everything alike; gives its port."""

    async def answer(reader: asyncio.StreamReader, writer: asyncio.StreamWriter) -> None:
        await reader.readuntil(b"\r\n\r\n")
        await asyncio.sleep(after_s)
        writer.write(text)
        writer.close()

    server = await asyncio.start_server(answer, "127.0.0.1", 0)
    async with server:
        yield server.sockets[0].getsockname()[1]


def client_of(port: int) -> Client:
    client = Client(port, Shelf("dw_key"), random.Random(1))
    client._deck = iter(lambda: HEALTH, None)
    return client


def test_an_open_loop_counts_from_when_a_request_was_due_though_the_client_was_late() -> None:
    async def ask_while_held_up() -> list[Told]:
        async with answering(WELL) as port:
            asking = asyncio.create_task(client_of(port).open(per_s=50, for_s=0.5))
            await asyncio.sleep(0.1)
            time.sleep(0.3)  # nothing is sent meanwhile: what is due at its begin waits for all of it
            return await asking

    told = asyncio.run(ask_while_held_up())

    assert len(told) == 25 + 2  # of the mix, and of health beside it
    worst = max(told, key=lambda one: one.took_s)
    assert worst.took_s > 0.25
    assert worst.late_s > 0.25
    assert worst.took_s >= worst.late_s


def test_an_open_loop_waits_for_nobody() -> None:
    async def ask_the_slow() -> list[Told]:
        async with answering(WELL, after_s=0.5) as port:
            return await client_of(port).open(per_s=40, for_s=0.5)

    begun_s = time.monotonic()
    told = asyncio.run(ask_the_slow())

    assert [one.status for one in told] == [200] * (20 + 2)
    assert time.monotonic() - begun_s < 4  # one after the other they would take 22 times 0.5 s


def test_clients_of_a_closed_loop_ask_again_when_they_are_answered() -> None:
    async def ask_the_slow() -> list[Told]:
        async with answering(WELL, after_s=0.1) as port:
            return await client_of(port).closed(clients=3, for_s=1.0)

    told = asyncio.run(ask_the_slow())

    assert 6 <= len(told) <= 30  # of three clients; a second holds the begin of ten answers of 0.1 s, on a busy one two


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        (b"", "closed without an answer"),
        (b"HTTP/1.1 200 OK\r\nContent-", "cut short"),
        (b"HTTP/1.1 200 OK\r\nContent-Length: 5\r\n\r\nwell", "cut short"),
    ],
)
def test_what_does_not_come_whole_is_no_answer(text: bytes, fault: str) -> None:
    answer = answer_in(text)

    assert (answer.status, answer.fault) == (NO_ANSWER, fault)
    assert fault_in(HEALTH, answer) == fault


def test_an_answer_that_there_is_nothing_new_has_no_body() -> None:
    assert answer_in(b"HTTP/1.1 304 NOT MODIFIED\r\nContent-Length: 9\r\n\r\n").status == 304


def test_a_port_that_nobody_listens_on_is_a_fault() -> None:
    async def ask() -> list[Told]:
        async with answering(WELL) as port:
            pass
        return await client_of(port).closed(clients=1, for_s=0.01)

    assert {one.fault for one in asyncio.run(ask())} == {"ConnectionRefusedError"}


@pytest.mark.parametrize(
    ("answer", "fault"),
    [
        (Answer(status=200), ""),
        (Answer(status=503, fields={"retry-after": "2"}), ""),
        (Answer(status=429, fields={"retry-after": "2"}), ""),
        (Answer(status=503), "503 without Retry-After"),
        (Answer(status=500, body=b"failed"), "500 b'failed'"),
        (Answer(status=304), "304 b''"),
    ],
)
def test_right_are_the_answer_wanted_and_a_refusal_that_says_when_to_come_again(answer: Answer, fault: str) -> None:
    assert fault_in(HEALTH, answer) == fault


def test_a_deck_holds_each_kind_as_often_as_its_weight_says() -> None:
    cards = deck(random.Random(1))

    for _ in range(2):
        names = [next(cards).name for _ in range(100)]
        assert {kind.name: names.count(kind.name) for kind in KINDS} == {kind.name: kind.weight for kind in KINDS}
