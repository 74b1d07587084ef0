import json
import os
from pathlib import Path

import pytest

from tests.service.commands.conftest import Discwright
from tests.service.fakes import THIN_WEB, FakePlanner

FILES = [
    "disc.dxf",
    "disc.svg",
    "hits.csv",
    "layout.json",
    "making.json",
    "record.dxf",
    "report.json",
    "work-sheet.pdf",
]
SHOWN = ["disc.svg", "layout.json", "making.json", "record.dxf", "report.json", "work-sheet.pdf"]
MOVEMENT = ("--movement", "fernhollow-31")


@pytest.fixture
def three(tmp_path: Path) -> Path:
    path = tmp_path / "three.json"
    path.write_text('{"discs": 3}')
    return path


@pytest.fixture
def two(tmp_path: Path) -> Path:
    path = tmp_path / "two.json"
    path.write_text('{"discs": 2}')
    return path


def tree(folder: Path) -> dict[str, list[str]]:
    """The files by folder."""
    found = {str(Path(at).relative_to(folder)): sorted(files) for at, _, files in os.walk(folder)}
    return {at: files for at, files in found.items() if files}


def test_each_disc_has_a_folder_of_its_own(discwright: Discwright, tune: Path, three: Path, tmp_path: Path) -> None:
    out = tmp_path / "out"

    code = discwright("plan", tune, *MOVEMENT, "--settings", three, "--out", out)

    assert code == 0
    assert tree(out) == {"1": FILES, "2": FILES, "3": FILES}
    assert (out / "2" / "disc.dxf").read_text() == "disc.dxf of Harvest Dance 2/3"


def test_each_disc_is_told_with_its_number(
    discwright: Discwright, tune: Path, two: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", tmp_path / "out")

    lines = capsys.readouterr().out.splitlines()
    assert lines[0] == "Harvest Dance, disc 1 of 2"
    assert "Harvest Dance, disc 2 of 2" in lines
    assert lines.count("good to cut") == 2
    assert lines[-1].startswith(f"written to {tmp_path / 'out' / '2'}: disc.dxf, ")


def test_one_faulty_disc_keeps_its_own_cutting_files_back_and_gives_exit_3(
    discwright: Discwright, planner: FakePlanner, tune: Path, three: Path, tmp_path: Path
) -> None:
    planner.findings, planner.faulty_disc = (THIN_WEB,), 2

    code = discwright("plan", tune, *MOVEMENT, "--settings", three, "--out", tmp_path / "out")

    assert code == 3
    assert tree(tmp_path / "out") == {"1": FILES, "2": SHOWN, "3": FILES}


def test_a_reason_marks_the_faulty_disc_alone(
    discwright: Discwright, planner: FakePlanner, tune: Path, two: Path, tmp_path: Path
) -> None:
    planner.findings, planner.faulty_disc = (THIN_WEB,), 2
    out = tmp_path / "out"

    code = discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out, "--despite-findings", "a trial")

    assert code == 3
    assert (out / "1" / "disc.dxf").read_text() == "disc.dxf of Harvest Dance 1/2"
    assert (out / "2" / "disc.dxf").read_text() == "disc.dxf of Harvest Dance 2/2 NOT GOOD TO CUT: a trial"


def test_cutting_files_of_discs_that_are_no_longer_made_are_removed_and_said(
    discwright: Discwright, tune: Path, three: Path, two: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    discwright("plan", tune, *MOVEMENT, "--settings", three, "--out", out)

    discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out)

    assert tree(out) == {"1": FILES, "2": FILES, "3": SHOWN}
    said = f"removed from {out}, as they were of earlier discs: 3/disc.dxf, 3/hits.csv"
    assert capsys.readouterr().out.splitlines()[-1] == said


def test_one_disc_after_several_leaves_no_cutting_file_of_theirs(
    discwright: Discwright, tune: Path, two: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out)
    capsys.readouterr()

    discwright("plan", tune, *MOVEMENT, "--out", out, "--json")

    assert tree(out) == {".": FILES, "1": SHOWN, "2": SHOWN}
    removed = ["1/disc.dxf", "1/hits.csv", "2/disc.dxf", "2/hits.csv"]
    assert json.loads(capsys.readouterr().out)["removed"] == removed


