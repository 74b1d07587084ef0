import io
import zipfile
from collections.abc import Iterator

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.api.zip_stream import Packed, zip_stream

PIECE = 64 * 1024


def archive_of(files: dict[str, bytes]) -> bytes:
    return b"".join(zip_stream(Packed(name=name, pieces=[content]) for name, content in files.items()))


@given(
    st.dictionaries(st.from_regex(r"[a-z]{1,8}/[a-z]{1,8}\.dxf", fullmatch=True), st.binary(max_size=2000), max_size=6)
)
def test_what_is_packed_comes_out_as_it_was(files: dict[str, bytes]) -> None:
    with zipfile.ZipFile(io.BytesIO(archive_of(files))) as archive:
        assert archive.testzip() is None
        assert {name: archive.read(name) for name in archive.namelist()} == files


def test_the_same_files_give_the_same_archive() -> None:
    assert archive_of({"a": b"1", "b": b"2"}) == archive_of({"a": b"1", "b": b"2"})


def test_no_more_than_a_piece_is_held() -> None:
    held: list[int] = []

    def pieces() -> Iterator[bytes]:
        for number in range(200):  # 12.5 MiB that do not pack: each piece differs
            yield bytes((number * 31 + byte * byte) % 251 for byte in range(256)) * (PIECE // 256)

    for out in zip_stream([Packed(name="large", pieces=pieces())]):
        held.append(len(out))

    assert max(held) < 4 * PIECE


def test_a_file_is_read_only_when_its_turn_comes() -> None:
    def fails() -> Iterator[bytes]:
        raise OSError("gone")
        yield b""

    stream = zip_stream([Packed(name="a", pieces=[b"x"]), Packed(name="b", pieces=fails())])

    assert next(stream).startswith(b"PK")
    with pytest.raises(OSError, match="gone"):
        list(stream)
