"""`discwright keys`: makes, lists and revokes on the machine itself; a secret is shown once."""

import json
import re
from datetime import timedelta
from typing import Any

import pytest

from service.access.first_start import FirstKey
from service.access.keys import find_key, note_use
from service.access.scopes import Scope
from service.commands import keys
from service.moments import utc_now
from service.parts import Parts
from service.store.faults import StoreBusyError
from tests.service.commands.conftest import Discwright
from tests.service.conftest import each_case_on_both

SECRET = re.compile(r"dw_[A-Za-z0-9_-]{43}")
NEVER_MADE = "key_" + 32 * "0"


@pytest.fixture
def run(
    any_parts: Parts, discwright: Discwright, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Any:
    """Runs the command on the database of `any_parts`; gives the code and what it wrote."""
    monkeypatch.setenv("DISCWRIGHT_DATA", str(any_parts.settings.places.data_directory))
    monkeypatch.setenv("DATABASE_URL", any_parts.settings.database_url)

    def ran(*arguments: str) -> tuple[int, str, str]:
        code = discwright("keys", *arguments)
        written = capsys.readouterr()
        return code, written.out, written.err

    return ran


def test_a_key_is_made_and_its_secret_shown_once(run: Any, any_parts: Parts) -> None:
    code, out, _ = run("add", "web shop", "--owner", "Bellgrove", "--scopes", "order,read")
    listed = run("list")[1]

    (secret,) = SECRET.findall(out)
    found = find_key(any_parts.store, secret)
    assert code == 0
    assert found is not None
    assert (found.asker.is_shop, found.asker.is_test) == (False, False)
    assert found.asker.scopes == {Scope.READ, Scope.ORDER}
    assert out.splitlines() == [
        f"{found.asker.key_id}: a key of Bellgrove, scopes read, order",
        f"  {secret}",
        "it is shown this once and kept nowhere; programs send it as  Authorization: Bearer KEY",
    ]
    assert secret not in listed


def test_without_an_owner_a_key_is_the_shop_s(run: Any, any_parts: Parts) -> None:
    out = run("add", "bench", "--scopes", "all", "--test", "--json")[1]

    told = json.loads(out)
    found = find_key(any_parts.store, told["secret"])
    assert found is not None
    assert (found.asker.is_shop, found.asker.is_test) == (True, True)
    assert told["scopes"] == list(Scope)
    assert told["owner"]["title"] == "the shop"


def test_one_owner_has_as_many_keys_as_it_wants(run: Any) -> None:
    owners = {
        json.loads(run("add", title, "--owner", "Bellgrove", "--scopes", "read", "--json")[1])["owner"]["id"]
        for title in ("a", "b", "c")
    }

    assert len(owners) == 1


def test_keys_are_listed_for_people_and_for_programs(run: Any) -> None:
    first = json.loads(run("add", "web shop", "--owner", "Bellgrove", "--scopes", "read,order", "--json")[1])
    second = json.loads(run("add", "bench", "--scopes", "read", "--test", "--json")[1])
    run("revoke", first["id"])

    lines = run("list")[1].splitlines()
    told = json.loads(run("list", "--json")[1])
    of_shop = json.loads(run("list", "--owner", "the shop", "--json")[1])

    today = told[0]["revoked_at"][:10]
    assert [re.split(r"\s{2,}", line) for line in lines] == [
        ["ID", "OWNER", "TITLE", "SCOPES", "LAST USED", "STATE"],
        [first["id"], "Bellgrove", "web shop", "read,order", "never", f"revoked {today}"],
        [second["id"], "the shop", "bench", "read", "never", "in force, for tests"],
    ]
    assert [key["id"] for key in told] == [first["id"], second["id"]]
    assert all("secret" not in key for key in told)
    assert [key["id"] for key in of_shop] == [second["id"]]


def test_where_there_are_no_keys_the_list_says_how_to_make_one(run: Any) -> None:
    assert run("list") == (0, "there are no keys yet; `discwright keys add` makes one\n", "")
    assert run("list", "--owner", "Bellgrove")[1] == (
        "there are no keys of an owner called 'Bellgrove'; `discwright keys add` makes one\n"
    )
    assert json.loads(run("list", "--json")[1]) == []


def test_a_revoked_key_opens_nothing(run: Any, any_parts: Parts) -> None:
    made = json.loads(run("add", "web shop", "--scopes", "read", "--json")[1])

    code, out, _ = run("revoke", made["id"])
    told = json.loads(run("revoke", made["id"], "--json")[1])

    assert (code, out) == (0, f"{made['id']} (web shop, of the shop) opens nothing any more\n")
    assert told["revoked_at"] is not None
    assert find_key(any_parts.store, made["secret"]) is None


@each_case_on_both("what text it can be asked for")
@pytest.mark.parametrize("key", [NEVER_MADE, "", "web shop", "\x00"])
def test_a_key_that_never_was_is_a_clear_error(run: Any, key: str) -> None:
    code, out, err = run("revoke", key)

    assert (code, out) == (2, "")
    assert err == f"discwright: there is no key {key!r}; `discwright keys list` shows those there are\n"


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (("add", "x"), "the following arguments are required: --scopes"),
        (("add", "x", "--scopes", "read,write"), "'write' is no scope; scopes are read, order, release, movements,"),
        (("add", "x", "--scopes", ""), "'' is no scope"),
        (("add", "x", "--scopes", "read,all"), "'all' is no scope"),
        (("add", " ", "--scopes", "read"), "a title is 1 to 200 characters that can be shown on one line; this has 0"),
        (("add", "x", "--scopes", "read", "--owner", "a\nb"), "a title is 1 to 200 characters"),
        ((), "the following arguments are required: ACTION"),
        (("remove", "x"), "invalid choice: 'remove'"),
    ],
)
def test_what_cannot_be_asked_is_a_clear_error_in_one_line(
    parts: Parts,
    discwright: Discwright,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    arguments: tuple[str, ...],
    told: str,
) -> None:
    monkeypatch.setenv("DISCWRIGHT_DATA", str(parts.settings.places.data_directory))
    monkeypatch.setenv("DATABASE_URL", parts.settings.database_url)

    code = discwright("keys", *arguments)

    err = capsys.readouterr().err
    assert code == 2
    assert told in err
    assert len(err.splitlines()) == 1


