"""The README is run and held against the program: its commands, its tables, its settings."""

import json
import re
import shutil
import socket
import subprocess
import sys
import time
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import get_args

import ezdxf
import pytest

from layout import file_names, walk
from layout.arrange.arrangement import LeftOutReason
from layout.documents import Cutter, Settings, shipped_cutter, shipped_movement
from layout.documents.cutter import Fold
from layout.documents.drive import Drive, Winding
from layout.documents.making import Feeds
from layout.documents.movement import DiscBlank
from service.api.problems import PROBLEMS
from service.demo.compose import demo_tune
from service.limits import Limits
from service.settings import every_variable

TOP = Path(__file__).parent.parent
README = (TOP / "README.md").read_text()
[PIPELINE] = re.findall(r"```sh\n(# the pipeline.*?)```", README, flags=re.DOTALL)
BLOCKS = [block for block in re.findall(r"```sh\n(.*?)```", README, flags=re.DOTALL) if block != PIPELINE]
CURL = [command for block in BLOCKS for command in re.findall(r"^curl .*?[^\\]$", block, re.DOTALL | re.MULTILINE)]
COMMANDS = [line for block in BLOCKS for line in block.splitlines() if line.startswith(("discwright ", "printf "))]

LASER_FILES = file_names.files_for(shipped_cutter("fibre-laser"))
TRIAL_FILES = {"trial-piece.dxf", "trial-piece.svg", "trial-piece.json", "measure.pdf"}
# What the archives of the examples hold, their names in order.
ARCHIVES = {
    "demo/discs.zip": " ".join(rf"{disc}/\S+" for disc in (1, 2) for _ in LASER_FILES),
    "demo/trial-piece.zip": r"measure_\S+\.pdf trial-piece_\S+\.dxf trial-piece_\S+\.json trial-piece_\S+\.svg",
    "demo/sheets-to-cut.zip": r"parts\.csv sheet-1\.dxf sheets\.json",
    "demo/sheets.zip": r"parts\.csv sheet-1\.dxf sheets\.json",
}


