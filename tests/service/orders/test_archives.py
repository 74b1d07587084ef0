import io
import struct
import tracemalloc
import zipfile
import zlib
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.limits import Limits
from service.orders.archives import ArchiveError, open_archive

LIMITS = replace(Limits(), upload_bytes=1000, run_orders=100, run_entries=200, run_unpacked_bytes=100_000_000)


def packed(files: dict[str, bytes]) -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in files.items():
            archive.writestr(name, content)
    return out.getvalue()


def names_in(content: bytes, limits: Limits = LIMITS) -> list[str]:
    with open_archive(content, limits) as archive:
        return archive.tune_names()


def tune_in(content: bytes, name: str) -> bytes:
    with open_archive(content, LIMITS) as archive:
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
        names_in(packed({f"{number}.mid": b"" for number in range(3)}), replace(LIMITS, run_orders=2))


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

    for read in (names_in, lambda content: tune_in(content, "a.mid")):
        with pytest.raises(ArchiveError, match="password"):
            read(bytes(content))


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


@pytest.mark.parametrize("method", [zipfile.ZIP_BZIP2, zipfile.ZIP_LZMA])
def test_a_way_of_packing_that_unpacks_without_end_is_refused(method: int) -> None:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", method) as archive:
        archive.writestr("a.mid", bytes(30_000_000))  # packed by bzip2: 30 bytes, unpacked whole by the library
    content = out.getvalue()

    tracemalloc.start()
    for read in (names_in, lambda content: tune_in(content, "a.mid")):
        with pytest.raises(ArchiveError, match=f"packed by method {method}; use plain ZIP"):
            read(content)
    _, peak_bytes = tracemalloc.get_traced_memory()
    tracemalloc.stop()

    assert peak_bytes < 1_000_000


def test_tunes_that_unpack_to_too_much_together_are_refused_before_any_is_unpacked() -> None:
    content = packed({f"{number}.mid": bytes(900) for number in range(5)})

    with pytest.raises(ArchiveError, match="its tunes unpack to 4500 bytes; at most 4000 are taken"):
        names_in(content, replace(LIMITS, run_unpacked_bytes=4000))


def test_an_archive_of_a_million_entries_is_refused_before_they_are_read() -> None:
    entry = packed({"a.mid": b""})
    directory = entry[entry.index(b"PK\x01\x02") : entry.index(b"PK\x05\x06")] * 500_000  # 25 MB

    content = directory + entry[entry.index(b"PK\x05\x06") :]

    tracemalloc.start()
    with pytest.raises(ArchiveError, match="holds 500000 files and folders; at most 200 are taken"):
        names_in(content)
    _, peak_bytes = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert peak_bytes < 1_000_000


def test_an_archive_within_an_archive_is_no_tune() -> None:
    inner = packed({"inner.mid": b"x"})

    assert names_in(packed({"a.mid": b"1", "more.zip": inner})) == ["a.mid"]
    with pytest.raises(ArchiveError, match=r"there is no 'inner\.mid' in the archive"):
        tune_in(packed({"a.mid": b"1", "more.zip": inner}), "inner.mid")


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9])
def test_a_truncated_archive_is_none(share: float) -> None:
    content = packed({f"{number}.mid": bytes(range(200)) for number in range(5)})

    with pytest.raises(ArchiveError, match="no ZIP archive that can be read"):
        names_in(content[: int(share * len(content))])


HUGE = 2**63 - 1


@pytest.mark.parametrize("lie", [{"size": HUGE}, {"begins": HUGE}, {"count": HUGE}, {"begins": 0}])
def test_an_archive_that_lies_in_sixty_four_bits_gives_what_is_there_or_is_refused(lie: dict[str, int]) -> None:
    # APPNOTE 4.3.14 and 4.3.15: the record at the end of large archives, and what says where it is
    content = packed({"a.mid": b"x"})
    begins, end = content.index(b"PK\x01\x02"), content.index(b"PK\x05\x06")
    said = {"size": end - begins, "begins": begins, "count": 1} | lie
    counts = (said["count"], said["count"], said["size"], said["begins"])
    record = b"PK\x06\x06" + struct.pack("<QHHIIQQQQ", 44, 45, 45, 0, 0, *counts)
    locator = b"PK\x06\x07" + struct.pack("<IQI", 0, end, 1)
    last = b"PK\x05\x06" + struct.pack("<HHHHIIH", 0, 0, 0xFFFF, 0xFFFF, 0xFFFFFFFF, 0xFFFFFFFF, 0)
    lying = content[:end] + record + locator + last

    try:
        assert names_in(lying) == ["a.mid"]
        assert tune_in(lying, "a.mid") == b"x"
    except ArchiveError as refusal:
        told = str(refusal)
        assert "count" not in lie  # which nobody needs
        assert "no ZIP archive that can be read" in told or "'a.mid' cannot be unpacked" in told


@pytest.mark.parametrize("offset", [2**31, 2**63, 2**64 - 1])
def test_a_tune_said_to_stand_beyond_the_archive_is_refused(offset: int) -> None:
    content = packed({"a.mid": b"x"})
    begins, end = content.index(b"PK\x01\x02"), content.index(b"PK\x05\x06")
    entry = bytearray(content[begins:end])
    entry[42:46] = b"\xff" * 4  # the place is told in the extra field (APPNOTE 4.5.3)
    entry[30:32] = struct.pack("<H", 12)
    directory = bytes(entry) + struct.pack("<HHQ", 1, 8, offset)
    last = b"PK\x05\x06" + struct.pack("<HHHHIIH", 0, 0, 1, 1, len(directory), begins, 0)
    lying = content[:begins] + directory + last

    assert names_in(lying) == ["a.mid"]
    with pytest.raises(ArchiveError, match=r"'a\.mid' cannot be unpacked"):
        tune_in(lying, "a.mid")


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
