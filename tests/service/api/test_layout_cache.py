import errno
import os
import re
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import pytest

from service.api import layout_cache
from service.api.layout_cache import AT_HAND, KeptLayout, LayoutCache
from service.documents import Inputs, Shipped, Source, Written
from service.limits import Limits
from service.settings import PlaceSettings, ServiceSettings, SettingsError
from service.store.faults import StoreFullError

FAR_PAST_NS = 1_000_000_000  # one second after the epoch: older than anything written now


def settings(folder: Path, limits: Limits | None = None) -> ServiceSettings:
    return ServiceSettings(places=PlaceSettings(cache_directory=folder / "layouts"), limits=limits or Limits())


def layout(number: int, *, size_bytes: int = 10, movement: Source | None = None) -> KeptLayout:
    """A layout whose file cannot be packed smaller than its size."""
    inputs = Inputs(
        tune=b"MThd\xff", movement=movement or Shipped(id="tarnlight-17"), cutter=Shipped(id="x"), settings=b"{}"
    )
    return KeptLayout(
        fingerprint=f"{number:016x}",
        title="Dünung",
        disc_number=2,
        disc_count=3,
        good_to_cut=True,
        inputs=inputs,
        files={"disc.dxf": os.urandom(size_bytes)},
    )


def kept_numbers(cache: LayoutCache, most: int = 20) -> list[int]:
    """Which of the layouts 0 … most are kept, without renewing any."""
    names = [path.name for path in cache._folder.iterdir()]
    return [number for number in range(most) if any(name.startswith(f"{number:016x}") for name in names)]


def put_in_order(cache: LayoutCache, *layouts: KeptLayout) -> None:
    """Keep layouts so that each is older than the next by a second, whatever the clock's grain."""
    for place, each in enumerate(layouts):
        cache.put(each)
        moment_ns = FAR_PAST_NS * (place + 1)
        if cache._path(each.fingerprint).exists():
            os.utime(cache._path(each.fingerprint), ns=(moment_ns, moment_ns))


@pytest.mark.parametrize("movement", [Shipped(id="tarnlight-17"), Written(text=b"\xff not even JSON")])
def test_what_is_kept_comes_back_as_it_was(tmp_path: Path, movement: Source) -> None:
    cache = LayoutCache(settings(tmp_path))
    kept = layout(1, movement=movement)

    cache.put(kept)

    assert cache.get(kept.fingerprint) == kept


def test_what_was_never_kept_is_not_there(tmp_path: Path) -> None:
    assert LayoutCache(settings(tmp_path)).get("0" * 16) is None


def test_the_least_recently_used_layout_goes_where_there_are_too_many(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path, Limits(cache_layouts=3)))
    put_in_order(cache, layout(0), layout(1), layout(2))
    cache.get(layout(0).fingerprint)  # a look renews it

    cache.put(layout(3))

    assert kept_numbers(cache) == [0, 2, 3]


def test_the_least_recently_used_layouts_go_where_they_take_too_much_room(tmp_path: Path) -> None:
    # Each takes 10,000 bytes and under 1,000 of archive: two fit into 25,000, three do not.
    cache = LayoutCache(settings(tmp_path, Limits(cache_bytes=25_000)))
    put_in_order(cache, layout(0, size_bytes=10_000), layout(1, size_bytes=10_000))

    cache.put(layout(2, size_bytes=10_000))

    assert kept_numbers(cache) == [1, 2]


def test_the_layout_just_kept_stays_whatever_its_size(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path, Limits(cache_bytes=25_000)))
    put_in_order(cache, layout(0), layout(1, size_bytes=30_000))

    assert kept_numbers(cache) == [1]


def test_a_damaged_file_is_removed_and_counts_as_not_kept(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path))
    cache.put(layout(1))
    path = cache._path(layout(1).fingerprint)
    path.write_bytes(path.read_bytes()[:-30])

    assert cache.get(layout(1).fingerprint) is None
    assert not path.exists()


def test_a_file_of_which_any_one_byte_is_damaged_is_no_failure(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path))
    cache.put(layout(1))
    path = cache._path(layout(1).fingerprint)
    whole = path.read_bytes()

    gone = 0
    for place in range(len(whole)):
        path.write_bytes(whole[:place] + bytes([whole[place] ^ 0xFF]) + whole[place + 1 :])
        kept = LayoutCache(settings(tmp_path)).get(layout(1).fingerprint)
        gone += kept is None
        assert kept is not None or not path.exists()

    assert gone > len(whole) / 4  # what tells nothing, such as a moment or a permission, may be damaged