@pytest.fixture(scope="module")
def data(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of the running service's data."""
    return tmp_path_factory.mktemp("data")


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory, data: Path) -> Iterator[str]:
    """A running service, as `discwright serve` starts it, on a free port."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    cache = tmp_path_factory.mktemp("cache")
    command = [sys.executable, "-m", "service.commands.main", "serve", "--port", str(port)]
    with (cache / "log").open("w") as log:
        process = subprocess.Popen(
            command,
            cwd=TOP,
            env={"DISCWRIGHT_CACHE": str(cache), "DISCWRIGHT_DATA": str(data), "PATH": ""},
            stdout=log,
            stderr=log,
        )
        try:
            for _ in range(300):
                assert process.poll() is None
                with socket.socket() as probe:
                    if probe.connect_ex(("127.0.0.1", port)) == 0:
                        break
                time.sleep(0.1)
            yield f"http://127.0.0.1:{port}"
        finally:
            process.terminate()
            process.wait(timeout=30)


def run(command: str, folder: Path) -> subprocess.CompletedProcess[str]:
    """A command line of the README, in a folder that has the demo tune where the README says."""
    demo = folder / "service/demo"
    demo.mkdir(parents=True, exist_ok=True)
    (folder / "demo").mkdir(exist_ok=True)  # made by service/up
    shutil.copy(TOP / "service/demo/tune.mid", demo)
    return subprocess.run(["sh", "-c", command], cwd=folder, capture_output=True, text=True, check=False)


@pytest.mark.skipif(shutil.which("curl") is None, reason="the README's examples need curl")
@pytest.mark.parametrize("command", CURL)
def test_a_curl_line_of_the_readme_works(command: str, address: str, tmp_path: Path) -> None:
    written = [line for line in COMMANDS if line.startswith("printf ") and line.rpartition("> ")[2] in command]
    if "demo/fernhollow-31/disc.dxf" in command:  # left there by service/up
        by_demo = walk.lay_out(
            demo_tune(), shipped_movement("fernhollow-31"), shipped_cutter("fibre-laser"), Settings()
        )
        (tmp_path / "demo/fernhollow-31").mkdir(parents=True)
        (tmp_path / "demo/fernhollow-31/disc.dxf").write_bytes(walk.files_of(by_demo)["disc.dxf"])
    for line in written:
        run(line, tmp_path)

    result = run(command.replace("http://127.0.0.1:8000", address), tmp_path)

    assert result.stderr == ""
    assert result.returncode == 0
    told = re.search(r"-o (\S+)", command)
    if told is None:
        assert json.loads(result.stdout)
    elif told[1].endswith(".dxf"):
        assert len(ezdxf.readfile(tmp_path / told[1]).modelspace().query("LWPOLYLINE[layer=='SLITS']")) > 300
    elif told[1].endswith(".zip"):
        with zipfile.ZipFile(tmp_path / told[1]) as archive:
            assert re.fullmatch(ARCHIVES[told[1]], " ".join(sorted(archive.namelist())))
    elif told[1].endswith(".svg"):
        assert "<svg" in (tmp_path / told[1]).read_text()
    else:
        made_for = "turn-press" if "cutter=turn-press" in command else "fibre-laser"
        assert {*file_names.files_for(shipped_cutter(made_for)), "hearing.wav", "hearing.mid"} == set(
            json.loads((tmp_path / told[1]).read_text())["links"]
        )


@pytest.mark.skipif(shutil.which("curl") is None, reason="the README's examples need curl")
def test_the_pipeline_of_the_readme_goes_from_quote_to_files(address: str, data: Path, tmp_path: Path) -> None:
    program = tmp_path / "bin" / "discwright"
    program.parent.mkdir()
    program.write_text(f"#!/bin/sh\nPYTHONPATH='{TOP}' exec {sys.executable} -m service.commands.main \"$@\"\n")
    program.chmod(0o755)
    where = f"PATH='{program.parent}':$PATH; export PATH; DISCWRIGHT_DATA='{data}'; export DISCWRIGHT_DATA; set -e\n"

    result = run(where + PIPELINE.replace("http://127.0.0.1:8000", address) + "\necho $web", tmp_path)

    assert (result.returncode, result.stderr) == (0, "")
    made = tmp_path / "demo"
    planned, released = (json.loads((made / f"{name}.json").read_text()) for name in ("planned", "released"))
    events = json.loads((made / "events.json").read_text())["events"]
    assert (planned["state"], released["state"], released["reference"]) == ("ready", "released", "W-1001")
    assert [event["type"] for event in events] == [
        f"order.{what}" for what in ("received", "planned", "ready", "released")
    ]
    assert len(ezdxf.readfile(made / "W-1001.dxf").modelspace().query("LWPOLYLINE[layer=='SLITS']")) > 300
    assert "<svg" in (made / "preview.svg").read_text()
    _order_by_the_client(address, result.stdout.strip(), tmp_path)


def _order_by_the_client(address: str, key: str, folder: Path) -> None:
    """The README's lines of Python, against the running service."""
    [lines] = re.findall(r"```python\n(.*?)```", README, flags=re.DOTALL)
    shutil.copy(TOP / "service/demo/tune.mid", folder / "dance.mid")
    program = lines.replace("http://127.0.0.1:8000", address).replace("dw_…", key) + "print(order['state'])\n"
    told = subprocess.run(
        [sys.executable, "-c", program],
        cwd=folder,
        env={"PYTHONPATH": str(TOP), "PATH": ""},
        capture_output=True,
        text=True,
        check=False,
    )
    assert (told.returncode, told.stdout) == (0, "ready\n"), told.stderr


