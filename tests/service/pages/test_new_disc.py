"""The page on which a disc is begun: every setting has its field, with the default of the settings themselves."""

import posixpath
import re
from collections.abc import Iterator
from html.parser import HTMLParser
from typing import Any

import pytest
from pydantic import BaseModel

from layout.documents import Settings
from layout.documents.settings import Ruling
from service.pages.assets import assets
from service.pages.texts import for_scripts
from service.parts import Parts
from service.settings import AccessSettings, ServiceSettings
from tests.service.pages.browsing import browsing

HTML = {"Accept": "text/html"}
NO_FIELD = {"format", "rulings"}  # rulings are made on the disc


class Fields(HTMLParser):
    """The fields of a page by name, the labels by what they are for, every id, what is folded away, and which values
    of a choice others wait for."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.fields: dict[str, dict[str, str | None]] = {}
        self.options: dict[str, list[str | None]] = {}
        self.labelled: set[str | None] = set()
        self.ids: set[str | None] = set()
        self.waiting: dict[str, set[str]] = {}
        self.folded: set[str] = set()
        self._select = ""
        self._fold = False
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        told = dict(attrs)
        self.ids.add(told.get("id"))
        if tag == "label":
            self.labelled.add(told.get("for"))
        if tag == "legend":
            self.labelled.add(str(told["id"]).removesuffix("-legend"))
        if "data-when" in told:
            self.waiting.setdefault(str(told["data-when"]), set()).update(str(told["data-among"]).split())
        self._fold = self._fold or "fold" in str(told.get("class")).split()
        if tag in ("input", "select", "fieldset") and "id" in told:
            self._select = str(told.get("name") or told.get("id"))
            self.fields[self._select] = told
            if self._fold:
                self.folded.add(self._select)
        if tag == "option":
            self.options.setdefault(self._select, []).append(told.get("value"))

    def handle_endtag(self, tag: str) -> None:
        self._fold = self._fold and tag != "details"


@pytest.fixture
def shown(parts: Parts) -> Iterator[Fields]:
    settings = ServiceSettings(places=parts.settings.places, access=AccessSettings(listens_on_loopback=True))
    with browsing(settings) as client:
        answer = client.get("/new", headers=HTML)
        assert answer.status_code == 200
        yield Fields(answer.text)


def leaves(model: type[BaseModel], before: str = "") -> Iterator[tuple[str, object]]:
    """Every setting by the path of its names, with its default."""
    for name, field in model.model_fields.items():
        default = field.get_default(call_default_factory=True)
        if isinstance(default, BaseModel):
            yield from leaves(type(default), f"{before}{name}.")
        elif before + name not in NO_FIELD:
            yield before + name, default


def test_every_setting_but_rulings_has_a_field_with_the_default_of_the_settings(shown: Fields) -> None:
    settings = dict(leaves(Settings))
    of_settings = {name: field for name, field in shown.fields.items() if "data-kind" in field}

    assert of_settings.keys() == settings.keys()
    for name, default in settings.items():
        begun = of_settings[name]["data-default"]
        if default is None or default == ():
            assert begun == "", name
        elif isinstance(default, str):
            assert begun == default, name
        else:
            assert float(str(begun)) == default, name


def test_every_value_of_a_choice_is_one_that_the_settings_take_and_none_is_missing(shown: Fields) -> None:
    schema = Settings.model_json_schema()
    of_settings = {name for name, field in shown.fields.items() if field.get("data-kind") == "choice"}

    for name in of_settings:
        *inside, last = name.split(".")
        part = schema if not inside else schema["$defs"][schema["properties"][inside[0]]["$ref"].split("/")[-1]]
        assert shown.options[name] == part["properties"][last]["enum"], name


def test_the_bounds_of_a_number_are_those_that_the_schema_of_settings_tells(shown: Fields) -> None:
    told = {name: schema for name, schema in numbers(Settings.model_json_schema())}

    seen = 0
    for name, field in shown.fields.items():
        if field.get("data-kind") == "number":
            for bound, key in (("min", "minimum"), ("max", "maximum")):
                if key in told[name]:
                    seen += 1
                    assert float(str(field[bound])) == told[name][key], name
    assert seen > 10


def numbers(schema: dict[str, Any]) -> Iterator[tuple[str, dict[str, Any]]]:
    """Every number of a schema of settings by the path of its names, one or two long."""
    for name, inner in schema["properties"].items():
        if "$ref" in inner:
            part = schema["$defs"][inner["$ref"].split("/")[-1]]
            yield from ((f"{name}.{last}", one) for last, one in numbers({**part, "$defs": {}}))
        for one in (inner, *inner.get("anyOf", ())):
            if one.get("type") in ("number", "integer"):
                yield name, one


def test_every_field_has_a_label_and_a_place_for_its_fault(shown: Fields) -> None:
    for name, field in shown.fields.items():
        assert field["id"] in shown.labelled, name
        assert f"{field['id']}-fault" in shown.ids, name


def test_a_field_that_waits_for_a_choice_waits_for_one_that_there_is(shown: Fields) -> None:
    with_rulings = {"rulings"}  # no value of a choice, but that a settings file brought some

    assert set(shown.waiting) == {
        *("transpose.mode", "speed.mode", "octave_moves", "passage-from", "passage-to", "channels-which")
    }
    for choice, values in shown.waiting.items():
        assert values - with_rulings <= set(shown.options[choice]), choice


def test_only_the_few_settings_that_matter_stand_unfolded(shown: Fields) -> None:
    of_settings = {name for name, field in shown.fields.items() if "data-kind" in field}

    assert of_settings - shown.folded == {
        *("transpose.mode", "transpose.range", "transpose.semitones"),
        *("speed.mode", "speed.factor", "speed.least", "speed.most", "octave_moves", "octave_fit", "discs"),
    }


def test_what_ships_can_be_chosen_and_the_default_cutter_comes_first(shown: Fields) -> None:
    assert shown.options["movement"] == ["fernhollow-31", "mossbrook-67", "tarnlight-17"]
    assert shown.options["cutter"][0] == "fibre-laser"


def test_the_scripts_of_the_page_find_their_elements_their_texts_and_what_they_import(shown: Fields) -> None:
    folder = "js/new/"
    scripts = {name: asset.content.decode() for name, asset in assets().items() if name.startswith(folder)}
    texts_given = for_scripts(("new", "movements"))

    assert len(scripts) > 0
    for name, script in scripts.items():
        assert set(re.findall(r'find\("#([\w-]+)"\)', script)) <= shown.ids, name
        assert set(re.findall(r'text\("([\w.]+)"', script)) <= texts_given.keys(), name
        for imported in re.findall(r'from "(\.[^"]+)"', script):
            assert posixpath.normpath(folder + imported) in assets(), name
    told = set(re.findall(r'(?:stage|fail)\("([\w.]+)"', "".join(scripts.values())))
    assert {"new.sending", "new.planning", "new.given_up"} <= told
    deeds = Ruling.model_json_schema()["properties"]["do"]["enum"]
    assert told | {f"new.ruling_{deed.replace('-', '_')}" for deed in deeds} <= texts_given.keys()