def test_a_file_half_written_by_a_stopped_worker_goes_after_a_while(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path))
    old, fresh = tmp_path / "layouts" / "a.part", tmp_path / "layouts" / "b.part"
    for part in (old, fresh):
        part.write_bytes(b"half")
    os.utime(old, (time.time() - 3700, time.time() - 3700))  # the limit is 3,600 s

    cache.put(layout(1))

    assert (old.exists(), fresh.exists()) == (False, True)


@pytest.mark.parametrize(
    ("number", "kind", "told"),
    [
        (errno.ENOSPC, StoreFullError, "^there is no room left in the folder of layouts$"),
        (errno.EDQUOT, StoreFullError, "^there is no room left in the folder of layouts$"),
        (errno.EACCES, PermissionError, "it failed"),
    ],
)
def test_a_failed_write_leaves_nothing_behind(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, number: int, kind: type[Exception], told: str
) -> None:
    def fails(*_: object) -> None:
        raise OSError(number, "it failed")

    cache = LayoutCache(settings(tmp_path))
    monkeypatch.setattr(os, "replace", fails)

    with pytest.raises(kind, match=told):
        cache.put(layout(1))
    assert list((tmp_path / "layouts").iterdir()) == []


def test_what_another_worker_puts_in_the_place_of_a_file_is_given(tmp_path: Path) -> None:
    cache, other = LayoutCache(settings(tmp_path)), LayoutCache(settings(tmp_path))
    before, after = layout(1), layout(1)  # of one fingerprint and size, as of a search that time stopped
    cache.put(before)
    assert cache.get(before.fingerprint) == before

    other.put(after)

    assert cache.get(before.fingerprint) == after != before


def test_a_layout_at_hand_that_another_worker_lets_go_or_that_is_damaged_is_not_given(tmp_path: Path) -> None:
    cache, other = LayoutCache(settings(tmp_path)), LayoutCache(settings(tmp_path))
    for number in (1, 2):
        cache.put(layout(number))
        assert cache.get(layout(number).fingerprint) is not None

    other.let_go(layout(1).fingerprint)
    cache._path(layout(2).fingerprint).write_bytes(b"PK of old")

    assert cache.get(layout(1).fingerprint) is None
    assert cache.get(layout(2).fingerprint) is None


def test_a_layout_at_hand_is_not_read_again(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    cache = LayoutCache(settings(tmp_path))
    kept = layout(1)
    put_in_order(cache, kept)
    cache.get(kept.fingerprint)  # it is old, so this look renews it
    monkeypatch.setattr(layout_cache, "_unpacked", lambda _: pytest.fail("read again"))

    again = cache.get(kept.fingerprint)

    assert again == kept


def test_looks_renew_a_file_every_second_and_not_each_time(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path))
    put_in_order(cache, layout(1))
    path = cache._path(layout(1).fingerprint)

    cache.get(layout(1).fingerprint)
    first_ns = path.stat().st_mtime_ns
    cache.get(layout(1).fingerprint)
    second_ns = path.stat().st_mtime_ns
    os.utime(path, ns=(first_ns - 1_100_000_000, first_ns - 1_100_000_000))  # as if 1.1 s had passed
    cache.get(layout(1).fingerprint)

    assert first_ns == second_ns > FAR_PAST_NS
    assert path.stat().st_mtime_ns > first_ns


def test_so_many_layouts_are_at_hand_and_no_more(tmp_path: Path) -> None:
    cache = LayoutCache(settings(tmp_path))
    for number in range(AT_HAND + 3):
        cache.put(layout(number))
        cache.get(layout(number).fingerprint)

    assert len(cache._at_hand) == AT_HAND


def test_another_program_s_layouts_are_not_given_out(tmp_path: Path) -> None:
    cache, other = LayoutCache(settings(tmp_path)), LayoutCache(settings(tmp_path))
    other.program = "0ther000"
    other.put(layout(1))

    assert cache.get(layout(1).fingerprint) is None
    assert re.fullmatch("[0-9a-f]{8}", cache.program)