def test_the_command_lines_of_the_readme_work_in_their_order(tmp_path: Path) -> None:
    program = f"{sys.executable} -m service.commands.main"

    for command in COMMANDS:
        ours = command.startswith("discwright ")
        line = f"PYTHONPATH='{TOP}' {program} {command.removeprefix('discwright ')}" if ours else command
        result = run(line, tmp_path)

        assert result.returncode == 0, f"{command}: {result.stderr}"
        assert bool(result.stdout) == ours

    for folder in ("two-discs/1", "two-discs/2", "by-hand"):
        assert {path.name for path in (tmp_path / "demo" / folder).iterdir()} == set(LASER_FILES)
    assert {path.name for path in (tmp_path / "demo/trial").iterdir()} == TRIAL_FILES
    sheets = {path.name for path in (tmp_path / "demo/sheets-by-hand").iterdir()}
    assert sheets == {"sheets.json", "parts.csv", "sheet-1.dxf"}  # 8 of 237 mm: four by two on 1000 by 500
    written = json.loads((tmp_path / "demo/written/report.json").read_text())
    assert written["extra_pluck_count"] > 0


def test_the_readme_has_examples_to_run() -> None:
    assert len(CURL) == 11
    assert len(COMMANDS) == 18


def test_every_kind_of_error_stands_in_the_readme_with_its_status() -> None:
    rows = re.findall(r"^\| `(/problems/[a-z-]+)` \| (\d+) \|", README, flags=re.MULTILINE)

    assert dict(rows) == {kind.type: str(kind.status) for kind in PROBLEMS.values()}


def test_every_setting_stands_in_the_readme_with_its_default() -> None:
    rows = re.findall(r"^\| `([A-Z_]+)` \| (.+?) \| (.+?) \|$", README, flags=re.MULTILINE)

    assert rows == [(told.name, told.meaning, told.default) for told in every_variable()]


def test_every_file_stands_in_the_readme() -> None:
    rows = re.findall(r"^\| `([\w.-]+\.\w+)` \|", README, flags=re.MULTILINE)

    assert sorted(rows) == sorted(file_names.FILES)


def test_the_settings_shown_are_the_defaults() -> None:
    [block] = re.findall(r"```json\n(.*?)```", README, flags=re.DOTALL)

    assert json.loads(block) == Settings().model_dump(mode="json")


def test_the_reasons_shown_are_those_a_note_can_have() -> None:
    [listed] = re.findall(r"left out has one of these reasons: (.*?)\.\n", README, flags=re.DOTALL)

    assert set(re.findall(r"`([a-z-]+)`", listed)) == set(get_args(LeftOutReason))


def test_the_limits_shown_are_the_limits() -> None:
    limits = {limit.name: limit.value for limit in Limits().told()}

    assert limits["upload_bytes"] == 2 * 1024 * 1024
    assert "| upload | 2 MiB |" in README
    assert limits["tune_notes"] == 50_000
    assert "| notes of a tune | 50,000 |" in README
    assert limits["tune_last_onset_s"] == 4 * 3600
    assert "| last onset of a tune | 4 h |" in README


def test_the_first_paragraph_states_the_job() -> None:
    first = README.split("\n\n")[1]

    assert "MIDI file" in first
    assert "movement" in first
    assert "can be cut" in first


def test_every_field_a_document_may_leave_out_is_told() -> None:
    parts = {"cutter": Cutter, "fold": Fold, "feeds": Feeds, "disc": DiscBlank, "drive": Drive, "winding": Winding}
    optional = {
        f"{part} {name}"
        for part, model in parts.items()
        for name, field in model.model_fields.items()
        if field.default is None or name in ("labels", "drawing_release", "relief_ends")
    }
    told = README[README.index("What a shop and a movement may state") : README.index("Layouts are kept for their")]

    untold = {one for one in optional if re.search(rf"\b{one.split()[1]}\b", told) is None}

    assert untold == {"fold slit_width_mm", "fold relief_width_mm"}  # sizes of the fold itself


def test_every_test_that_the_section_on_security_names_is_there() -> None:
    developers = (TOP / "DEVELOPERS.md").read_text()
    [section] = re.findall(r"## Security\n(.*?)\n## ", developers, flags=re.DOTALL)

    named = re.findall(r"`([\w/]+\.py)`: ((?:`test_\w+`(?:, )?)+)", section)

    assert len(named) >= 15
    for path, tests in named:
        text = (TOP / "tests" / path).read_text()
        assert [test for test in re.findall(r"test_\w+", tests) if f"def {test}(" not in text] == []
