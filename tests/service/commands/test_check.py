import json
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layout.check.finding import Code, Finding, Place, finding_told
from service.commands.findings import finding_lines
from service.commands.main import main
from service.demo.compose import TUNE_PATH
from tests.service.commands.conftest import Discwright
from tests.service.fakes import NEAR_RIM, THIN_WEB, FakePlanner, FakePlucks


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
    assert capsys.readouterr().out.splitlines()[-4:] == [
        "error web-too-thin: the web between track 3 and track 4 is 0.31 mm, below 0.5 mm",
        "    where: tracks 3, 4; angle 12.500 degrees seen from the label side",
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
def test_a_finding_is_written_with_only_the_places_that_apply(
    discwright: Discwright,
    planner: FakePlanner,
    drawing: Path,
    capsys: pytest.CaptureFixture[str],
    finding: Finding,
) -> None:
    planner.findings = (finding,)

    discwright("check", drawing, "--movement", "fernhollow-31", "--json")

    [told] = json.loads(capsys.readouterr().out)["findings"]
    at = {name: value for name, value in asdict(finding.at).items() if value not in (None, ())}
    assert told == json.loads(json.dumps(asdict(finding) | {"at": at}))  # lists for tuples


def test_many_findings_of_one_kind_are_told_in_short() -> None:
    lines = finding_lines([finding_told(THIN_WEB)] * 7)

    assert len(lines) == 5 * 3 + 1
    assert lines[-1] == "    and 2 more web-too-thin"


@pytest.mark.parametrize(
    ("at", "where"),
    [
        (Place(), []),
        (Place(projections=(3,)), []),  # an index into layout.json says nothing to a person
        (Place(tracks=(7,)), ["    where: track 7"]),
        (Place(radius_mm=0.0), ["    where: radius 0.000 mm"]),
        (
            Place(tracks=(1, 2), radius_mm=36.00049, angle_deg=9.1234, sounds_s=-6e-9),
            ["    where: tracks 1, 2; radius 36.000 mm; angle 9.123 degrees seen from the label side; moment 0.000 s"],
        ),
    ],
)
def test_a_finding_is_told_with_its_place(at: Place, where: list[str]) -> None:
    lines = finding_lines([finding_told(replace(NEAR_RIM, at=at))])

    assert lines == [f"warning web-to-rim: {NEAR_RIM.message}", *where, f"    what helps: {NEAR_RIM.remedy}"]


def test_errors_come_first_and_kinds_in_the_order_they_were_found() -> None:
    other = replace(THIN_WEB, code=Code.OTHER_SIDE)
    blank = replace(THIN_WEB, code=Code.BLANK_DIFFERS)

    lines = finding_lines([finding_told(finding) for finding in (NEAR_RIM, other, blank, other)])

    told = [line.split(":")[0] for line in lines if not line.startswith(" ")]
    assert told == ["error other-side", "error other-side", "error blank-differs", "warning web-to-rim"]


def test_moments_in_json_are_rounded_to_a_microsecond_and_never_minus_zero(
    discwright: Discwright,
    drawing: Path,
    capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    # The drawing's rounding leaves nanoseconds: -6.21e-09 s was seen on a real disc.
    plucks = FakePlucks(sounds_s=np.array([2.5000004, -6.21e-09, 7.1234567]))
    monkeypatch.setattr("tests.service.fake_planner.FakePlucks", lambda: plucks)

    discwright("check", drawing, "--movement", "fernhollow-31", "--json")

    out = capsys.readouterr().out
    told = json.loads(out)
    assert (told["first_s"], told["last_s"]) == (0.0, 7.123457)
    assert [pluck["sounds_s"] for pluck in told["plucks"]] == [0.0, 2.5, 7.123457]
    assert "-0.0" not in out


def test_a_record_is_never_good_to_cut(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["plan", str(TUNE_PATH), "--movement", "fernhollow-31", "--out", str(tmp_path)])  # with the real computation
    capsys.readouterr()

    codes = {
        name: main(["check", str(tmp_path / name), "--movement", "fernhollow-31"])
        for name in ("disc.dxf", "record.dxf")
    }

    out = capsys.readouterr().out
    assert codes == {"disc.dxf": 0, "record.dxf": 3}
    assert out.splitlines()[-1] == "NOT GOOD TO CUT"
    assert "error not-a-cutting-file: the drawing is a record, for reading, never for cutting" in out


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


def test_a_drawing_without_projections_has_no_first_and_no_last_pluck(
    discwright: Discwright, drawing: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    class Silent(FakePlanner):
        def check_drawing(self, dxf: bytes, movement: Any, cutter: Any) -> Any:
            reading = super().check_drawing(dxf, movement, cutter)
            no_track, none = np.zeros(0, dtype=np.int64), np.zeros(0)
            disc = replace(reading.disc, track_index=no_track, radius_mm=none, edge_angle_rad=none)
            return replace(reading, disc=disc, plucks=FakePlucks(track_index=no_track, sounds_s=none))

    main(["check", str(drawing), "--movement", "fernhollow-31"], planner=Silent())

    told = capsys.readouterr().out
    assert "  plays       0 plucks on 0 of 31 tracks" in told
    assert "first pluck" not in told
