import json
from pathlib import Path
from typing import Any

import pytest

from tests.layout.sheets.drawn import RIM_MM, disc_dxf, entities_of, record_dxf
from tests.service.commands.conftest import Discwright

JOB: dict[str, Any] = {
    "format": "discwright-sheets/1",
    "title": "Spring batch",
    "gap_mm": 5,
    "margin_mm": 10,
    "stock": [{"id": "full", "width_mm": 800, "height_mm": 300, "quantity": 2, "lot": "B 12"}],
    "discs": [{"id": "fernhollow-31", "diameter_mm": 237, "quantity": 4}],
}


@pytest.fixture
def job(tmp_path: Path) -> Path:
    path = tmp_path / "job.json"
    path.write_text(json.dumps(JOB))
    return path


def changed(job: Path, **fields: Any) -> Path:
    job.write_text(json.dumps(JOB | fields))
    return job


def test_a_job_is_written_and_told_sheet_by_sheet(
    discwright: Discwright, job: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "cut"

    code = discwright("sheets", job, "--out", out)

    assert code == 0
    assert sorted(path.name for path in out.iterdir()) == ["parts.csv", "sheet-1.dxf", "sheet-2.dxf", "sheets.json"]
    lines = capsys.readouterr().out.splitlines()
    assert lines[:2] == ["Spring batch", "  placed      4 of 4 discs on 2 sheets"]
    # 3 × π/4 × 237² of 800 × 300 is 55.1 %, one disc 18.4 %
    assert lines[2].startswith("  sheet 1  full, lot B 12  3 discs  55.1 % used  cut from the ")
    assert lines[3].startswith("  sheet 2  full, lot B 12  1 disc   18.4 % used  cut from the ")
    assert lines[4] == f"written to {out}: sheets.json, parts.csv, sheet-1.dxf, sheet-2.dxf"


def test_discs_that_fit_nowhere_give_exit_3_and_the_others_are_written(
    discwright: Discwright, job: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    changed(job, discs=[*JOB["discs"], {"id": "great", "diameter_mm": 900, "quantity": 1}])

    code = discwright("sheets", job, "--out", tmp_path / "cut")

    assert code == 3
    assert (tmp_path / "cut" / "sheet-1.dxf").is_file()
    lines = capsys.readouterr().out.splitlines()
    assert "error disc-not-placed: 1 of 1 discs great (900 mm) fit on no sheet; 2 sheets are used, 0 are left." in lines
    assert any(line.startswith("    what helps: Add stock that is at least as wide") for line in lines)


def test_a_job_that_cannot_be_used_gives_exit_2_and_writes_nothing(
    discwright: Discwright, job: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright("sheets", changed(job, gap_mm=-1), "--out", tmp_path / "cut")

    assert code == 2
    assert not (tmp_path / "cut").exists()
    told = capsys.readouterr().err
    assert told.startswith("discwright: sheet job: /gap_mm: ")
    assert told.count("\n") == 1


def test_a_missing_job_is_told_in_one_line(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright("sheets", tmp_path / "none.json", "--out", tmp_path / "cut")

    assert code == 2
    assert "the sheet job" in capsys.readouterr().err


def test_json_is_all_that_stands_on_stdout(
    discwright: Discwright, job: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright("sheets", job, "--out", tmp_path / "cut", "--json")

    told = json.loads(capsys.readouterr().out)
    assert code == 0
    assert told["complete"] is True
    assert Path(told["files"]["parts.csv"]).is_file()
    assert len(told["plan"]["sheets"]) == 2


def test_drawings_of_an_earlier_job_are_removed_and_other_files_stay(
    discwright: Discwright, job: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "cut"
    discwright("sheets", job, "--out", out)
    (out / "sheet-notes.dxf").write_text("mine")
    capsys.readouterr()

    discwright("sheets", changed(job, discs=[{"id": "one", "diameter_mm": 237, "quantity": 1}]), "--out", out)

    assert sorted(path.name for path in out.iterdir()) == ["parts.csv", "sheet-1.dxf", "sheet-notes.dxf", "sheets.json"]
    assert capsys.readouterr().out.splitlines()[-1] == (
        f"removed from {out}, as they were of an earlier job: sheet-2.dxf"
    )


def test_the_cutting_files_of_a_disc_and_a_trial_piece_stay(discwright: Discwright, job: Path, tmp_path: Path) -> None:
    out = tmp_path / "dance"
    out.mkdir()
    others = {"disc.dxf": "a disc", "hits.csv": "its hits", "trial-piece.dxf": "a piece", "sheet-notes.dxf": "mine"}
    for name, content in others.items():
        (out / name).write_text(content)
    (out / "sheet-7.dxf").mkdir()  # someone's own, though it is called as a drawing is

    code = discwright("sheets", job, "--out", out)

    assert code == 0
    assert {name: (out / name).read_text() for name in others} == others
    assert (out / "sheet-7.dxf").is_dir()
    assert (out / "sheet-2.dxf").is_file()


DISC = disc_dxf()
DRAWN = [{"id": "dance", "diameter_mm": RIM_MM, "quantity": 2}, {"id": "plain", "diameter_mm": 100, "quantity": 1}]


@pytest.fixture
def disc(tmp_path: Path) -> Path:
    path = tmp_path / "disc.dxf"
    path.write_bytes(DISC)
    return path


def test_a_disc_is_cut_as_its_drawing_says_and_one_without_stays_a_circle(
    discwright: Discwright, job: Path, disc: Path, tmp_path: Path
) -> None:
    out = tmp_path / "cut"

    code = discwright("sheets", changed(job, discs=DRAWN), "--drawing", f"dance={disc}", "--out", out)

    assert code == 0
    drawn = entities_of((out / "sheet-1.dxf").read_bytes())
    assert sum(layer == "RIM" for layer, *_ in drawn) == 3
    assert sum(layer == "SLITS" for layer, *_ in drawn) == 2 * sum(layer == "SLITS" for layer, *_ in entities_of(DISC))


@pytest.mark.parametrize("named", ["dance", "=disc.dxf", "dance=", ""])
def test_a_drawing_without_its_disc_is_told(
    discwright: Discwright, job: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], named: str
) -> None:
    code = discwright("sheets", job, "--drawing", named, "--out", tmp_path / "cut")

    assert code == 2
    assert f"argument --drawing: {named!r} names no disc and drawing; write ID=disc.dxf" in capsys.readouterr().err


def test_two_drawings_of_one_disc_are_told(
    discwright: Discwright, job: Path, disc: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    twice = ("--drawing", f"dance={disc}", "--drawing", f"dance={disc}")

    code = discwright("sheets", changed(job, discs=DRAWN), *twice, "--out", tmp_path / "cut")

    assert code == 2
    assert capsys.readouterr().err == "discwright: two drawings are given for 'dance'; give one\n"


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (None, "discwright: the drawing of dance "),
        (b"", "discwright: drawing of dance: (whole document): the file is empty; give a DXF file\n"),
        (
            record_dxf(),
            "discwright: drawing of dance: (whole document): this is a record, for reading, never for cutting",
        ),
    ],
    ids=["missing", "empty", "record"],
)
def test_a_drawing_that_cannot_be_placed_is_told_and_nothing_is_written(
    discwright: Discwright,
    job: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    content: bytes | None,
    told: str,
) -> None:
    path = tmp_path / "drawing.dxf"
    if content is not None:
        path.write_bytes(content)

    code = discwright("sheets", changed(job, discs=DRAWN), "--drawing", f"dance={path}", "--out", tmp_path / "cut")

    assert code == 2
    assert not (tmp_path / "cut").exists()
    said = capsys.readouterr().err
    assert said.startswith(told)
    assert said.count("\n") == 1
