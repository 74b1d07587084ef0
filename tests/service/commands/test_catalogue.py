import json
from pathlib import Path

import pytest

from layout.documents import read_cutter, read_movement, shipped_cutter, shipped_movement
from tests.service.commands.conftest import Discwright


@pytest.mark.parametrize(
    ("command", "ids"),
    [("movements", ["fernhollow-31", "mossbrook-67", "tarnlight-17"]), ("cutters", ["fibre-laser", "turn-press"])],
)
def test_what_ships_is_listed_for_people_and_for_programs(
    discwright: Discwright, capsys: pytest.CaptureFixture[str], command: str, ids: list[str]
) -> None:
    codes = [discwright(command)]
    lines = capsys.readouterr().out.splitlines()
    codes.append(discwright(command, "--json"))
    listed = json.loads(capsys.readouterr().out)

    assert codes == [0, 0]
    assert [line.split()[0] for line in lines] == ids
    assert [entry["id"] for entry in listed] == ids
    assert all(entry["title"] in line for entry, line in zip(listed, lines, strict=True))


def test_a_movement_is_printed_resolved_and_can_be_read_again(
    discwright: Discwright, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    discwright("movement", "mossbrook-67")
    (tmp_path / "again.json").write_text(capsys.readouterr().out)

    code = discwright("movement", tmp_path / "again.json")

    again = read_movement(capsys.readouterr().out)
    assert code == 0
    assert again.model_dump() == shipped_movement("mossbrook-67").model_dump()


def test_a_cutter_is_printed_and_can_be_read_again(discwright: Discwright, capsys: pytest.CaptureFixture[str]) -> None:
    code = discwright("cutter", "turn-press")

    assert code == 0
    assert read_cutter(capsys.readouterr().out) == shipped_cutter("turn-press")


@pytest.mark.parametrize("command", ["movement", "cutter"])
def test_a_document_that_does_not_ship_is_one_line_and_exit_2(
    discwright: Discwright, capsys: pytest.CaptureFixture[str], command: str
) -> None:
    code = discwright(command, "lost")

    told = capsys.readouterr()
    assert (code, told.out) == (2, "")
    assert told.err.startswith(f"discwright: no {command} has the id 'lost'; known: ")
