"""Exports: all of one owner and nothing of another, in an archive that any program opens."""

import io
import json
import zipfile
from collections.abc import Iterator
from dataclasses import replace
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from layout.documents import shipped_text
from service.access.scopes import Scope
from service.app import OPENED, create_app
from service.commands.main import main
from service.orders import exporting
from service.parts import Parts
from service.settings import AccessSettings
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.conftest import environment_of
from tests.service.fakes import MANY
from tests.service.pricing import PricingPlanner
from tests.service.shop import TUNE, planned

MOVEMENT = {**json.loads(shipped_text("tarnlight-17")), "id": "larkfield-9"}
LISTS = ["documents", "events", "holds", "hooks", "keys", "messages", "orders", "plan-files", "plans", "quotes"]


class Shop:
    """A service with keys of the shop and of two web shops."""

    def __init__(self, parts: Parts) -> None:
        access = AccessSettings(read_rate=MANY, write_rate=MANY)
        self.parts = replace(parts, settings=replace(parts.settings, access=access))
        self.app = create_app(self.parts.settings, planner=PricingPlanner())
        self.http: FlaskClient = self.app.test_client()
        self.keys = {name: new_key(parts, *Scope, owner=name) for name in ("Bellgrove", "Thornbury")}
        self.shop = bearing(new_key(parts, *Scope))

    def fill(self, name: str) -> str:
        """Give an owner one of everything; gives the id of its order."""
        headers = bearing(self.keys[name])
        put = {**headers, "If-None-Match": "*"}
        assert self.http.put("/v1/movements/larkfield-9", json=MOVEMENT, headers=put).status_code == 201
        hook = self.http.post("/v1/hooks", json={"url": f"https://{name.lower()}.example/x"}, headers=headers)
        secret: Any = hook.json
        assert secret["secret"].startswith("whsec_")
        answers: dict[str, Any] = {}
        for what in ("quotes", "orders"):
            order = json.dumps({"movement": "larkfield-9", "reference": f"of {name}"})
            form = {"tune": (BytesIO(TUNE + name.encode()), "a.mid"), "order": order}
            answers[what] = self.http.post(f"/v1/{what}", data=form, headers=headers).json
        planned(self.parts, answers["orders"]["id"])
        return str(answers["orders"]["id"])

    def export(self, headers: dict[str, str], query: str = "") -> TestResponse:
        return self.http.get(f"/v1/export{query}", headers=headers)


@pytest.fixture
def shop(any_parts: Parts) -> Iterator[Shop]:
    opened = Shop(any_parts)
    yield opened
    for one in opened.app.extensions[OPENED]:
        one.close()


def files_in(archive: bytes) -> dict[str, bytes]:
    with zipfile.ZipFile(io.BytesIO(archive)) as opened:
        assert opened.testzip() is None
        return {name: opened.read(name) for name in opened.namelist()}


def lines_of(content: bytes) -> list[dict[str, Any]]:
    return [json.loads(line) for line in content.splitlines()]


def test_an_owner_gets_all_that_is_its_own_and_nothing_of_another(shop: Shop) -> None:
    mine, theirs = shop.fill("Bellgrove"), shop.fill("Thornbury")

    answer = shop.export(bearing(shop.keys["Bellgrove"]))

    files = files_in(answer.data)
    assert (answer.status_code, answer.content_type) == (200, "application/zip")
    assert answer.headers["Cache-Control"] == "no-store"
    lists = sorted(name.removesuffix("-0001.jsonl") for name in files if name.endswith(".jsonl"))
    assert lists == LISTS
    about = json.loads(files["about.json"])
    assert (about["format"], about["owner"]["title"]) == ("discwright-export/1", "Bellgrove")
    [order] = lines_of(files["orders-0001.jsonl"])
    assert (order["id"], order["reference"]) == (mine, "of Bellgrove")
    everything = b"".join(files.values())
    for word in (theirs, "Thornbury", "thornbury.example", shop.keys["Thornbury"].told.id):
        assert word.encode() not in everything


def test_what_was_sent_and_made_stands_under_its_digest(shop: Shop) -> None:
    shop.fill("Bellgrove")

    files = files_in(shop.export(bearing(shop.keys["Bellgrove"])).data)

    [order] = lines_of(files["orders-0001.jsonl"])
    assert files[f"files/{order['tune_digest']}"] == TUNE + b"Bellgrove"
    assert json.loads(files["movements/larkfield-9-r1.json"])["id"] == "larkfield-9"
    held = {line["digest"] for line in lines_of(files["holds-0001.jsonl"])}
    assert {name.removeprefix("files/") for name in files if name.startswith("files/")} == held
    made = {line["digest"] for line in lines_of(files["plan-files-0001.jsonl"])}
    assert made
    assert made < held


