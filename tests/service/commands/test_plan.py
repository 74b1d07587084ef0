import json
import os
import re
from pathlib import Path

import pytest

from layout.documents import shipped_cutter, shipped_movement
from tests.service.commands.conftest import Discwright
from tests.service.fakes import BROKEN_TUNE, NEAR_RIM, THIN_WEB, FakePlanner

FILES = [
    "disc.dxf",
    "hits.csv",
    "record.dxf",
    "disc.svg",
    "work-sheet.pdf",
    "layout.json",
    "report.json",
    "making.json",
]
SHOWN = [
    "disc.svg",
    "layout.json",
    "making.json",
    "record.dxf",
    "report.json",
    "work-sheet.pdf",
]  # what an error does not keep back
MOVEMENT = ("--movement", "fernhollow-31")


def names_in(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def complaint(capsys: pytest.CaptureFixture[str]) -> str:
    """The one line on stderr; nothing may stand on stdout."""
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.startswith("discwright: ")
    assert told.err.count("\n") == 1
    assert told.err.endswith("\n")
    return told.err


def test_a_good_disc_gives_its_files_and_exit_0(discwright: Discwright, tune: Path, tmp_path: Path) -> None:
    code = discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "a" / "b")

    assert code == 0
    assert names_in(tmp_path / "a" / "b") == sorted(FILES)
    assert (tmp_path / "a" / "b" / "disc.dxf").read_bytes() == b"disc.dxf of Harvest Dance"


