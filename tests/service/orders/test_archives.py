import io
import zipfile
import zlib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.orders.archives import ArchiveError, open_archive


def packed(files: dict[str, bytes]) -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in files.items():
            archive.writestr(name, content)
    return out.getvalue()


def names_in(content: bytes, most: int = 100) -> list[str]:
    with open_archive(content, most_bytes=1000) as archive:
        return archive.tune_names(most=most)


def tune_in(content: bytes, name: str, most_bytes: int = 1000) -> bytes:
    with open_archive(content, most_bytes=most_bytes) as archive:
        return archive.tune(name)


def test_tunes_are_found_in_the_order_of_the_archive_and_all_else_is_left_aside() -> None:
    content = packed({"b.mid": b"1", "folder/a.MIDI": b"2", "read me.txt": b"3", ".hidden.mid": b"4"})

    assert names_in(content) == ["b.mid", "folder/a.MIDI"]
    assert tune_in(content, "folder/a.MIDI") == b"2"


def test_an_archive_that_is_none_says_so() -> None:
    with pytest.raises(ArchiveError, match="no ZIP archive that can be read"):
        names_in(b"MThd")


def test_an_archive_without_a_tune_says_how_tunes_are_known() -> None:
    with pytest.raises(ArchiveError, match=r"no name in it ends in \.mid or \.midi"):
        names_in(packed({"a.txt": b"x"}))


def test_more_tunes_than_are_taken_are_refused() -> None:
    with pytest.raises(ArchiveError, match="holds 3 tunes; at most 2 are taken"):
        names_in(packed({f"{number}.mid": b"" for number in range(3)}), most=2)


def test_a_tune_that_unpacks_to_more_than_it_may_is_refused_however_small_it_is_packed() -> None:
    bomb = packed({"bomb.mid": bytes(50_000_000)})  # packs to about 50 kB

    assert len(bomb) < 100_000
    with pytest.raises(ArchiveError, match=r"'bomb\.mid' is larger than 1000 bytes"):
        tune_in(bomb, "bomb.mid")


def test_a_tune_that_lies_about_its_size_is_refused() -> None:
    content = bytearray(packed({"a.mid": b"x" * 5000}))
    at = content.rindex(b"PK\x01\x02") + 24  # the unpacked size in the central directory (APPNOTE 4.3.12)
    content[at : at + 4] = (10).to_bytes(4, "little")

    with pytest.raises(ArchiveError, match=r"cannot be unpacked|larger than"):
        tune_in(bytes(content), "a.mid")


def test_a_name_that_leads_elsewhere_is_a_label_alone() -> None:
    content = packed({"../../etc/a.mid": b"x", "/abs.mid": b"y", "C:\\c.mid": b"z"})

    assert tune_in(content, "../../etc/a.mid") == b"x"  # nothing is written under any name


def test_a_tune_packed_with_a_password_is_refused() -> None:
    content = bytearray(packed({"a.mid": b"x"}))
    for sign, offset in ((b"PK\x03\x04", 6), (b"PK\x01\x02", 8)):  # the flags, locally and in the directory
        content[content.index(sign) + offset] |= 1

    with pytest.raises(ArchiveError, match="password"):
        tune_in(bytes(content), "a.mid")


@pytest.mark.parametrize("name", ["x" * 197 + ".mid", "a\nb.mid", "\u202egnp.mid"])
def test_a_name_that_cannot_be_shown_is_refused(name: str) -> None:
    with pytest.raises(ArchiveError, match="too long or cannot be shown"):
        names_in(packed({name: b"x"}))


def test_a_name_that_comes_twice_is_refused() -> None:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as archive:
        archive.writestr("a.mid", b"1")
        with pytest.warns(UserWarning, match="Duplicate"):
            archive.writestr("a.mid", b"2")

    with pytest.raises(ArchiveError, match=r"1 name\(s\) come twice"):
        names_in(out.getvalue())


@given(st.data())
def test_a_damaged_archive_is_read_or_refused_in_our_words(data: st.DataObject) -> None:
    content = bytearray(packed({"a.mid": bytes(range(200)), "b.mid": b"yy"}))
    for _ in range(data.draw(st.integers(1, 6))):
        content[data.draw(st.integers(0, len(content) - 1))] = data.draw(st.integers(0, 255))

    try:
        for name in names_in(bytes(content)):
            tune_in(bytes(content), name)
    except ArchiveError:
        pass
    except zlib.error:  # would be told to the sender as a fault of ours
        pytest.fail("a fault of the packing got out")
