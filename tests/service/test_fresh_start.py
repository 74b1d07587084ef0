"""From nothing to demo discs, and to an installed command: what a user does on a fresh machine."""

import os
import re
import shutil
import socket
import subprocess
import sys
from pathlib import Path

import pytest

from layout.documents import shipped_cutter
from layout.file_names import files_for
from service.settings import every_variable

TOP = Path(__file__).parents[2]
LASER_FILES = set(files_for(shipped_cutter("fibre-laser")))
MOVEMENTS = {"fernhollow-31", "mossbrook-67", "tarnlight-17"}
Ended = subprocess.CompletedProcess[str]


@pytest.fixture(scope="module")
def copy(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The project in a folder of its own, with no environment in it."""
    folder = tmp_path_factory.mktemp("fresh") / "discwright"
    folder.mkdir()
    for part in ("layout", "service", "docker"):
        shutil.copytree(TOP / part, folder / part, ignore=shutil.ignore_patterns("__pycache__", "*.egg-info"))
    for name in ("pyproject.toml", "README.md"):
        shutil.copy(TOP / name, folder)
    return folder


def run(command: list[str], folder: Path, **more: str) -> Ended:
    others = ("PYTHONPATH", "VIRTUAL_ENV", "PYTHONDONTWRITEBYTECODE")
    surroundings = {name: value for name, value in os.environ.items() if name not in others}
    surroundings["PIP_NO_COMPILE"] = "yes"  # what is imported is compiled then: a small part of what is installed
    return subprocess.run(
        command, cwd=folder, env=surroundings | more, capture_output=True, text=True, check=False, timeout=600
    )


def run_up(copy: Path) -> Ended:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    return run(["sh", "service/up", "--once"], copy, PORT=str(port), PYTHON=sys.executable)


@pytest.fixture(scope="module")
def first_start(copy: Path) -> Ended:
    return run_up(copy)


def test_a_fresh_start_makes_a_good_disc_for_every_movement_and_ends(first_start: Ended, copy: Path) -> None:
    assert first_start.returncode == 0, first_start.stderr
    assert "installing the pinned packages" in first_start.stdout
    assert first_start.stdout.count("good to cut") == 3
    assert "NOT GOOD" not in first_start.stdout
    assert len(re.findall(r"kept \d+ of ", first_start.stdout)) == 3
    for movement in MOVEMENTS:
        assert {path.name for path in (copy / "demo" / movement).iterdir()} == set(
            files_for(shipped_cutter("fibre-laser"))
        )
        assert f"written to demo/{movement}" in first_start.stdout


def test_a_second_start_installs_nothing(first_start: Ended, copy: Path) -> None:
    assert first_start.returncode == 0

    second = run_up(copy)

    assert second.returncode == 0, second.stderr
    assert "installing" not in second.stdout
    assert second.stdout.count("good to cut") == 3


def test_an_installed_command_needs_no_sources(first_start: Ended, copy: Path, tmp_path: Path) -> None:
    assert first_start.returncode == 0
    python = str(copy / ".venv/bin/python")
    tune = shutil.copy(copy / "service/demo/tune.mid", tmp_path)
    install = ["-m", "pip", "install", "--no-deps", "--no-build-isolation", "--force-reinstall", "."]

    installed = run([python, *install], copy)
    for part in ("layout", "service"):
        (copy / part).rename(copy / f"{part}.away")
    arguments = ["plan", tune, "--movement", "fernhollow-31", "--out", "made"]
    planned = run([str(copy / ".venv/bin/discwright"), *arguments], tmp_path)

    assert installed.returncode == 0, installed.stderr
    assert planned.returncode == 0, planned.stderr
    assert {path.name for path in (tmp_path / "made").iterdir()} == LASER_FILES


def test_the_image_copies_what_there_is_and_starts_the_app_that_is_there() -> None:
    recipe = (TOP / "docker/Dockerfile").read_text()

    copied = [name for line in re.findall(r"^COPY (?!--)(.+) \S+$", recipe, re.MULTILINE) for name in line.split()]
    kept = {line.removeprefix("!") for line in (TOP / ".dockerignore").read_text().splitlines() if line[0] == "!"}
    assert set(copied) == {"docker/requirements-many.txt", "pyproject.toml", "README.md", "layout", "service"} == kept
    assert all((TOP / name).exists() for name in copied)
    assert re.findall(r"^(?:ENTRYPOINT|CMD) (.+)$", recipe, re.MULTILINE) == [
        '["discwright"]',
        '["serve", "--host", "0.0.0.0"]',
    ]
    assert re.search(r"^USER [1-9]\d*$", recipe, re.MULTILINE)
    assert "--require-hashes" in recipe


def test_the_example_of_the_settings_names_each_of_them_once_with_its_default() -> None:
    lines = (TOP / "docker/example.env").read_text().splitlines()
    of_others = {"POSTGRES_PASSWORD", "PORT", "AWS_ENDPOINT_URL", "AWS_REGION", "AWS_ACCESS_KEY_ID"}
    of_others.add("AWS_SECRET_ACCESS_KEY")

    told = [re.fullmatch(r"#?([A-Z][A-Z0-9_]*)=(.*)", line) for line in lines if not line.startswith(("# ", "## "))]
    read = {found[1]: found[2] for found in told if found}

    assert len(read) == sum(found is not None for found in told)
    assert set(read) - of_others == {one.name for one in every_variable()}
    assert {one.name: one.default for one in every_variable() if " " not in one.default}.items() <= read.items()