def test_of_what_other_programs_kept_the_last_is_found_and_no_other_owner_s(tmp_path: Path) -> None:
    cache, older, old = (LayoutCache(settings(tmp_path)) for _ in range(3))
    older.program, old.program = "00000001", "00000002"
    put_in_order(old, layout(1))
    older.put(replace(layout(1), title="Older"))  # of an earlier program, yet used later
    old.put(replace(layout(1), owner_id="owner_web"))  # and this later still

    found, of_owner = (cache.earlier(layout(1).fingerprint, owner) for owner in (None, "owner_web"))

    assert found is not None
    assert of_owner is not None
    assert (found.title, found.owner_id, of_owner.title, of_owner.owner_id) == ("Older", None, "Dünung", "owner_web")
    assert cache.earlier(layout(1).fingerprint, "owner_other") is None
    assert cache.earlier(layout(2).fingerprint) is None


WORKER = """
import os, sys
from pathlib import Path
from service.api.layout_cache import KeptLayout, LayoutCache
from service.documents import Inputs, Shipped
from service.limits import Limits
from service.settings import PlaceSettings, ServiceSettings

folder, first = Path(sys.argv[1]), int(sys.argv[2])
cache = LayoutCache(ServiceSettings(places=PlaceSettings(cache_directory=folder), limits=Limits(cache_layouts=5)))
inputs = Inputs(tune=b"MThd", movement=Shipped(id="x"), cutter=Shipped(id="x"), settings=b"{}")
for turn in range(150):
    fingerprint = f"{(first + turn) % 8:016x}"
    files = {"disc.dxf": os.urandom(50_000)}
    told = {"fingerprint": fingerprint, "title": "t", "disc_number": 1, "disc_count": 1, "good_to_cut": True}
    cache.put(KeptLayout(**told, inputs=inputs, files=files))
    seen = cache.get(f"{(first + 2 * turn) % 8:016x}")
    assert seen is None or len(seen.files["disc.dxf"]) == 50_000
"""


def test_two_workers_at_once_never_see_half_a_layout(tmp_path: Path) -> None:
    folder = tmp_path / "layouts"
    commands = [[sys.executable, "-c", WORKER, str(folder), first] for first in ("0", "3")]

    workers = [subprocess.Popen(command, stderr=subprocess.PIPE, text=True) for command in commands]
    said = [worker.communicate(timeout=60)[1] for worker in workers]

    # A damaged file would be told on stderr as it is removed.
    assert said == ["", ""]
    assert [worker.returncode for worker in workers] == [0, 0]
    assert len(list(folder.iterdir())) <= 6  # five, and one that the other worker just kept


def test_the_folder_is_its_owner_s_alone(tmp_path: Path) -> None:
    LayoutCache(settings(tmp_path))

    assert (tmp_path / "layouts").stat().st_mode & 0o777 == 0o700


def test_a_folder_that_others_may_write_to_is_refused(tmp_path: Path) -> None:
    (tmp_path / "layouts").mkdir()
    (tmp_path / "layouts").chmod(0o777)

    with pytest.raises(SettingsError, match="layouts, which others own or may write to; set DISCWRIGHT_CACHE"):
        LayoutCache(settings(tmp_path))


def test_a_link_in_place_of_the_folder_is_refused(tmp_path: Path) -> None:
    (tmp_path / "elsewhere").mkdir()
    (tmp_path / "layouts").symlink_to(tmp_path / "elsewhere")

    with pytest.raises(SettingsError, match="others own or may write to"):
        LayoutCache(settings(tmp_path))


def test_a_file_in_place_of_the_folder_is_refused(tmp_path: Path) -> None:
    (tmp_path / "layouts").write_text("")

    with pytest.raises(SettingsError, match=r"cannot be kept in .* \(File exists\)"):
        LayoutCache(settings(tmp_path))


def test_a_layout_that_another_worker_lets_go_meanwhile_is_passed_over(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    cache = LayoutCache(settings(tmp_path, Limits(cache_layouts=2)))
    put_in_order(cache, layout(1), layout(2))
    iterdir = Path.iterdir
    monkeypatch.setattr(Path, "iterdir", lambda folder: [folder / "gone.zip", *iterdir(folder)])

    cache.put(layout(3))

    monkeypatch.undo()
    assert kept_numbers(cache) == [2, 3]


def test_a_folder_that_cannot_be_written_to_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(os, "access", lambda *_: False)  # root may write everywhere

    with pytest.raises(SettingsError, match="which cannot be written to; set DISCWRIGHT_CACHE to a folder of your own"):
        LayoutCache(settings(tmp_path))
