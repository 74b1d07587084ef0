"""`discwright run`: a folder of tunes becomes a folder of discs, and goes on where it was broken off."""

import json
import os
import pty
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from layout import walk
from layout.documents import Cutter, Movement, Settings
from layout.write.laid_out import LaidOut
from service.api.operations.common import SMALL_TUNE
from service.commands.main import main

MOVEMENT = ("--movement", "fernhollow-31")


class CountingWalk:
    """The walk, which remembers what it was asked to lay out."""

    def __init__(self) -> None:
        self.laid_out: list[bytes] = []
        self.fingerprint_of = walk.fingerprint_of
        self.files_of = walk.files_of
        self.check_drawing = walk.check_drawing

    def lay_out_discs(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, clock: Any = None
    ) -> tuple[Any, ...]:
        self.laid_out.append(tune)
        discs: tuple[LaidOut, ...] = walk.lay_out_discs(tune, movement, cutter, settings, clock)
        return discs


Run = Callable[..., int]


@pytest.fixture
def counting() -> CountingWalk:
    return CountingWalk()


@pytest.fixture
def run(counting: CountingWalk) -> Run:
    def do(*arguments: object) -> int:
        return main(["run", *map(str, arguments)], planner=counting)

    return do


def named(number: int) -> bytes:
    """The small tune, its last note another."""
    note = bytes([84 - number])
    return SMALL_TUNE.replace(b"\x90\x54", b"\x90" + note).replace(b"\x80\x54", b"\x80" + note)


@pytest.fixture
def tunes(tmp_path: Path) -> Path:
    folder = tmp_path / "dances"
    (folder / "slow").mkdir(parents=True)
    (folder / "polka.mid").write_bytes(named(0))
    (folder / "slow" / "waltz.MID").write_bytes(named(1))
    (folder / "read me.txt").write_text("no tune")
    return folder