def test_secrets_are_left_out(shop: Shop) -> None:
    shop.fill("Bellgrove")
    key = shop.keys["Bellgrove"]

    everything = b"".join(files_in(shop.export(bearing(key)).data).values())

    assert key.told.id.encode() in everything
    for word in (key.secret, "whsec_", "secret_sha256"):
        assert word.encode() not in everything


def test_the_shop_exports_any_owner_by_id_or_title(shop: Shop) -> None:
    shop.fill("Bellgrove")
    owner_id = shop.keys["Bellgrove"].told.owner.id
    own = shop.export(bearing(shop.keys["Bellgrove"]))

    by_title, by_id = (shop.export(shop.shop, f"?owner={named}") for named in ("Bellgrove", owner_id))

    for answer in (by_title, by_id):
        assert files_in(answer.data).keys() == files_in(own.data).keys()
    assert "orders-0001.jsonl" not in files_in(shop.export(shop.shop).data)  # the shop's own: it ordered nothing


@pytest.mark.parametrize("named", ["Thornbury", "nobody"])
def test_another_owner_is_as_one_that_never_was(shop: Shop, named: str) -> None:
    told = problem_of(shop.export(bearing(shop.keys["Bellgrove"]), f"?owner={named}"), "order-unknown")

    assert told["detail"] == f"there is no owner {named!r}"


def test_an_export_needs_the_scope_and_no_key_for_tests(shop: Shop) -> None:
    others = bearing(new_key(shop.parts, *(set(Scope) - {Scope.ADMIN}), owner="Bellgrove"))
    tests = bearing(new_key(shop.parts, *Scope, owner="Bellgrove", is_test=True))

    assert problem_of(shop.export(others), "scope-missing")["scope"] == "admin"
    problem_of(shop.export(tests), "key-for-tests")


def test_a_file_that_is_lost_is_named_and_the_rest_is_there(shop: Shop) -> None:
    shop.fill("Bellgrove")
    whole = files_in(shop.export(bearing(shop.keys["Bellgrove"])).data)
    [order] = lines_of(whole["orders-0001.jsonl"])
    shop.parts.files.remove(order["tune_digest"])

    files = files_in(shop.export(bearing(shop.keys["Bellgrove"])).data)

    assert json.loads(files["lost-files.json"]) == {"lost": [order["tune_digest"]]}
    assert whole.keys() - files.keys() == {f"files/{order['tune_digest']}"}


def test_long_lists_are_read_page_by_page_into_files_of_a_bounded_length(
    shop: Shop, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name in ("PAGE", "MOST_LINES"):
        monkeypatch.setattr(exporting, name, {"PAGE": 2, "MOST_LINES": 3}[name])
    shop.fill("Bellgrove")
    shop.fill("Thornbury")

    files = files_in(shop.export(bearing(shop.keys["Bellgrove"])).data)

    parts = sorted(name for name in files if name.startswith("plan-files-"))
    lines = [lines_of(files[name]) for name in parts]
    assert [len(some) for some in lines[:-1]] == [3] * (len(lines) - 1)
    names = [(line["disc"], line["name"]) for some in lines for line in some]
    assert len(set(names)) == len(names) == 6  # all but the cutting files, which are made on release alone


def test_the_archive_is_sent_while_it_is_made(shop: Shop) -> None:
    shop.fill("Bellgrove")

    answer = shop.export(bearing(shop.keys["Bellgrove"]))

    assert answer.is_streamed
    assert "Content-Length" not in answer.headers


def test_the_command_writes_the_same_archive_for_its_owner_alone_to_read(
    shop: Shop, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    shop.fill("Bellgrove")
    for name, value in environment_of(tmp_path, shop.parts.settings.database_url).items():
        monkeypatch.setenv(name, value)
    out = tmp_path / "bellgrove.zip"

    assert main(["export", "Bellgrove", "--out", str(out)]) == 0
    assert main(["export", "nobody", "--out", str(tmp_path / "x.zip")]) == 2
    assert main(["export", "Bellgrove", "--out", str(tmp_path / "none" / "x.zip")]) == 2

    assert files_in(out.read_bytes()).keys() == files_in(shop.export(bearing(shop.keys["Bellgrove"])).data).keys()
    assert out.stat().st_mode & 0o777 == 0o600
    written = capsys.readouterr()
    assert "there is no owner 'nobody'; `discwright keys list` shows those there are" in written.err
    assert "cannot be written: No such file or directory" in written.err
    assert sorted(path.name for path in tmp_path.glob("*.zip*")) == ["bellgrove.zip"]
