"""The page of a disc: whose it is, what it says and links to, and what a browser has to load for it."""

import gzip
import json
import re
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from flask import Flask, request
from flask.testing import FlaskClient

from layout.file_names import CUTTING_FILES
from service.access.scopes import Scope
from service.pages.assets import assets
from service.pages.disc import disc_page
from service.pages.disc_shown import ShownDisc
from service.pages.texts import for_scripts
from service.settings import AccessSettings, PlaceSettings, ServiceSettings
from tests.service.api.guarded import bearing, new_key
from tests.service.conftest import parts_of
from tests.service.fakes import MANY
from tests.service.pages.browsing import browsing
from tests.service.pages.discs_shown import crowded, shown
from tests.service.pages.test_own_routes import HTML, Tags
from tests.service.shop import TUNE

FORBIDDEN = r"innerHTML|outerHTML|insertAdjacentHTML|document\.write|\beval\(|new Function|window\.\w+ ="
FIRST_VIEW_BYTES = 300_000  # compressed, for 2,000 projections
SCRIPTS = {name: asset.content.decode() for name, asset in assets().items() if name.startswith("js/")}
OF_THE_PAGE = {name: text for name, text in SCRIPTS.items() if name.startswith("js/disc/")}


@pytest.fixture(scope="module")
def client(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    """A service on loopback that is open to this machine's own programs."""
    folder = tmp_path_factory.mktemp("service")
    parts = parts_of(folder)
    with browsing(_open_settings(parts.settings.places.data_directory, folder)) as client:
        client.web = bearing(new_key(parts, *Scope, owner="Bellgrove"))  # type: ignore[attr-defined]
        client.other = bearing(new_key(parts, *Scope, owner="Thornbury"))  # type: ignore[attr-defined]
        yield client
    parts.store.close()


def _open_settings(data: Path, folder: Path) -> ServiceSettings:
    return ServiceSettings(
        places=PlaceSettings(data_directory=data, cache_directory=folder / "kept"),
        access=AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY),
    )


def _made(client: FlaskClient, movement: str, who: dict[str, str] | None = None) -> str:
    answer = client.post(f"/v1/layouts?movement={movement}", data=TUNE, content_type="audio/midi", headers=who)
    assert answer.status_code == 201, answer.text
    return str(answer.get_json()["fingerprint"])


def _page_of(disc: ShownDisc, **headers: str) -> Any:
    with Flask(__name__).test_request_context(f"/discs/{disc.layout['fingerprint']}", headers=headers):
        return disc_page(request, disc)


def _data_in(html: str) -> Any:
    found = re.search(r'<script type="application/json" id="disc-data">(.*?)</script>', html, re.DOTALL)
    assert found is not None
    return json.loads(found[1])


def _links_in(html: str) -> list[str]:
    return [attributes["href"] or "" for tag, attributes in Tags(html).tags if tag == "a" and "href" in attributes]


def test_a_disc_says_that_it_is_good_to_cut_and_every_file_it_links_to_is_there(client: FlaskClient) -> None:
    fingerprint = _made(client, "fernhollow-31")

    answer = client.get(f"/discs/{fingerprint}", headers=HTML)

    assert answer.status_code == 200
    assert "Good to cut. Nothing was found against it." in answer.text
    files = [link for link in _links_in(answer.text) if link.startswith("/v1/layouts/")]
    assert [link.rsplit("/", 1)[1] for link in files] == [
        "settings.json",
        *("disc.dxf", "record.dxf", "disc.svg", "hits.csv", "work-sheet.pdf", "layout.json", "report.json"),
        *("making.json", "hearing.wav", "hearing.mid"),
    ]
    assert {client.get(link).status_code for link in files} == {200}
    told = client.get(f"/v1/layouts/{fingerprint}/layout.json").get_json()
    assert len(_data_in(answer.text)["layout"]["projections"]) == len(told["projections"])


def test_a_disc_with_an_error_keeps_its_cutting_files_back_until_a_reason_is_given(client: FlaskClient) -> None:
    fingerprint = _made(client, "tarnlight-17")
    reason = 'to show a customer & "nobody" else'

    kept_back = client.get(f"/discs/{fingerprint}", headers=HTML)
    given = client.get(f"/discs/{fingerprint}", query_string={"despite_findings": reason}, headers=HTML)

    assert "Not good to cut: 1 error stands." in kept_back.text
    assert not [link for link in _links_in(kept_back.text) if link.split("?")[0].endswith(CUTTING_FILES)]
    assert kept_back.text.count("kept back: an error stands") == 2  # disc.dxf and hits.csv; a laser has no press.nc
    drawing = next(link for link in _links_in(given.text) if "/disc.dxf" in link)
    marked = client.get(drawing)
    assert marked.status_code == 200
    assert b"NOT GOOD TO CUT" in marked.data
    assert "for this reason: to show a customer &amp; &#34;nobody&#34; else" in given.text


def test_a_disc_of_one_owner_is_not_shown_to_another(client: FlaskClient) -> None:
    web, other = client.web, client.other  # type: ignore[attr-defined]
    fingerprint = _made(client, "mossbrook-67", web)

    assert client.get(f"/discs/{fingerprint}", headers={**HTML, **web}).status_code == 200
    refused = client.get(f"/discs/{fingerprint}", headers={**HTML, **other})
    assert refused.status_code == 404
    assert "make the disc again" in refused.text