def test_the_summary_says_what_the_disc_keeps(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    planner.findings = (NEAR_RIM,)

    discwright("plan", tune, *MOVEMENT, "--cutter", "turn-press", "--out", tmp_path / "out")

    assert capsys.readouterr().out.splitlines() == [
        "Harvest Dance",
        "  movement    fernhollow-31, revision 1: Fernhollow, 31 tracks, standing projections",
        "  cutter      turn-press: Turret press with a turning table, lanced projections; drawn from the star side",
        "  kept        3 of 4 notes asked for, as 2 projections",
        "  worth       3400 of at most 4000 (85.0 %)",
        "  left out    1: 1 no-such-pitch",
        "  not asked   1: 1 outside-passage",
        "  transposed  +3 semitones",
        "  speed       1 times as written",
        "  starts at   0.50 s of the tune",
        "  odd in the tune: track 2 has no end",
        "  voice     notes  kept  weight kept  octave  nudged  largest    mean  covered  left out",
        "  top line      2     1       50.0 %       0       0        -       -        0         1",
        "  bass          2     2      100.0 %       0       1   5.0 ms  5.0 ms        1         0",
        "  inner         0     0            -       0       0        -       -        0         0",
        "  total         4     3       77.3 %       0       1   5.0 ms  5.0 ms        1         1",
        "  worst bar    from  notes  lost  weight lost",
        "  2          1.50 s      3     1       33.3 %",
        "  load        not known: nothing is lifted",
        "  making      1.25 m of cut with 4 pierces; machine time 1 min 5 s; blank 0.173 kg",
        "  not stated  cutter.rates",
        "warning web-to-rim: the web to the rim is 0.52 mm, near 0.5 mm",
        "    what helps: cut a trial piece",
        "good to cut",
        f"written to {tmp_path / 'out'}: disc.dxf, record.dxf, disc.svg, hits.csv, work-sheet.pdf, "
        "layout.json, report.json, making.json",
    ]


def test_an_error_keeps_the_cutting_files_back_and_gives_exit_3(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    planner.findings = (NEAR_RIM, THIN_WEB)

    code = discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out")

    told = capsys.readouterr().out
    assert code == 3
    assert names_in(tmp_path / "out") == SHOWN
    assert told.index("error web-too-thin") < told.index("warning web-to-rim")
    assert "NOT GOOD TO CUT\n" in told
    assert "kept back: disc.dxf, hits.csv; --despite-findings REASON gives them, marked" in told


def test_a_reason_writes_the_cutting_files_marked_and_still_gives_exit_3(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path
) -> None:
    planner.findings = (THIN_WEB,)

    code = discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out", "--despite-findings", "a trial")

    assert code == 3
    assert (tmp_path / "out" / "disc.dxf").read_text() == "disc.dxf of Harvest Dance NOT GOOD TO CUT: a trial"
    assert names_in(tmp_path / "out") == sorted(FILES)


def test_cutting_files_of_an_earlier_disc_do_not_stay_beside_a_faulty_one(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    discwright("plan", tune, *MOVEMENT, "--out", out)
    (out / "notes.txt").write_text("mine")
    planner.findings = (THIN_WEB,)

    discwright("plan", tune, *MOVEMENT, "--out", out)

    assert names_in(out) == sorted([*SHOWN, "notes.txt"])
    assert f"removed from {out}, as they were of an earlier disc: disc.dxf, hits.csv" in capsys.readouterr().out


def test_a_second_run_replaces_the_files(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path
) -> None:
    discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out")
    planner.title = "Another"

    code = discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out")

    assert code == 0
    assert (tmp_path / "out" / "hits.csv").read_text() == "hits.csv of Another"
    assert names_in(tmp_path / "out") == sorted(FILES)


def test_json_is_all_that_stands_on_stdout(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    planner.findings = (THIN_WEB,)
    planner.title = "Étude"

    code = discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "out", "--json")

    told = capsys.readouterr()
    answer = json.loads(told.out)
    assert code == 3
    assert told.err == ""
    assert set(answer) == {"good_to_cut", "files", "kept_back", "removed", "layout", "report", "making"}
    assert answer["layout"] == json.loads((tmp_path / "out" / "layout.json").read_text())
    assert answer["report"] == json.loads((tmp_path / "out" / "report.json").read_text())
    assert answer["making"] == json.loads((tmp_path / "out" / "making.json").read_text())
    assert answer["kept_back"] == ["disc.dxf", "hits.csv"]
    assert {name: Path(path).read_bytes() for name, path in answer["files"].items()} == {
        name: (tmp_path / "out" / name).read_bytes() for name in SHOWN
    }


def test_documents_of_one_s_own_are_read_from_files(discwright: Discwright, tune: Path, tmp_path: Path) -> None:
    movement = shipped_movement("tarnlight-17").model_copy(update={"id": "mine"})
    cutter = shipped_cutter("turn-press").model_copy(update={"id": "my-press"})
    (tmp_path / "mine").write_text(movement.model_dump_json(exclude_none=True))  # no ending: it exists
    (tmp_path / "press.json").write_text(cutter.model_dump_json(exclude_none=True))
    (tmp_path / "s.json").write_text('{"title": "Autumn"}')

    arguments = (
        "--movement",
        tmp_path / "mine",
        "--cutter",
        tmp_path / "press.json",
        "--settings",
        tmp_path / "s.json",
    )
    code = discwright("plan", tune, *arguments, "--out", tmp_path / "out")

    layout = json.loads((tmp_path / "out" / "layout.json").read_text())
    assert code == 0
    assert (layout["movement"]["id"], layout["cutter"]["id"]) == ("mine", "my-press")
    assert (tmp_path / "out" / "disc.svg").read_text() == "disc.svg of Autumn"


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (
            ["{tmp}/none.mid", *MOVEMENT],
            "the tune '.*none.mid' cannot be read: No such file or directory; check the path",
        ),
        (["{tmp}", *MOVEMENT], "the tune '.*' cannot be read: Is a directory"),
        (["{tmp}/big.mid", *MOVEMENT], "the tune '.*big.mid' is larger than 2097152 bytes, the most that is read"),
        (["{tmp}/broken.mid", *MOVEMENT], "tune, byte 0: found 'not ', expected the header chunk; export it again"),
        (
            ["{tune}", "--movement", "lost-1"],
            "no movement has the id 'lost-1'; known: .*; or give the path of a movement",
        ),
        (["{tune}", "--movement", "{tmp}/lost.json"], "movement '.*lost.json' cannot be read: No such file"),
        (["{tune}", "--movement", "{tmp}"], "movement '.*' cannot be read: Is a directory"),
        (["{tune}", "--movement", "a\0b"], "no movement has the id"),
        (
            ["{tune}", *MOVEMENT, "--cutter", "saw"],
            "no cutter has the id 'saw'; known: fibre-laser, turn-press; or give",
        ),
        (["{tune}", *MOVEMENT, "--settings", "{tmp}/broken.mid"], "settings: \\(whole document\\): not JSON: "),
        (["{tune}", *MOVEMENT, "--settings", "{tmp}/faults.json"], "settings: /speed: .*no such field|; and 1 more"),
        (["{tune}", *MOVEMENT, "--despite-findings", " "], "--despite-findings: the reason is empty; say in 1 to 200"),
        (["{tune}", *MOVEMENT, "--despite-findings", "a\nb"], "--despite-findings: the reason holds a line break"),
        (["{tune}"], "the following arguments are required: --movement; see discwright plan --help"),
        (["{tune}", *MOVEMENT, "--colour", "red"], "unrecognized arguments: --colour red; see discwright --help"),
    ],
)
def test_bad_input_is_one_line_exit_2_and_nothing_written(
    discwright: Discwright,
    tune: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    arguments: list[str],
    message: str,
) -> None:
    (tmp_path / "big.mid").write_bytes(bytes(2_097_153))
    (tmp_path / "broken.mid").write_bytes(BROKEN_TUNE)
    (tmp_path / "faults.json").write_text('{"speed": {"x": 1}, "y": 2}')
    before = names_in(tmp_path)
    told = [argument.format(tmp=tmp_path, tune=tune) for argument in arguments]

    code = discwright("plan", *told, "--out", tmp_path / "out", "--json")

    assert code == 2
    assert re.search(message, complaint(capsys))
    assert names_in(tmp_path) == before


def test_a_file_in_place_of_the_folder_is_left_alone(
    discwright: Discwright, tune: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright("plan", tune, *MOVEMENT, "--out", tune)

    assert code == 2
    assert "dance.mid' is a file; --out names a folder" in complaint(capsys)
    assert tune.read_bytes().startswith(b"MThd")


def test_a_folder_in_place_of_a_file_leaves_all_files_as_they_were(
    discwright: Discwright, tune: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    (out / "layout.json").mkdir(parents=True)
    (out / "disc.dxf").write_text("of an earlier disc")

    code = discwright("plan", tune, *MOVEMENT, "--out", out)

    assert code == 2
    assert "layout.json' is a folder; remove it or choose another --out" in complaint(capsys)
    assert names_in(out) == ["disc.dxf", "layout.json"]
    assert (out / "disc.dxf").read_text() == "of an earlier disc"


def test_a_full_disk_leaves_nothing_behind(
    discwright: Discwright,
    tune: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def full_disk(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "write_bytes", full_disk)

    code = discwright("plan", tune, *MOVEMENT, "--out", tmp_path / "new" / "out")

    assert code == 2
    assert "out': No space left on device" in complaint(capsys)
    assert not (tmp_path / "new").exists()


def test_when_renaming_stops_half_way_no_cutting_file_stands(
    discwright: Discwright, planner: FakePlanner, tune: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "out"
    discwright("plan", tune, *MOVEMENT, "--out", out)
    planner.title = "Another"
    renamed: list[Path] = []

    def stop_after_two(source: Path, target: Path) -> None:
        if len(renamed) == 2:
            raise KeyboardInterrupt
        renamed.append(target)
        target.write_bytes(source.read_bytes())

    monkeypatch.setattr(os, "replace", stop_after_two)

    code = discwright("plan", tune, *MOVEMENT, "--out", out)

    assert code == 130
    assert names_in(out) == SHOWN
