"""`discwright work`: a real process that is told to stop, or cannot start."""

import argparse
import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest

from layout import walk
from service.commands import work
from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import CommandError
from service.limits import Limits
from service.parts import Parts
from tests.service.conftest import environment_of

COMMAND = """
import sys
from layout import walk
from service.commands import work
from service.commands.arguments import OneLineParser, Tools
from service.limits import Limits
parser = OneLineParser()
work.add_arguments(parser)
sys.exit(work.run(parser.parse_args(sys.argv[1:]), Tools(planner=walk, limits=Limits(), execute=None)))
"""


def asked(*arguments: str) -> argparse.Namespace:
    parser = OneLineParser()
    work.add_arguments(parser)
    return parser.parse_args(arguments)


TOOLS = Tools(planner=walk, limits=Limits(), execute=os.execv)


@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGINT])
def test_it_says_what_it_does_and_stops_when_told(tmp_path: Path, parts: Parts, number: signal.Signals) -> None:
    process = subprocess.Popen(
        [sys.executable, "-c", COMMAND, "--slots", "1"],
        env={**os.environ, **environment_of(tmp_path, parts.settings.places.database_url)},
        stderr=subprocess.PIPE,
        text=True,
    )
    assert process.stderr is not None
    told = iter(process.stderr.readline, "")  # among lines of the log
    is_ready = "planning orders, one at a time, until Ctrl-C\n" in told

    process.send_signal(number)
    code = process.wait(60)
    process.stderr.close()

    assert is_ready
    assert code == 0


@pytest.mark.parametrize("count", [0, 65, -1])
def test_a_number_of_slots_that_cannot_be_is_told(count: int) -> None:
    with pytest.raises(CommandError, match=rf"^--slots is {count}; it must be a whole number from 1 to 64$"):
        work.run(asked("--slots", str(count)), TOOLS)


def test_a_setting_that_is_wrong_is_told_by_its_name(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("DISCWRIGHT_LEASE_S", "soon")

    with pytest.raises(CommandError, match=r"^DISCWRIGHT_LEASE_S is 'soon'; it must be a whole number from 2 to 3600$"):
        work.run(asked(), TOOLS)


def test_by_default_there_are_as_many_slots_as_processors() -> None:
    assert asked().slots == len(os.sched_getaffinity(0))