def test_a_disc_that_is_not_kept_is_told_of_in_a_page(client: FlaskClient) -> None:
    for name in ("0" * 16, "..%2f..%2fetc", "0" * 300):
        answer = client.get(f"/discs/{name}", headers=HTML)
        assert (answer.status_code, answer.mimetype) == (404, "text/html")


def test_the_same_page_is_made_of_a_layout_a_report_and_a_movement_alone() -> None:
    silent = _page_of(shown()).get_data(as_text=True)
    heard = _page_of(replace(shown(), hearing={"disc": "/a.wav"}, turning_table=((0.0, 0.0), (1.0, 2.0)))).get_data(
        as_text=True
    )

    assert "Hear it" not in silent
    assert 'name="hear" value="disc" checked' in heard
    assert _data_in(silent)["rulings_at"] is None
    assert _data_in(heard)["turning"] == [[0.0, 0.0], [1.0, 2.0]]


@pytest.mark.parametrize("movement", ["fernhollow-31", "mossbrook-67", "tarnlight-17"])
def test_nothing_runs_or_is_styled_inline_and_every_name_on_the_page_is_there_once(movement: str) -> None:
    tags = Tags(_page_of(shown(movement)).get_data(as_text=True)).tags

    ids = [attributes["id"] for _, attributes in tags if "id" in attributes]
    assert len(ids) == len(set(ids))
    for tag, attributes in tags:
        assert tag != "style"
        assert not [name for name in attributes if name == "style" or name.startswith("on")]
        for name in ("for", "aria-labelledby", "aria-describedby"):
            assert attributes.get(name, ids[0]) in ids, (tag, attributes)


def test_a_title_is_shown_as_it_is_written() -> None:
    disc = shown()
    title = "</script><b>Tune & title</b>"

    html = _page_of(replace(disc, layout={**disc.layout, "title": title})).get_data(as_text=True)

    assert "&lt;/script&gt;&lt;b&gt;Tune &amp; title&lt;/b&gt;</h1>" in html
    assert "<b>" not in html
    assert _data_in(html)["layout"]["title"] == title


def test_the_first_view_of_two_thousand_projections_stays_below_300_kb_compressed() -> None:
    answer = _page_of(crowded(2_000), **{"Accept-Encoding": "gzip"})
    html = gzip.decompress(answer.get_data()).decode()

    asked = {name.split("/", 3)[3] for name in re.findall(r'(?:href|src)="(/assets/[^"]+)"', html)}
    loaded = set[str]()
    while asked - loaded:
        name = (asked - loaded).pop()
        loaded.add(name)
        asked |= _imported(name)
    total = len(answer.get_data()) + sum(len(assets()[name].packed) for name in loaded)
    assert len(_data_in(html)["layout"]["projections"]) == 2_000
    assert {"js/disc/main.js", "js/disc/state.js", "css/base.css", "css/disc.css"} <= loaded
    assert total < FIRST_VIEW_BYTES  # 101 kB when measured, 72 kB of them the page with its data


def _imported(name: str) -> set[str]:
    """The scripts that a script imports."""
    here = Path("/", name).parent
    return {str((here / found).resolve())[1:] for found in re.findall(r'from "(\.[^"]+)"', SCRIPTS.get(name, ""))}


@pytest.mark.parametrize("name", OF_THE_PAGE)
def test_what_a_script_imports_is_there_and_is_exported(name: str) -> None:
    for names, found in re.findall(r'import \{([^}]+)\} from "(\.[^"]+)"', SCRIPTS[name]):
        source = SCRIPTS[str((Path("/", name).parent / found).resolve())[1:]]
        for wanted in names.split(","):
            assert re.search(rf"export (?:async )?(?:function|const|class) {wanted.strip()}\b", source), (found, wanted)


@pytest.mark.parametrize("name", OF_THE_PAGE)
def test_a_script_is_short_enough_to_read_and_makes_nothing_of_strings(name: str) -> None:
    text = OF_THE_PAGE[name]

    assert len(text.splitlines()) <= 400
    assert not re.search(FORBIDDEN, text)


def test_the_scripts_have_every_word_they_show_and_no_word_more() -> None:
    everything = "\n".join(OF_THE_PAGE.values())
    had = {key.removeprefix("disc.") for key in for_scripts(("disc",)) if key.startswith("disc.")}

    plain = set(re.findall(r'"disc\.(\w+)"', everything))
    made = set(re.findall(r"`disc\.(\w+?_?)\$\{", everything))  # beginnings of keys that a value ends
    rows = {f"row_{name}" for name in re.findall(r'\["(\w+)", (?!")', OF_THE_PAGE["js/disc/panel.js"])}
    rows |= {"row_teeth", "row_tooth"}
    assert plain <= had
    assert made == {"row_", "reason_", "voice_", "turns_", "tooth"}
    assert rows <= had
    endings = tuple(made - {"row_"})
    assert {key for key in had if key not in plain | rows and not key.startswith(endings)} == set()
