import json
from pathlib import Path

import pytest

from layout.write import layout_json
from service.commands.findings import finding_lines, finding_told
from service.commands.main import main
from tests.service.commands.conftest import Discwright
from tests.service.fakes import NEAR_RIM, THIN_WEB, FakePlanner


@pytest.fixture
def drawing(tmp_path: Path) -> Path:
    path = tmp_path / "disc.dxf"
    path.write_bytes(b"a drawing")
    return path


def test_a_sound_drawing_is_told_track_by_track(
    discwright: Discwright, drawing: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright("check", drawing, "--movement", "fernhollow-31")

    assert code == 0
    assert capsys.readouterr().out.splitlines() == [
        f"{drawing} on fernhollow-31, revision 1: Fernhollow, 31 tracks, standing projections",
        "  plays       3 plucks on 2 of 31 tracks",
        "  first pluck 0.250 s, last pluck 7.000 s",
        "  track 1  C4  2 plucks",
        "  track 2  F4  1 pluck",
        "good to cut",
    ]


def test_plucks_are_listed_in_the_order_they_sound(
    discwright: Discwright, drawing: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    discwright("check", drawing, "--movement", "fernhollow-31", "--plucks")

    assert capsys.readouterr().out.splitlines()[5:8] == [
        "  0.250 s  track 1  C4",
        "  2.500 s  track 2  F4",
        "  7.000 s  track 1  C4",
    ]


def test_an_error_in_a_drawing_gives_exit_3(
    discwright: Discwright, planner: FakePlanner, drawing: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    planner.findings = (THIN_WEB,)

    code = discwright("check", drawing, "--movement", "fernhollow-31")

    assert code == 3
    assert capsys.readouterr().out.splitlines()[-3:] == [
        "error web-too-thin: the web between track 3 and track 4 is 0.31 mm, below 0.5 mm",
        "    what helps: leave out note 7",
        "NOT GOOD TO CUT",
    ]


def test_json_is_all_that_stands_on_stdout(
    discwright: Discwright, planner: FakePlanner, drawing: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    planner.findings = (NEAR_RIM,)

    code = discwright("check", drawing, "--movement", "fernhollow-31", "--cutter", "turn-press", "--json")

    told = json.loads(capsys.readouterr().out)
    assert code == 0
    assert told["movement"] == {"id": "fernhollow-31", "revision": 1}
    assert told["cutter"] == {"id": "turn-press"}
    assert (told["first_s"], told["last_s"]) == (0.25, 7.0)
    assert [pluck["sounds_s"] for pluck in told["plucks"]] == [0.25, 2.5, 7.0]
    assert told["plucks"][2]["angle_deg"] == pytest.approx(180.0)  # π
    assert [track["pluck_count"] for track in told["tracks"]] == [2, 1] + [0] * 29
    assert told["findings"][0]["at"] == {"radius_mm": 110.0}


@pytest.mark.parametrize("finding", [THIN_WEB, NEAR_RIM])
def test_findings_are_written_as_layout_json_writes_them(finding: object) -> None:
    told = json.loads(json.dumps(finding_told(finding)))  # lists for tuples

    assert told == layout_json.finding_record(finding)


def test_many_findings_of_one_kind_are_told_in_short() -> None:
    lines = finding_lines([finding_told(THIN_WEB)] * 7)

    assert len(lines) == 5 * 2 + 1
    assert lines[-1] == "    and 2 more web-too-thin"


def test_a_drawing_that_is_not_there_is_one_line_and_exit_2(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright("check", tmp_path / "none.dxf", "--movement", "fernhollow-31")

    told = capsys.readouterr()
    assert (code, told.out) == (2, "")
    assert told.err == (
        f"discwright: the drawing '{tmp_path}/none.dxf' cannot be read: No such file or directory; check the path\n"
    )


@pytest.mark.parametrize("content", [b"", b"a drawing", b"  0\nSECTION\n  2\nENTITIES\n", bytes(1000)])
def test_what_is_no_drawing_is_one_line_and_exit_2(
    drawing: Path, capsys: pytest.CaptureFixture[str], content: bytes
) -> None:
    drawing.write_bytes(content)

    code = main(["check", str(drawing), "--movement", "fernhollow-31", "--json"])  # with the real computation

    told = capsys.readouterr()
    assert (code, told.out, told.err.count("\n")) == (2, "", 1)
    assert told.err.startswith("discwright: ")
