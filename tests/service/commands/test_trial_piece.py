import io
import json
from pathlib import Path

import pytest
from ezdxf.filemanagement import read

from layout.documents import shipped_cutter, shipped_movement
from layout.trial_walk import TRIAL_FILES, trial_files
from tests.service.commands.conftest import Discwright

FILES = trial_files(shipped_movement("tarnlight-17"), shipped_cutter("turn-press"))
ASKED = ("trial-piece", "--movement", "tarnlight-17", "--cutter", "turn-press", "--out")


def test_the_files_are_written_and_what_to_measure_is_said(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright(*ASKED, tmp_path / "new" / "trial")

    told = capsys.readouterr().out
    assert code == 0
    assert {path.name: path.read_bytes() for path in (tmp_path / "new" / "trial").iterdir()} == FILES
    assert "trial piece for tarnlight-17, revision 1, on turn-press" in told
    assert "  web          6 steps  The metal between the two openings of each pair" in told
    assert "mind: Press: hands out of the die space" in told
    assert f"written to {tmp_path / 'new' / 'trial'}: {', '.join(TRIAL_FILES)}" in told


def test_programs_get_json_and_nothing_else(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code = discwright(*ASKED, tmp_path, "--json")

    told = json.loads(capsys.readouterr().out)
    assert code == 0
    assert told["files"] == {name: str(tmp_path / name) for name in TRIAL_FILES}
    assert told["trial_piece"] == json.loads(FILES["trial-piece.json"])


def test_the_files_of_a_disc_in_the_same_folder_stay(discwright: Discwright, tmp_path: Path) -> None:
    (tmp_path / "disc.dxf").write_bytes(b"a disc")
    (tmp_path / "trial-piece.dxf").write_bytes(b"an earlier piece")

    code = discwright(*ASKED, tmp_path)

    assert code == 0
    assert (tmp_path / "disc.dxf").read_bytes() == b"a disc"
    assert (tmp_path / "trial-piece.dxf").read_bytes() == FILES["trial-piece.dxf"]
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(["disc.dxf", *TRIAL_FILES])


def test_documents_of_ones_own_are_read_from_files(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    movement = shipped_movement("fernhollow-31").model_dump(mode="json", exclude_none=True) | {"id": "mine-31"}
    (tmp_path / "mine.json").write_text(json.dumps(movement))

    code = discwright("trial-piece", "--movement", tmp_path / "mine.json", "--out", tmp_path / "out")

    assert code == 0
    assert "trial piece for mine-31, revision 1, on fibre-laser" in capsys.readouterr().out
    drawing = read(io.StringIO((tmp_path / "out" / "trial-piece.dxf").read_text("ascii")))
    assert drawing.audit().errors == []


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        (["--movement", "lost", "--out", "OUT"], "no movement has the id 'lost'"),
        (["--movement", "fernhollow-31", "--cutter", "lost", "--out", "OUT"], "no cutter has the id 'lost'"),
        (["--movement", "fernhollow-31", "--out", ""], "is empty; give a folder"),
        (["--out", "OUT"], "--movement"),
        (["--movement", "fernhollow-31", "--cutter", "BARE", "--out", "OUT"], "states no fold; add fold to the cutter"),
        (["--movement", "fernhollow-31", "--out", "BARE"], "is a file; --out names a folder"),
    ],
)
def test_what_cannot_be_done_is_one_line_and_writes_nothing(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str], arguments: list[str], says: str
) -> None:
    bare = shipped_cutter("fibre-laser").model_dump(mode="json", exclude={"fold"}, exclude_none=True)
    (tmp_path / "bare.json").write_text(json.dumps(bare))
    places = {"OUT": tmp_path / "out", "BARE": tmp_path / "bare.json"}

    code = discwright("trial-piece", *(places.get(argument, argument) for argument in arguments))

    told = capsys.readouterr()
    assert (code, told.out) == (2, "")
    assert told.err.startswith("discwright: ")
    assert told.err.count("\n") == 1
    assert says in told.err
    assert [path.name for path in tmp_path.iterdir()] == ["bare.json"]
