"""By keys alone through the forms of a shop: an order is released, a movement entered, mended and saved."""

from collections.abc import Callable

from playwright.sync_api import Page

from service.client.client import Client
from tests.browser.conftest import Window
from tests.browser.doing import focused, tab_to, tab_to_match
from tests.browser.driving import wait_until
from tests.service.shop import TUNE

COUNT = "at/tracks/count"
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words


def typed(page: Page, field: str, words: str) -> None:
    """Go to a field by Tab and write over what it holds."""
    tab_to(page, field)
    page.keyboard.press("Control+a")
    page.keyboard.type(words)


def told_at(page: Page, field: str) -> str:
    """What is told at a field that is marked as wrong; "" where it is not marked."""
    control = page.locator(f"[id='{field}']")
    if control.get_attribute("aria-invalid") != "true":
        return ""
    return " ".join(page.inner_text(f"[id='{one}']") for one in str(control.get_attribute("aria-describedby")).split())


def test_an_order_is_found_in_the_list_released_and_its_drawing_reached(open_window: Callable[..., Window]) -> None:
    shop = open_window(signed_in=True)
    shop.watch.bears.append(REFUSED)
    client = Client(shop.service.url, shop.service.key)
    order = client.order(TUNE, {"movement": "fernhollow-31", "reference": "W-3001"})
    client.wait_for(order["id"], frozenset({"ready", "attention"}), within_s=60)
    page = shop.open("/orders")

    tab_to_match(page, f"main a[href='/orders/{order['id']}']")
    page.keyboard.press("Enter")
    page.wait_for_selector("form[data-do=release]")
    typed(page, "release-by", "   ")
    page.keyboard.press("Enter")
    wait_until(page, "document.activeElement.getAttribute('aria-invalid') === 'true'")
    assert focused(page) == "release-by"
    assert told_at(page, "release-by") != ""
    typed(page, "release-by", "M. Bell")
    page.keyboard.press("Enter")
    page.wait_for_selector("form[data-do=reports]")
    tab_to_match(page, "table.files a[href*='disc.dxf']")
    with page.expect_download() as download:
        page.keyboard.press("Enter")

    assert download.value.suggested_filename.endswith(".dxf")
    released = client.tell_order(order["id"])
    assert released["plan"] is not None
    assert (released["state"], released["plan"]["released_by"]) == ("released", "M. Bell")


def test_a_value_out_of_its_range_is_told_as_it_is_typed_mended_and_the_movement_saved(
    open_window: Callable[..., Window],
) -> None:
    shop = open_window(signed_in=True)
    shop.watch.bears.append(REFUSED)
    page = shop.open("/movements/add?like=tarnlight-17", "form[data-ready]")

    typed(page, "at/id", "by-keys-17")
    typed(page, COUNT, "0")
    assert "1" in told_at(page, COUNT)
    tab_to(page, "save")
    page.keyboard.press("Enter")
    wait_until(page, f"document.activeElement.id === {COUNT!r}")  # saving leads to what is wrong
    assert page.locator("#answer button").count() == 1
    page.keyboard.press("Control+a")
    page.keyboard.type("17")
    assert told_at(page, COUNT) == ""
    tab_to(page, "save")
    page.keyboard.press("Enter")
    page.wait_for_selector("#answer .good")

    kept = page.request.get(f"{shop.service.url}/v1/movements/by-keys-17").json()
    assert len(kept["tracks"]) == 17
    assert page.url.endswith("/movements/by-keys-17/edit")
