import errno
import hashlib
import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

from service.store.faults import StoreBusyError, StoreFullError
from service.store.files import ABANDONED_S, CHUNK_BYTES, S3_PIECE_BYTES, FileLostError, FileStore


@pytest.fixture(params=["folder", "bucket"])
def files(request: pytest.FixtureRequest, tmp_path: Path) -> FileStore:
    if request.param == "folder":
        return FileStore(f"file://{tmp_path}/files")
    return FileStore(f"s3://{request.getfixturevalue('bucket')}/of/the-shop")


def test_a_file_is_found_under_the_digest_of_its_bytes(files: FileStore) -> None:
    digest = files.put(b"a disc")

    assert digest == hashlib.sha256(b"a disc").hexdigest()
    assert files.read(digest) == b"a disc"


def test_the_same_file_is_kept_once(files: FileStore) -> None:
    assert files.put(b"twice") == files.put(b"twice")

    assert list(files.digests()) == [hashlib.sha256(b"twice").hexdigest()]


def test_a_part_of_a_file_is_read_without_the_rest(files: FileStore) -> None:
    content = bytes(range(256)) * (3 * CHUNK_BYTES // 256)
    digest = files.put(content)

    assert b"".join(files.chunks(digest, start=5, end=CHUNK_BYTES + 7)) == content[5 : CHUNK_BYTES + 7]
    assert b"".join(files.chunks(digest, start=len(content))) == b""


def test_a_file_that_is_not_there_says_so(files: FileStore) -> None:
    with pytest.raises(FileLostError, match="restore it from a backup"):
        files.read("0" * 64)


def test_a_file_let_go_is_gone_and_may_be_let_go_again(files: FileStore) -> None:
    digest = files.put(b"short")

    files.remove(digest)
    files.remove(digest)

    assert not files.has(digest)


def synced_folders(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """The folders that are written to disk from now on, in order."""
    seen: list[str] = []

    def seeing(handle: int, sync: Any = os.fsync) -> None:
        place = os.readlink(f"/proc/self/fd/{handle}")
        if os.path.isdir(place):
            seen.append(place)
        sync(handle)

    monkeypatch.setattr("os.fsync", seeing)
    return seen


def test_the_name_of_a_new_folder_is_on_disk_before_a_file_in_it_is_kept(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    seen = synced_folders(monkeypatch)

    files = FileStore(f"file://{tmp_path}/data/files")
    made_with_it = list(seen)
    seen.clear()
    digest = files.put(b"a disc")
    kept_in_it = list(seen)

    assert made_with_it == [str(tmp_path), f"{tmp_path}/data"]  # which hold the names data and files
    assert kept_in_it == [f"{tmp_path}/data/files", f"{tmp_path}/data/files/{digest[:2]}"]


def test_a_folder_that_another_process_has_just_made_is_put_on_disk_too_and_only_once(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    mine, others = (FileStore(f"file://{tmp_path}/files") for _ in range(2))
    digest = others.put(b"a disc")
    others.remove(digest)
    seen = synced_folders(monkeypatch)

    for _ in range(2):
        mine.put(b"a disc")
        mine.remove(digest)

    folder = f"{tmp_path}/files/{digest[:2]}"
    assert seen == [f"{tmp_path}/files", folder, folder]


@pytest.mark.parametrize(("number", "error"), [(errno.ENOSPC, StoreFullError), (errno.EIO, StoreBusyError)])
def test_a_file_that_could_not_be_written_leaves_nothing_behind(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, number: int, error: type[Exception]
) -> None:
    files = FileStore(f"file://{tmp_path}/files")

    def fails(handle: int) -> None:
        if not os.path.isdir(f"/proc/self/fd/{handle}"):
            raise OSError(number, "no")

    monkeypatch.setattr("os.fsync", fails)
    with pytest.raises(error):
        files.put(b"half")

    assert [path for path in (tmp_path / "files").rglob("*") if path.is_file()] == []


def test_an_empty_file_is_a_file(files: FileStore) -> None:
    digest = files.put(b"")

    assert (files.has(digest), files.read(digest), list(files.digests())) == (True, b"", [digest])


@pytest.mark.parametrize("byte_count", [S3_PIECE_BYTES - 1, S3_PIECE_BYTES, S3_PIECE_BYTES + 1])
def test_a_large_file_comes_in_pieces(files: FileStore, byte_count: int) -> None:
    content = os.urandom(byte_count)
    digest = files.put(content)

    pieces = list(files.chunks(digest))

    assert b"".join(pieces) == content
    assert max(map(len, pieces)) <= S3_PIECE_BYTES


def test_a_part_past_the_end_of_a_file_ends_with_it(files: FileStore) -> None:
    digest = files.put(b"0123456789")

    assert b"".join(files.chunks(digest, start=7, end=99)) == b"789"
    assert b"".join(files.chunks(digest, start=4, end=6)) == b"45"


def test_what_was_deleted_stays_noted_and_is_no_file(files: FileStore) -> None:
    assert list(files.noted()) == []

    files.note("order_1")
    files.note("order_2")
    files.note("order_1")

    assert sorted(files.noted()) == ["order_1", "order_2"]
    assert list(files.digests()) == []


@pytest.mark.parametrize("what", ["", "../order", "a/b", "order 1"])
def test_what_is_no_id_is_not_noted(files: FileStore, what: str) -> None:
    with pytest.raises(ValueError, match="is no id"):
        files.note(what)


# Writes a file as the service does, and is killed before the last of it is on the disk.
WRITES_SLOWLY = """
import os, sys, time
from service.store.files import FileStore
files = FileStore(sys.argv[1])
os.fsync = lambda handle: os.path.isdir(f"/proc/self/fd/{handle}") or (print("half-way", flush=True), time.sleep(60))
files.put(b"x" * 1_000_000)
"""


def test_a_file_left_half_written_by_a_killed_process_is_never_seen(tmp_path: Path) -> None:
    url = f"file://{tmp_path}/files"
    digest = hashlib.sha256(b"x" * 1_000_000).hexdigest()
    process = subprocess.Popen([sys.executable, "-c", WRITES_SLOWLY, url], stdout=subprocess.PIPE, text=True)
    files = FileStore(url)
    with process:
        assert process.stdout is not None
        assert process.stdout.readline() == "half-way\n"
        assert not files.has(digest)  # while it is written
        process.send_signal(signal.SIGKILL)
    [part] = [path for path in (tmp_path / "files").rglob("*") if path.is_file()]

    assert process.returncode == -signal.SIGKILL
    assert (files.has(digest), list(files.digests())) == (False, [])
    with pytest.raises(FileLostError):
        files.read(digest)
    assert files.sweep_parts() == 0  # it might be another's that is still writing
    os.utime(part, (time.time() - ABANDONED_S - 1,) * 2)
    assert files.sweep_parts() == 1
    assert files.put(b"x" * 1_000_000) == digest
    assert files.read(digest) == b"x" * 1_000_000


def test_what_lies_among_the_notes_and_is_none_is_passed_over(tmp_path: Path) -> None:
    files = FileStore(f"file://{tmp_path}")
    files.note("order_1")
    [note] = [path for path in tmp_path.rglob("order_1*") if path.is_file()]
    (note.parent / ".swp").write_bytes(b"")

    assert list(files.noted()) == ["order_1"]
