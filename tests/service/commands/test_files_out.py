"""The one way in which commands write their folders: whole or not at all, cutting files last, strangers left alone."""

import errno
import fcntl
import os
from pathlib import Path
from typing import Any

import pytest

from service.commands import files_out
from service.commands.errors import CommandError
from service.commands.files_out import write_folders

FILES = {"cut.dxf": b"to cut", "told.json": b"told"}
CUTTING = ("cut.dxf", "hits.csv")


def test_cutting_files_of_an_earlier_run_go_and_all_else_stays(tmp_path: Path) -> None:
    for name in ("cut.dxf", "hits.csv", "disc.dxf", "notes.txt"):
        (tmp_path / name).write_bytes(b"earlier")

    removed = write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert removed == {tmp_path: ("hits.csv",)}
    left = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    assert left == FILES | {"disc.dxf": b"earlier", "notes.txt": b"earlier"}


def test_a_run_that_is_interrupted_leaves_no_cutting_file_beside_other_files(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "cut.dxf").write_bytes(b"earlier")
    (tmp_path / "told.json").write_bytes(b"earlier")
    moved: list[str] = []
    replace = os.replace

    def full_after_one(source: Path, target: Path) -> None:
        if moved:
            raise OSError(errno.ENOSPC, "No space left on device")
        moved.append(Path(target).name)
        replace(source, target)

    monkeypatch.setattr(os, "replace", full_after_one)

    with pytest.raises(CommandError, match=r"cannot write to .*: No space left on device"):
        write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert moved == ["told.json"]
    assert [path.name for path in tmp_path.iterdir()] == ["told.json"]


def test_a_folder_without_files_is_not_made_and_only_loses_what_is_cut(tmp_path: Path) -> None:
    (tmp_path / "1").mkdir()
    (tmp_path / "1" / "cut.dxf").write_bytes(b"earlier")

    removed = write_folders({tmp_path / "1": {}, tmp_path / "2": {}}, cutting=CUTTING)

    assert removed == {tmp_path / "1": ("cut.dxf",), tmp_path / "2": ()}
    assert not (tmp_path / "2").exists()
    assert list((tmp_path / "1").iterdir()) == []


@pytest.mark.parametrize("name", ["told.json", "hits.csv"])
def test_a_folder_where_a_file_should_stand_is_told_before_anything_is_written(tmp_path: Path, name: str) -> None:
    (tmp_path / name).mkdir()

    with pytest.raises(CommandError, match=rf"{name}' is a folder; remove it or choose another --out"):
        write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert [path.name for path in tmp_path.iterdir()] == [name]


def test_a_null_character_in_a_path_is_told() -> None:
    with pytest.raises(CommandError, match="cannot be made: embedded null"):
        write_folders({Path("a\0b"): FILES}, cutting=CUTTING)


def half_written(folder: Path) -> Path:
    """What one that was killed leaves."""
    left = folder / ".discwright-half-written-a_c45678"
    left.mkdir()
    (left / "cut.dxf").write_bytes(b"half")
    return left


def test_what_one_that_was_killed_left_half_written_goes_when_its_folder_is_written_to_again(tmp_path: Path) -> None:
    half_written(tmp_path)

    write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == FILES


@pytest.mark.parametrize(
    "name", [".discwright-notes", ".discwright-half-written-", ".discwright-half-written-of-mine", "half-written"]
)
def test_a_folder_that_another_made_is_left_alone_however_near_its_name_is(tmp_path: Path, name: str) -> None:
    (tmp_path / name).mkdir()
    (tmp_path / name / "mine.txt").write_bytes(b"mine")

    write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert (tmp_path / name / "mine.txt").read_bytes() == b"mine"


def test_a_link_by_the_name_of_a_left_folder_is_not_followed(tmp_path: Path) -> None:
    elsewhere, out = tmp_path / "elsewhere", tmp_path / "out"
    elsewhere.mkdir()
    out.mkdir()
    (elsewhere / "mine.txt").write_bytes(b"mine")
    (out / ".discwright-half-written-a_c45678").symlink_to(elsewhere)

    write_folders({out: FILES}, cutting=CUTTING)

    assert (elsewhere / "mine.txt").read_bytes() == b"mine"


def test_a_new_folder_is_not_taken_for_a_left_one_before_it_is_held(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    is_alone: list[bool] = []
    mkdtemp = files_out.tempfile.mkdtemp

    def look(**asked: Any) -> str:
        outer = os.open(tmp_path, os.O_RDONLY)
        try:
            fcntl.flock(outer, fcntl.LOCK_EX | fcntl.LOCK_NB)
            is_alone.append(False)
        except BlockingIOError:
            is_alone.append(True)
        finally:
            os.close(outer)
        return str(mkdtemp(**asked))

    monkeypatch.setattr(files_out.tempfile, "mkdtemp", look)
    write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert is_alone == [True]


def test_what_another_is_writing_at_this_moment_is_left_alone(tmp_path: Path) -> None:
    left = half_written(tmp_path)
    held = os.open(left, os.O_RDONLY)
    fcntl.flock(held, fcntl.LOCK_EX)

    write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert (left / "cut.dxf").read_bytes() == b"half"
    os.close(held)


def test_a_folder_in_which_files_are_being_written_is_held(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    held: list[bool] = []
    write_bytes = Path.write_bytes

    def look(path: Path, content: bytes) -> int:
        lock = os.open(path.parent, os.O_RDONLY)
        try:
            fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
            held.append(False)
        except BlockingIOError:
            held.append(True)
        finally:
            os.close(lock)
        return write_bytes(path, content)

    monkeypatch.setattr(Path, "write_bytes", look)
    write_folders({tmp_path: FILES}, cutting=CUTTING)

    assert held == [True, True]