def test_several_discs_after_one_leave_no_cutting_file_of_it(
    discwright: Discwright, tune: Path, two: Path, tmp_path: Path
) -> None:
    out = tmp_path / "out"
    discwright("plan", tune, *MOVEMENT, "--out", out)

    discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out)

    assert tree(out) == {".": SHOWN, "1": FILES, "2": FILES}


@pytest.mark.parametrize("layout", [None, "{}", "[]", "not JSON", '{"disc": {"number": 3, "of": 1}}', '{"disc": 5}'])
def test_folders_of_someone_s_own_are_left_alone(
    discwright: Discwright, tune: Path, two: Path, tmp_path: Path, layout: str | None
) -> None:
    out = tmp_path / "out"
    (out / "3").mkdir(parents=True)
    (out / "3" / "disc.dxf").write_text("mine")
    if layout is not None:
        (out / "3" / "layout.json").write_text(layout)

    discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out)

    assert (out / "3" / "disc.dxf").read_text() == "mine"


def test_a_disc_made_alone_in_a_folder_below_is_left_alone(discwright: Discwright, tune: Path, tmp_path: Path) -> None:
    discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out" / "1")

    discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out")

    assert tree(tmp_path / "out") == {".": FILES, "1": FILES}


def test_json_lists_the_discs(
    discwright: Discwright,
    planner: FakePlanner,
    tune: Path,
    two: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
) -> None:
    planner.findings, planner.faulty_disc = (THIN_WEB,), 1

    code = discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", tmp_path / "out", "--json")

    told = json.loads(capsys.readouterr().out)
    assert code == 3
    assert set(told) == {"good_to_cut", "discs", "removed"}
    assert (told["good_to_cut"], told["removed"]) == (False, [])
    assert [disc["good_to_cut"] for disc in told["discs"]] == [False, True]
    assert [disc["layout"]["disc"] for disc in told["discs"]] == [{"number": 1, "of": 2}, {"number": 2, "of": 2}]
    assert told["discs"][0]["kept_back"] == ["disc.dxf", "hits.csv"]
    assert told["discs"][1]["files"]["disc.dxf"] == str(tmp_path / "out" / "2" / "disc.dxf")


def test_a_file_where_a_disc_s_folder_must_be_leaves_everything_as_it_was(
    discwright: Discwright, tune: Path, three: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    out.mkdir()
    (out / "3").write_text("mine")

    code = discwright("plan", tune, *MOVEMENT, "--settings", three, "--out", out)

    assert code == 2
    assert "3' is a file; --out names a folder" in capsys.readouterr().err
    assert tree(out) == {".": ["3"]}
    assert [path.name for path in out.iterdir()] == ["3"]


def test_a_full_disk_leaves_no_disc_behind(
    discwright: Discwright, tune: Path, two: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    written = []

    def full_after_seven(path: Path, content: bytes) -> int:
        written.append(path)
        if len(written) > 7:
            raise OSError(28, "No space left on device")
        with path.open("wb") as file:
            return file.write(content)

    monkeypatch.setattr(Path, "write_bytes", full_after_seven)

    code = discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", tmp_path / "new" / "out")

    assert code == 2
    assert len(written) == 8
    assert not (tmp_path / "new").exists()


def test_interrupted_while_renaming_no_cutting_file_of_two_sets_stands(
    discwright: Discwright,
    planner: FakePlanner,
    tune: Path,
    two: Path,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    out = tmp_path / "out"
    discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out)
    planner.title = "Another"
    renamed: list[Path] = []

    def stop_after_thirteen(source: Path, target: Path) -> None:
        if len(renamed) == 13:  # six files of each disc that are not cut, and one that is
            raise KeyboardInterrupt
        renamed.append(target)
        target.write_bytes(source.read_bytes())

    monkeypatch.setattr(os, "replace", stop_after_thirteen)

    code = discwright("plan", tune, *MOVEMENT, "--settings", two, "--out", out)

    assert code == 130
    assert tree(out) == {"1": sorted([*SHOWN, "disc.dxf"]), "2": SHOWN}
    assert (out / "1" / "disc.dxf").read_text() == "disc.dxf of Another 1/2"
