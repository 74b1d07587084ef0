"""The form of movements and cutters: whom it is for, what it begins with, and that its scripts have all they show."""

import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient
from pydantic import BaseModel
from pydantic.fields import FieldInfo

from layout.documents import Cutter, Movement, shipped_text
from service.access.scopes import Scope
from service.pages.assets import assets
from service.pages.machines import FORM, USUAL
from service.pages.texts import for_scripts
from service.parts import Parts
from tests.service.api.guarded import bearing, new_key
from tests.service.pages.browsing import browsing
from tests.service.pages.test_own_routes import HTML

FORBIDDEN = r"innerHTML|outerHTML|insertAdjacentHTML|document\.write|\beval\(|new Function|window\.\w+ ="
SCRIPTS = {name: asset.content.decode() for name, asset in assets().items() if name.startswith("js/")}
OF_THE_FORM = {name: text for name, text in SCRIPTS.items() if name.startswith("js/machines/")}
BEFORE = "movements."  # the keys of this form's words, as scripts ask for them


@pytest.fixture
def client(parts: Parts) -> Iterator[FlaskClient]:
    with browsing(parts.settings) as client:
        yield client


@pytest.fixture
def own(parts: Parts) -> dict[str, str]:
    return {**HTML, **bearing(new_key(parts, Scope.READ, Scope.MOVEMENTS, owner="Bellgrove"))}


def data_in(html: str) -> Any:
    found = re.search(r'<script type="application/json" id="machine-data">(.*?)</script>', html, re.DOTALL)
    assert found is not None
    return json.loads(found[1])


def names_in(part: Any) -> set[str]:
    """Every name of a field in a schema."""
    if isinstance(part, list):
        return {name for one in part for name in names_in(one)}
    if not isinstance(part, dict):
        return set()
    return set(part.get("properties", {})) | {name for one in part.values() for name in names_in(one)}


@pytest.mark.parametrize("path", ["/movements/add", "/movements/fernhollow-31/edit", "/cutters/add"])
def test_the_form_is_for_who_may_change_movements(client: FlaskClient, parts: Parts, path: str) -> None:
    reader = bearing(new_key(parts, Scope.READ, owner="Bellgrove"))

    assert client.get(path, headers=HTML).status_code == 401
    assert client.get(path, headers={**HTML, **reader}).status_code == 403


@pytest.mark.parametrize(("kind", "document_id"), [("movement", "mossbrook-67"), ("cutter", "turn-press")])
def test_a_document_is_changed_as_it_is_written_and_only_where_nobody_changed_it_since(
    client: FlaskClient, own: dict[str, str], kind: str, document_id: str
) -> None:
    data = data_in(client.get(f"/{kind}s/{document_id}/edit", headers=own).text)
    path = data["save_at"] + document_id
    headers = {**own, "If-Match": data["tag"], "Content-Type": "application/json"}

    assert data["text"].encode() == shipped_text(document_id)
    assert client.get(data["schema_at"]).status_code == 200
    changed = data["text"].replace('"title": "', '"title": "My ', 1)
    assert client.put(path, data=changed, headers=headers).status_code == 200
    assert client.put(path, data=data["text"], headers=headers).status_code == 412


def test_another_begins_as_a_document_without_its_id(client: FlaskClient, own: dict[str, str]) -> None:
    new = data_in(client.get("/movements/add", headers=own).text)
    like = data_in(client.get("/movements/add?like=tarnlight-17", headers=own).text)

    assert (new["id"], new["tag"], json.loads(new["text"])) == (None, None, {"format": "discwright-movement/1"})
    begun = json.loads(like["text"])
    as_it_is = json.loads(shipped_text("tarnlight-17"))
    del as_it_is["revision"]
    assert begun == {**as_it_is, "id": ""}
    assert client.get("/movements/add?like=nowhere", headers=own).status_code == 404


def test_every_field_of_both_documents_has_a_name_in_words() -> None:
    worth = {"value", "plus_minus", "basis"}
    wanted = names_in(Movement.model_json_schema()) | names_in(Cutter.model_json_schema())
    had = {key.removeprefix(f"{BEFORE}field_") for key in for_scripts(("movements",)) if "field_" in key}

    assert wanted - worth == had


def test_the_scripts_of_the_form_have_every_word_they_show_and_no_word_more() -> None:
    everything = "\n".join(OF_THE_FORM.values())
    had = {key.removeprefix(BEFORE) for key in for_scripts(("movements",)) if key.startswith(BEFORE)}
    had -= {key for key in had if key.startswith(("field_", "basis_measured", "basis_calculated", "basis_assumed"))}
    asked = set(re.findall(r'(?:worded\(|text\(`?"?movements\.|"movements\.)"?(\w+)"', everything))
    asked |= {"all_well", "to_mend", "to_mend_one", "yes", "no", "by_default", "fault_pattern", "fault_like"}
    asked |= {"pasted", "pasted_some"}

    assert had - asked == set()
    assert asked <= had


@pytest.mark.parametrize("name", OF_THE_FORM)
def test_a_script_of_the_form_is_short_makes_nothing_of_strings_and_imports_what_is_there(name: str) -> None:
    text = OF_THE_FORM[name]

    assert len(text.splitlines()) <= 400
    assert not re.search(FORBIDDEN, text)
    for names, found in re.findall(r'import \{([^}]+)\} from "(\.[^"]+)"', text):
        source = SCRIPTS[str((Path("/", name).parent / found).resolve())[1:]]
        for wanted in names.split(","):
            assert re.search(rf"export (?:async )?(?:function|const|class) {wanted.strip()}\b", source), (found, wanted)


@pytest.mark.parametrize(("kind", "model"), [("movement", Movement), ("cutter", Cutter)])
def test_every_field_of_a_document_stands_in_one_section_of_its_form(kind: str, model: type[BaseModel]) -> None:
    placed = [name for _, names in FORM[kind] for name in names]

    assert sorted(placed) == sorted(model.model_fields)


def test_what_is_usually_stated_is_something_that_may_be_left_out() -> None:
    def said(model: type[BaseModel], place: str) -> FieldInfo:
        *parts, last = place.strip("/").split("/")
        for part in parts:
            inner = model.model_fields[part].annotation
            assert isinstance(inner, type)
            model = inner
        return model.model_fields[last]

    optional = [said(Cutter if place == "/drawn_from" else Movement, place) for place in USUAL]

    assert [field.is_required() for field in optional] == [False] * (len(USUAL) - 1) + [True]
