"""A disc is ordered from its page: who is offered it, and that what the page sends is the disc that was shown."""

import io
import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient

from layout.documents.shipped import shipped_text
from service.access.scopes import Scope
from service.api.models.orders import MOST_COPIES, MOST_LINE_CHARACTERS
from service.app import create_app
from service.settings import AccessSettings, PlaceSettings, ServiceSettings
from tests.service.api.guarded import bearing, new_key
from tests.service.conftest import parts_of
from tests.service.fakes import MANY
from tests.service.pages.pages_read import page_read
from tests.service.pages.test_own_routes import HTML
from tests.service.shop import TUNE

RULED = {"format": "discwright-settings/1", "rulings": [{"note": 0, "do": "leave-out"}]}


@pytest.fixture
def client(tmp_path: Path) -> Iterator[FlaskClient]:
    parts = parts_of(tmp_path)
    places = PlaceSettings(data_directory=parts.settings.places.data_directory, cache_directory=tmp_path / "kept")
    access = AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY)
    client = create_app(ServiceSettings(places=places, access=access)).test_client()
    client.orders = bearing(new_key(parts, Scope.ORDER, Scope.READ, owner="Bellgrove"))  # type: ignore[attr-defined]
    client.reads = bearing(new_key(parts, Scope.READ, owner="Thornbury"))  # type: ignore[attr-defined]
    yield client
    parts.store.close()


def made(client: FlaskClient, who: dict[str, str], movement: bytes | None = None) -> str:
    form: dict[str, Any] = {
        "tune": (io.BytesIO(TUNE), "t.mid"),
        "settings": (io.BytesIO(json.dumps(RULED).encode()), "s"),
    }
    if movement is not None:
        form["movement"] = (io.BytesIO(movement), "m.json")
    named = "" if movement is not None else "?movement=fernhollow-31"
    answer = client.post(f"/v1/layouts{named}", data=form, headers=who)
    assert answer.status_code == 201, answer.text
    return str(answer.get_json()["fingerprint"])


def documents_in(html: str) -> Any:
    found = re.search(r'<script type="application/json" id="ordering-data">(.*?)</script>', html, re.DOTALL)
    assert found is not None
    return json.loads(found[1])


def test_who_is_not_signed_in_is_told_where_to_sign_in_to_order(client: FlaskClient) -> None:
    disc = f"/discs/{made(client, {})}"

    html = client.get(disc, headers=HTML).text

    assert "Sign in to order it." in html
    assert 'id="ordering"' not in html
    way = next(link for link in page_read(html).one("main").all("a") if link.text == "Sign in").attributes["href"]
    form = page_read(client.get(way, headers=HTML).text)
    assert form.one("input", name="back").attributes["value"] == disc


def test_a_disc_whose_documents_ship_is_ordered_by_their_ids(client: FlaskClient) -> None:
    who = client.orders  # type: ignore[attr-defined]

    html = client.get(f"/discs/{made(client, who)}", headers={**HTML, **who}).text

    assert '<form class="panel narrow" id="ordering"' in html
    page = page_read(html)
    assert page.one("input", id="ordering-quantity").attributes["max"] == str(MOST_COPIES)
    assert page.one("input", id="ordering-reference").attributes["maxlength"] == str(MOST_LINE_CHARACTERS)
    assert documents_in(html) == {"order": {"movement": "fernhollow-31", "cutter": "fibre-laser"}, "parts": {}}


def _written(source: str, text: str) -> bytes | None:
    return {"shipped": None, "own": text.encode(), "own in UTF-16": text.encode("utf-16")}[source]


@pytest.mark.parametrize("source", ["shipped", "own", "own in UTF-16"])
def test_what_the_page_brings_makes_an_order_of_the_disc_that_was_shown(client: FlaskClient, source: str) -> None:
    who = client.orders  # type: ignore[attr-defined]
    movement = {**json.loads(shipped_text("mossbrook-67")), "id": "own-67", "title": "Of our own"}
    fingerprint = made(client, who, _written(source, json.dumps(movement)))
    told = documents_in(client.get(f"/discs/{fingerprint}", headers={**HTML, **who}).text)

    brought = {
        name: client.get(f"/v1/layouts/{fingerprint}/{name}", headers=who).data
        for name in ("tune.mid", "settings.json")
    }
    form = {
        "order": (io.BytesIO(json.dumps({**told["order"], "quantity": 2}).encode()), "order", "application/json"),
        "tune": (io.BytesIO(brought["tune.mid"]), "tune.mid"),
        "settings": (io.BytesIO(brought["settings.json"]), "settings"),
        **{name: (io.BytesIO(text.encode()), name) for name, text in told["parts"].items()},
    }
    placed = client.post("/v1/orders", data=form, headers=who)

    assert placed.status_code == 202, placed.text
    assert placed.get_json()["movement"]["id"] == ("fernhollow-31" if source == "shipped" else "own-67")
    assert placed.get_json()["cutter"]["id"] == "fibre-laser"
    assert (placed.get_json()["quantity"], brought["tune.mid"], json.loads(brought["settings.json"])) == (
        2,
        TUNE,
        RULED,
    )


def test_a_key_that_may_not_order_is_shown_no_disc_of_a_layout(client: FlaskClient) -> None:
    who = client.reads  # type: ignore[attr-defined]

    answer = client.get(f"/discs/{made(client, {})}", headers={**HTML, **who})

    assert answer.status_code == 403
    assert 'id="ordering"' not in answer.text
