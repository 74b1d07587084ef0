"""Rates: what is counted, how it is told, and that a shop stays open where counting does not work."""

import logging
import shutil
import socket
import subprocess
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from service.access.loopback import is_loopback
from service.access.rates import ASK_AGAIN_S, Kind, Rates, of_address
from service.settings import AccessSettings, SettingsError
from tests.service.access.free_port import free_port

FEW = AccessSettings(read_rate=(3, 60), write_rate=(2, 30))


def test_so_many_pass_and_the_next_does_not() -> None:
    rates = Rates(FEW)

    counts = [rates.count(Kind.READ, "key_1") for _ in range(5)]

    assert [count and (count.left, count.is_over) for count in counts] == [
        (2, False),
        (1, False),
        (0, False),
        (0, True),
        (0, True),
    ]


def test_reading_and_writing_and_each_key_are_counted_by_themselves() -> None:
    rates = Rates(FEW)
    for _ in range(4):
        rates.count(Kind.READ, "key_1")

    others = [rates.count(Kind.WRITE, "key_1"), rates.count(Kind.READ, "key_2")]

    assert [other and other.left for other in others] == [1, 2]


def test_a_count_is_told_in_structured_fields() -> None:
    # The form of draft-ietf-httpapi-ratelimit-headers since -08, after its own example:
    # RateLimit-Policy: "default";q=100;w=60 and RateLimit: "default";r=50;t=30
    rates = Rates(FEW)

    first = rates.count(Kind.READ, "key_1")
    rates.count(Kind.WRITE, "key_1")
    rates.count(Kind.WRITE, "key_1")
    over = rates.count(Kind.WRITE, "key_1")

    assert first is not None
    assert first.header_fields() == {"RateLimit-Policy": '"read";q=3;w=60', "RateLimit": '"read";r=2;t=60'}
    assert over is not None
    assert over.header_fields() == {
        "RateLimit-Policy": '"write";q=2;w=30',
        "RateLimit": '"write";r=0;t=30',
        "Retry-After": "30",
    }


def test_who_waits_as_long_as_told_may_ask_again() -> None:
    rates = Rates(AccessSettings(read_rate=(1, 1)))
    rates.count(Kind.READ, "key_1")
    over = rates.count(Kind.READ, "key_1")
    assert over is not None
    assert over.is_over

    time.sleep(over.reset_s)

    again = rates.count(Kind.READ, "key_1")
    assert again is not None
    assert not again.is_over


@pytest.mark.parametrize(
    ("address", "whose"),
    [
        ("192.0.2.7", "address 192.0.2.7"),
        ("::ffff:192.0.2.7", "address 192.0.2.7"),
        # one subscriber has 2^64 addresses of IPv6 at the least
        ("2001:db8:1:2::7", "address 2001:db8:1:2::"),
        ("2001:db8:1:2:ffff::", "address 2001:db8:1:2::"),
        ("2001:db8:1:3::7", "address 2001:db8:1:3::"),
        (None, "address unknown"),
        ("a socket", "address unknown"),
    ],
)
def test_who_has_no_key_is_counted_by_address(address: str | None, whose: str) -> None:
    assert of_address(address) == whose


@pytest.mark.parametrize("silent", [False, True], ids=["nobody listens", "nobody answers"])
def test_requests_pass_where_the_server_of_counts_is_away_and_it_is_logged_once(
    silent: bool,  # noqa: FBT001
    caplog: pytest.LogCaptureFixture,
) -> None:
    now_s = [0.0]
    with socket.create_server(("127.0.0.1", 0)) as listener:
        port = listener.getsockname()[1] if silent else free_port()
        settings = AccessSettings(read_rate=(1, 60), rates_url=f"redis://:sesame@127.0.0.1:{port}/0")
        rates = Rates(settings, clock=lambda: now_s[0])
        with caplog.at_level(logging.WARNING, "discwright"):
            begun_s = time.monotonic()
            counts = [rates.count(Kind.READ, "key_1") for _ in range(20)]
            now_s[0] += ASK_AGAIN_S
            counts += [rates.count(Kind.READ, "key_1") for _ in range(20)]
            took_s = time.monotonic() - begun_s

    assert counts == [None] * 40
    assert [record.getMessage()[:31] for record in caplog.records] == ["requests are not counted: the s"]
    assert "sesame" not in caplog.text
    assert took_s < 2.0  # two tries of a quarter of a second, not forty


@pytest.mark.parametrize("url", ["redis://host:port/0", "redis://[::1/0"])
def test_a_url_that_is_none_is_refused_by_name(url: str) -> None:
    with pytest.raises(SettingsError, match="DISCWRIGHT_RATES must be a URL such as redis://host:6379/0"):
        Rates(AccessSettings(rates_url=url))


@pytest.fixture
def redis_url(tmp_path: Path) -> Iterator[str]:
    program = shutil.which("redis-server")
    if program is None:
        pytest.skip("redis-server is not installed")
    port = free_port()
    command = [program, "--port", str(port), "--bind", "127.0.0.1", "--save", "", "--dir", str(tmp_path)]
    server = subprocess.Popen(command, stdout=subprocess.DEVNULL)
    try:
        give_up_at_s = time.monotonic() + 20
        while True:
            try:
                socket.create_connection(("127.0.0.1", port), timeout=1).close()
                break
            except OSError:
                assert time.monotonic() < give_up_at_s
                time.sleep(0.05)
        yield f"redis://127.0.0.1:{port}/0"
    finally:
        server.kill()
        server.wait(10)


def test_on_redis_all_processes_count_together(redis_url: str) -> None:
    settings = AccessSettings(read_rate=(3, 60), rates_url=redis_url)
    one, other = Rates(settings), Rates(settings)

    counts = [rates.count(Kind.READ, "key_1") for rates in (one, other, one, other)]

    assert [count and (count.left, count.is_over) for count in counts] == [
        (2, False),
        (1, False),
        (0, False),
        (0, True),
    ]
    assert all(count and 59 <= count.reset_s <= 60 for count in counts)


@pytest.mark.parametrize(
    ("host", "is_own"),
    [
        *[
            (host, True)
            for host in ("127.0.0.1", "127.9.8.7", "::1", "[::1]", "localhost", "Localhost.", "a.localhost")
        ],
        *[(host, False) for host in ("0.0.0.0", "::", "192.168.1.5", "localhost.example", "shop.example", "", "127.1")],
    ],
)
def test_which_hosts_are_this_machine_alone(host: str, is_own: bool) -> None:  # noqa: FBT001
    assert is_loopback(host) == is_own