def test_a_database_that_cannot_be_used_is_a_clear_error(
    discwright: Discwright, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setenv("DISCWRIGHT_DATA", "/proc/nowhere")

    code = discwright("keys", "list")

    assert code == 2
    assert capsys.readouterr().err.startswith("discwright: DISCWRIGHT_DATA is '/proc/nowhere', which cannot be used: ")


def test_the_first_key_is_told_with_what_to_do_with_it() -> None:
    first = FirstKey(key_id="key_1", secret="dw_x", sign_in_path="/sign-in/y")

    lines = keys.first_key_lines(first, "http://127.0.0.1:8000")

    assert [line for line in lines if line.startswith("  ")] == ["  dw_x", "  http://127.0.0.1:8000/sign-in/y"]
    assert "shown this once" in lines[2]
    assert "within 15 minutes, once" in lines[3]


def test_the_help_tells_what_each_scope_allows(
    discwright: Discwright, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:

    with pytest.raises(SystemExit) as ended:
        discwright("keys", "--help")

    out = capsys.readouterr().out
    assert ended.value.code == 0
    assert all(re.search(rf"^  {scope} +\S", out, flags=re.MULTILINE) for scope in Scope)


@pytest.mark.parametrize(
    ("ago", "told"),
    [(timedelta(seconds=90), r"just now"), (timedelta(days=2), r"\d{4}-\d\d-\d\d \d\d:\d\d UTC")],
)
def test_when_a_key_was_last_used_is_told(run: Any, any_parts: Parts, ago: timedelta, told: str) -> None:
    secret = json.loads(run("add", "bench", "--scopes", "read", "--json")[1])["secret"]
    key = find_key(any_parts.store, secret)
    assert key is not None
    note_use(any_parts.store, key, utc_now() - ago)

    [_, row] = run("list")[1].splitlines()

    assert re.fullmatch(told, re.split(r"\s{2,}", row)[4])


def test_a_database_that_stops_answering_is_told_in_one_line(run: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    def no_answer(*_: object, **__: object) -> None:
        raise StoreBusyError("the database does not answer; try again in a moment")

    monkeypatch.setattr(keys, "revoke_for_good", no_answer)

    assert run("revoke", NEVER_MADE) == (2, "", "discwright: the database does not answer; try again in a moment\n")