def files_in(folder: Path) -> dict[str, bytes]:
    return {str(path.relative_to(folder)): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def test_each_tune_gets_a_folder_for_each_movement(run: Run, tunes: Path, tmp_path: Path) -> None:
    out = tmp_path / "discs"

    code = run(tunes, *MOVEMENT, "--movement", "mossbrook-67", "--out", out)

    assert code == 0
    assert sorted(str(path.parent.relative_to(out)) for path in out.rglob("disc.dxf")) == [
        *("polka/fernhollow-31", "polka/mossbrook-67", "slow/waltz/fernhollow-31", "slow/waltz/mossbrook-67"),
    ]
    told = json.loads((out / "run.json").read_text())
    assert told["counts"] == {"good to cut": 4}
    assert told["pairs"][0]["folder"] == "polka/fernhollow-31"


def test_the_files_are_those_that_plan_makes(run: Run, tunes: Path, tmp_path: Path) -> None:
    run(tunes, *MOVEMENT, "--out", tmp_path / "discs")
    main(["plan", str(tunes / "polka.mid"), *MOVEMENT, "--out", str(tmp_path / "one")])

    assert files_in(tmp_path / "discs" / "polka" / "fernhollow-31") == files_in(tmp_path / "one")


def test_what_is_done_is_left_as_it_is(run: Run, counting: CountingWalk, tunes: Path, tmp_path: Path) -> None:
    out = tmp_path / "discs"
    run(tunes, *MOVEMENT, "--out", out)
    (tunes / "polka.mid").write_bytes(named(2))
    (tunes / "galop.mid").write_bytes(named(3))
    counting.laid_out.clear()

    code = run(tunes, *MOVEMENT, "--out", out)

    assert code == 0
    assert counting.laid_out == [named(3), named(2)]
    assert json.loads((out / "run.json").read_text())["counts"] == {"done before": 1, "good to cut": 2}


@pytest.mark.parametrize("name", ["disc.dxf", "making.json", "layout.json", "work-sheet.pdf"])
def test_a_folder_that_is_not_whole_is_made_again(
    run: Run, counting: CountingWalk, tunes: Path, tmp_path: Path, name: str
) -> None:
    out = tmp_path / "discs"
    run(tunes, *MOVEMENT, "--out", out)
    before = files_in(out)
    (out / "polka" / "fernhollow-31" / name).unlink()
    counting.laid_out.clear()

    run(tunes, *MOVEMENT, "--out", out)

    assert counting.laid_out == [named(0)]
    assert {name: content for name, content in files_in(out).items() if name != "run.json"} == {
        name: content for name, content in before.items() if name != "run.json"
    }


@pytest.mark.parametrize("name", ["layout.json", "making.json"])
def test_a_folder_whose_files_are_of_two_tunes_is_made_again(
    run: Run, counting: CountingWalk, tunes: Path, tmp_path: Path, name: str
) -> None:
    out = tmp_path / "discs"
    run(tunes, *MOVEMENT, "--out", out)
    other = out / "slow" / "waltz" / "fernhollow-31" / name
    (out / "polka" / "fernhollow-31" / name).write_bytes(other.read_bytes())  # as a kill in the middle may leave it
    counting.laid_out.clear()

    run(tunes, *MOVEMENT, "--out", out)

    assert counting.laid_out == [named(0)]


def test_other_settings_make_everything_anew(run: Run, counting: CountingWalk, tunes: Path, tmp_path: Path) -> None:
    out, settings = tmp_path / "discs", tmp_path / "settings.json"
    settings.write_text('{"title": "Another"}')
    run(tunes, *MOVEMENT, "--out", out)

    run(tunes, *MOVEMENT, "--out", out, "--settings", settings)

    assert len(counting.laid_out) == 4


def test_tunes_that_differ_in_their_ending_alone_have_folders_of_their_own(
    run: Run, tunes: Path, tmp_path: Path
) -> None:
    (tunes / "polka.midi").write_bytes(named(4))

    run(tunes, *MOVEMENT, "--out", tmp_path / "discs")

    assert {path.name for path in (tmp_path / "discs").iterdir()} == {"polka.mid", "polka.midi", "slow", "run.json"}


def test_a_tune_that_cannot_be_used_is_told_and_the_others_are_made(
    run: Run, tunes: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "discs"
    run(tunes, *MOVEMENT, "--out", out)
    (tunes / "polka.mid").write_bytes(b"no tune")
    capsys.readouterr()

    code = run(tunes, *MOVEMENT, "--out", out)

    lines = capsys.readouterr().out.splitlines()
    assert code == 3
    assert lines[0] == "2 pairs: 1 done before, 1 refused"
    assert lines[1].startswith(f"  {tunes / 'polka.mid'} for fernhollow-31: refused; tune, byte 0: found ")
    assert not (out / "polka" / "fernhollow-31" / "disc.dxf").exists()  # of the tune before, not to be cut for this one


def test_a_disc_that_is_not_good_to_cut_gives_exit_3_and_where_to_look(
    run: Run, tunes: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    settings = tmp_path / "settings.json"
    settings.write_text('{"speed": {"mode": "factor", "factor": 0.01}}')

    code = run(tunes, *MOVEMENT, "--out", tmp_path / "discs", "--settings", settings)

    assert code == 3
    lines = capsys.readouterr().out.splitlines()
    where = tmp_path / "discs" / "polka" / "fernhollow-31" / "layout.json"
    assert f"  {tunes / 'polka.mid'} for fernhollow-31: not good to cut; see {where}" in lines
    assert run(tunes, *MOVEMENT, "--out", tmp_path / "discs", "--settings", settings) == 3
    assert capsys.readouterr().out.startswith("2 pairs: 2 done before")


def test_programs_get_json(run: Run, tunes: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    run(tunes, *MOVEMENT, "--out", tmp_path / "discs", "--json")

    told = json.loads(capsys.readouterr().out)
    assert told == json.loads((tmp_path / "discs" / "run.json").read_text())
    assert told["pairs"][1] == {
        "tune": str(tunes / "slow" / "waltz.MID"),
        "movement": "fernhollow-31",
        "folder": "slow/waltz/fernhollow-31",
        "outcome": "good to cut",
        "good_to_cut": True,
        "reason": None,
    }


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        (("{none}", *MOVEMENT, "--out", "{out}"), "is no folder; name the folder with the tunes"),
        (("{empty}", *MOVEMENT, "--out", "{out}"), "no name there ends in .mid or .midi"),
        (("{tunes}", *MOVEMENT, *MOVEMENT, "--out", "{out}"), "a movement is named twice"),
        (("{tunes}", *MOVEMENT, "--out", "{tunes}"), "--out is the folder with the tunes"),
        (("{tunes}", "--movement", "nowhere-1", "--out", "{out}"), "nowhere-1"),
        (("{tunes}", "--out", "{out}"), "--movement"),
    ],
)
def test_what_cannot_be_done_gives_exit_2_and_one_line(
    run: Run,
    tunes: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    arguments: tuple[str, ...],
    says: str,
) -> None:
    (tmp_path / "empty").mkdir()
    places = {name: tmp_path / name for name in ("none", "empty", "out")} | {"tunes": tunes}

    try:
        code = run(*(argument.format(**places) for argument in arguments))
    except SystemExit as end:
        code = int(end.code or 0)

    told = capsys.readouterr().err
    assert code == 2
    assert says in told
    assert told.count("\n") == 1
    assert not (tmp_path / "out").exists()


def test_discs_that_lie_below_the_tunes_are_not_taken_for_tunes(run: Run, tunes: Path) -> None:
    out = tunes / "discs"
    run(tunes, *MOVEMENT, "--out", out)
    (out / "stray.mid").write_bytes(named(5))

    run(tunes, *MOVEMENT, "--out", out)

    assert json.loads((out / "run.json").read_text())["counts"] == {"done before": 2}


def test_tunes_that_lie_below_the_discs_are_found(run: Run, tunes: Path, tmp_path: Path) -> None:
    assert run(tunes, *MOVEMENT, "--out", tmp_path) == 0


def test_where_there_is_no_terminal_progress_is_told_in_lines(
    run: Run, tunes: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    for number in range(18):
        (tunes / f"{number}.mid").write_bytes(b"no tune")

    run(tunes, *MOVEMENT, "--out", tmp_path / "discs")

    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 10  # of twenty pairs
    assert lines[0].startswith("2 of 20, about ")
    assert lines[-1] == "20 of 20"


def command(tunes: Path, out: Path) -> list[str]:
    return [sys.executable, "-m", "service.commands.main", "run", str(tunes), *MOVEMENT, "--out", str(out)]


def test_on_a_terminal_a_bar_fills(tunes: Path, tmp_path: Path) -> None:
    leader, follower = pty.openpty()
    process = subprocess.Popen(command(tunes, tmp_path / "discs"), stderr=follower, stdout=subprocess.PIPE)
    os.close(follower)
    seen = b""
    try:
        while piece := os.read(leader, 1000):
            seen += piece
    except OSError:  # the other side has been closed
        pass
    os.close(leader)
    out, _ = process.communicate(timeout=60)

    assert process.returncode == 0
    assert b"\r[###############...............] 1 of 2, about " in seen
    assert seen.endswith(b"\r[##############################] 2 of 2\x1b[K\r\n")
    assert out.startswith(b"2 pairs: 2 good to cut")


def many(tunes: Path, beside: int = 10) -> None:
    """So many tunes beside the two that are there."""
    for number in range(beside):
        (tunes / f"{number}.mid").write_bytes(named(number + 2))


def wait_for_discs(out: Path, count: int) -> None:
    last_s = time.monotonic() + 120
    while len(list(out.rglob("disc.dxf"))) < count:
        assert time.monotonic() < last_s
        time.sleep(0.01)


def test_a_run_that_was_killed_goes_on_where_it_was(
    run: Run, counting: CountingWalk, tunes: Path, tmp_path: Path
) -> None:
    many(tunes)
    out = tmp_path / "discs"
    process = subprocess.Popen(command(tunes, out), stderr=subprocess.DEVNULL, stdout=subprocess.DEVNULL)
    try:
        wait_for_discs(out, 3)
    finally:
        process.kill()
        process.wait()
    done = len(list(out.rglob("disc.dxf")))

    code = run(tunes, *MOVEMENT, "--out", out)

    assert code == 0
    assert 12 - done <= len(counting.laid_out) <= 12 - done + 1  # the one whose last file it was writing
    run(tunes, *MOVEMENT, "--out", tmp_path / "at once")
    assert discs_in(out) == discs_in(tmp_path / "at once")


def discs_in(out: Path) -> dict[str, bytes]:
    return {name: content for name, content in files_in(out).items() if name != "run.json"}


@pytest.fixture
def hears_ctrl_c() -> Iterator[None]:
    """Processes begun meanwhile hear it, though the tests themselves ignore it, as what a shell begins with & does."""
    before = signal.signal(signal.SIGINT, signal.default_int_handler)
    yield
    signal.signal(signal.SIGINT, before)


@pytest.mark.usefixtures("hears_ctrl_c")
def test_ctrl_c_leaves_whole_folders_and_says_how_to_go_on(tunes: Path, tmp_path: Path) -> None:
    many(tunes, 60)  # far more than are done by the time that a busy machine sees three
    out = tmp_path / "discs"
    process = subprocess.Popen(command(tunes, out), stderr=subprocess.PIPE, stdout=subprocess.DEVNULL, text=True)
    try:
        wait_for_discs(out, 3)
    finally:
        process.send_signal(signal.SIGINT)
    _, told = process.communicate(timeout=60)

    folders = {path.parent for path in out.rglob("*") if path.is_file()}
    assert process.returncode == 130
    assert told.splitlines()[-1].endswith("of 62; the same command goes on from there")
    assert "Traceback" not in told
    assert len({frozenset(path.name for path in folder.iterdir()) for folder in folders}) == 1
    assert not (out / "run.json").exists()


def test_a_list_that_cannot_be_written_is_told_in_one_line_and_the_discs_stay(
    run: Run, tunes: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "discs"
    (out / "run.json").mkdir(parents=True)

    code = run(tunes, *MOVEMENT, "--out", out)

    assert code == 2
    assert capsys.readouterr().err.splitlines()[-1] == f"discwright: cannot write to '{out}': Is a directory"
    assert len(list(out.rglob("disc.dxf"))) == 2
