import errno
import hashlib
from pathlib import Path
from typing import Any

import pytest

from service.store.faults import StoreBusyError, StoreFullError
from service.store.files import CHUNK_BYTES, FileLostError, FileStore


@pytest.fixture
def files(tmp_path: Path) -> FileStore:
    return FileStore(f"file://{tmp_path}/files")


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


@pytest.mark.parametrize(("number", "error"), [(errno.ENOSPC, StoreFullError), (errno.EIO, StoreBusyError)])
def test_a_file_that_could_not_be_written_leaves_nothing_behind(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, number: int, error: type[Exception]
) -> None:
    files = FileStore(f"file://{tmp_path}/files")

    def fails(_handle: Any) -> None:
        raise OSError(number, "no")

    monkeypatch.setattr("os.fsync", fails)
    with pytest.raises(error):
        files.put(b"half")

    assert [path for path in (tmp_path / "files").rglob("*") if path.is_file()] == []
