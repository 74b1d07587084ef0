"""The work sheet of an order's disc, looked at as pictures of its pages."""

import io
from collections.abc import Iterator
from contextlib import closing

import numpy as np
import pypdf
import pytest
from PIL import Image

from service.pages import orders_sheets
from service.pages.orders_sheets import PIXELS_PER_POINT, picture_of
from service.parts import Parts
from tests.service.api.test_orders import NO_ROOM, Shop
from tests.service.pages.test_order_pages import asked, order_seen, part, seen
from tests.service.shop import planned

A4_PT = (210 / 25.4 * 72, 297 / 25.4 * 72)  # ISO 216; a point is 1/72 of an inch


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def test_every_page_of_the_work_sheet_is_shown_and_is_the_one_of_the_file(shop: Shop) -> None:
    order_id = shop.ready()

    sheet = part(order_seen(shop, order_id), "sheets")

    pdf = shop.http.get(sheet.all("a")[0].attributes["href"], headers=shop.shop).data
    pages = pypdf.PdfReader(io.BytesIO(pdf)).pages
    pictures = [image.attributes["src"] for image in sheet.all("img")]
    assert len(pictures) == len(pages) == 2
    shown = [shop.http.get(address, headers=shop.shop) for address in pictures]
    for picture in shown:
        assert picture.content_type == "image/png"
        image = Image.open(io.BytesIO(picture.data))
        assert image.size == pytest.approx([side * PIXELS_PER_POINT for side in A4_PT], abs=1.5)
        ink = np.asarray(image.convert("L")) < 128
        assert 0.01 < ink.mean() < 0.5  # something is drawn on it
    assert shown[0].data != shown[1].data
    assert {image.attributes["loading"] for image in sheet.all("img")} == {"lazy"}
    words = "Page 1 of 2 of the work sheet"
    assert sheet.all("img")[0].attributes["alt"].startswith(words)


def test_a_picture_that_is_known_is_not_made_again(shop: Shop, monkeypatch: pytest.MonkeyPatch) -> None:
    address = f"/orders/{shop.ready()}/discs/1/work-sheet/1.png"
    first = shop.http.get(address, headers=shop.shop)
    monkeypatch.setattr(orders_sheets, "picture_of", lambda *_: pytest.fail("it was made again"))

    again = shop.http.get(address, headers={**shop.shop, "If-None-Match": first.headers["ETag"]})

    assert (again.status_code, again.data) == (304, b"")
    assert first.headers["Cache-Control"] == "private, no-cache"


def test_a_damaged_work_sheet_is_told_of_and_the_rest_of_the_order_is_shown(
    shop: Shop, monkeypatch: pytest.MonkeyPatch
) -> None:
    order_id = shop.ready()
    address = f"/orders/{order_id}/discs/1/work-sheet/1.png"
    pdf = file_of(shop, order_id, 1)
    read = type(shop.parts.files).read
    monkeypatch.setattr(
        type(shop.parts.files), "read", lambda *asked: pdf[:40] if read(*asked) == pdf else read(*asked)
    )

    pages = [order_seen(shop, order_id), seen(shop, f"/orders/{order_id}/discs/1")]
    picture = asked(shop, address)

    for page in pages:
        sheet = page.one("details", id="sheet-1")
        assert "The work sheet is damaged and cannot be shown." in sheet.text
        assert not sheet.all("img")
    assert picture.status_code == 404
    assert "the work sheet is damaged" in picture.text
    monkeypatch.undo()
    assert len(part(order_seen(shop, order_id), "sheets").all("img")) == 2  # restored, it is shown


def test_the_pages_of_a_work_sheet_are_counted_once(shop: Shop, monkeypatch: pytest.MonkeyPatch) -> None:
    order_id = shop.ready()
    order_seen(shop, order_id)
    monkeypatch.setattr(orders_sheets, "_opened", lambda _: pytest.fail("it was opened again"))

    assert len(part(order_seen(shop, order_id), "sheets").all("img")) == 2


def test_the_work_sheet_of_an_older_plan_stays_the_one_of_that_plan(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "replan", shop.web, settings=NO_ROOM["settings"])
    planned(shop.parts, order_id)

    old, new = (
        shop.http.get(f"/orders/{order_id}/discs/1/work-sheet/1.png?revision={revision}", headers=shop.shop).data
        for revision in (1, 2)
    )

    assert old != new
    assert picture_of(file_of(shop, order_id, 1), 1) == old


@pytest.mark.parametrize("path", ["discs/1/work-sheet/3.png", "discs/1/work-sheet/0.png", "discs/2/work-sheet/1.png"])
def test_a_page_that_is_not_there_says_which_are(shop: Shop, path: str) -> None:
    answer = asked(shop, f"/orders/{shop.ready()}/{path}")

    assert answer.status_code == 404
    assert "the work sheet has no page" in answer.text or "the plan has no file 2/work-sheet.pdf" in answer.text


def test_a_work_sheet_is_for_whom_the_order_is_for(shop: Shop) -> None:
    address = f"/orders/{shop.ready()}/discs/1/work-sheet/1.png"

    assert shop.http.get(address, headers=shop.web).status_code == 200
    assert shop.http.get(address, headers=shop.other).status_code == 404
    assert shop.http.get(address).status_code == 401


def test_the_page_of_an_order_s_disc_shows_its_work_sheet_and_says_where_it_is_ruled_by_hand(shop: Shop) -> None:
    order_id = shop.ready()

    page = seen(shop, f"/orders/{order_id}/discs/1")

    assert len(page.one("details", id="sheet-1").all("img")) == 2
    way = page.one("p", id="how-to-rule").one("a").attributes["href"]
    assert way == f"/orders/{order_id}#replan-settings"
    assert order_seen(shop, order_id).one("textarea", id="replan-settings")
    assert not page.all("section", id="rulings")
    shop.decide(order_id, "cancel", shop.web)
    assert not seen(shop, f"/orders/{order_id}/discs/1").all("p", id="how-to-rule")


def file_of(shop: Shop, order_id: str, revision: int) -> bytes:
    address = f"/v1/orders/{order_id}/plans/{revision}/files/1/work-sheet.pdf"
    return bytes(shop.http.get(address, headers=shop.shop).data)
