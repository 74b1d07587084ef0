"""The whole way in the browser: from a tune to a disc that is heard, ordered, accepted, released and cut from."""

import io
from collections.abc import Callable

from ezdxf.filemanagement import read
from playwright.sync_api import Download, Page, Route

from service.client.client import Client
from tests.browser.conftest import Window
from tests.browser.doing import drop, focused, hear
from tests.service.shop import TUNE

RELEASE = "form[data-do=release]"
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words


def laid_out(shop: Window, movement: str = "fernhollow-31") -> Page:
    """The page of a disc whose tune was dropped on the page for new ones."""
    page = shop.open("/new", "#new-disc[data-ready]")
    drop(page, TUNE, "turning-day.mid")
    page.select_option("#movement", movement)
    page.click("#send")
    page.wait_for_url("**/discs/*")
    page.wait_for_selector("#rulings[data-ready]")
    return page


def ordered(page: Page, reference: str) -> None:
    """Order the disc of a page, which then is the page of the order, and wait until it is planned."""
    page.fill("#ordering-reference", reference)
    page.click("#ordering button")
    page.wait_for_url("**/orders/order_*")
    page.wait_for_selector(RELEASE)  # the page shows by itself what happens


def shop_order(shop: Window, reference: str, movement: str = "fernhollow-31") -> Page:
    """The page of an order that a program placed, once it is planned."""
    client = Client(shop.service.url, shop.service.key)
    order = client.order(TUNE, {"movement": movement, "reference": reference})
    page = shop.open(f"/orders/{order['id']}")
    page.wait_for_selector(RELEASE)
    return page


def link_made(page: Page) -> str:
    page.click("form[data-do=proof-links] button")
    page.wait_for_selector("#made-link:not([hidden])")
    return page.input_value("#link")


def opened_by_a_customer(customer: Window, link: str) -> Page:
    page = customer.context.new_page()
    page.goto(link)
    return page


def said(page: Page, verdict: str, by: str, note: str = "") -> None:
    """A customer's word about a proof."""
    page.check(f"#{verdict}")
    page.fill("#by", by)
    page.fill("#note", note)
    with page.expect_navigation():
        page.click("#verdict button[type=submit]")


def content_of(download: Download) -> bytes:
    return download.path().read_bytes()


def test_from_a_dropped_tune_to_a_disc_that_is_heard_ordered_accepted_released_and_cut_from(
    open_window: Callable[..., Window],
) -> None:
    shop, customer = open_window(signed_in=True), open_window()
    page = laid_out(shop)
    assert page.inner_text("h1") == "Turning Day at Wickenbeck"
    page.click("#play")
    hear(page, "#sound")
    fingerprint = page.url.rsplit("/", 1)[-1]

    ordered(page, "W-2002")
    assert page.inner_text("h1") == "W-2002"
    link = link_made(page)
    theirs = opened_by_a_customer(customer, link)
    assert customer.context.cookies() == []
    theirs.click("#play")
    hear(theirs, "#sound")
    said(theirs, "accepted", "Ada Thorn", "As we hoped.")
    assert "Ada Thorn" in theirs.inner_text(".verdicts")
    page.wait_for_selector("[data-part=events] >> text=As we hoped.")  # told to the shop as it happens
    page.fill("#release-by", "M. Bell")
    page.click(f"{RELEASE} button")
    page.wait_for_selector("form[data-do=reports]")
    assert "M. Bell" in page.inner_text("[data-part=plans]")
    with page.expect_download() as download:
        page.click("table.files a:text-is('disc.dxf')")

    drawing = read(io.StringIO(content_of(download.value).decode()))
    assert fingerprint in download.value.suggested_filename
    assert drawing.audit().errors == []
    assert len(drawing.modelspace()) > 100


def test_a_customer_who_declines_is_told_with_their_words_in_the_history_of_the_order(
    open_window: Callable[..., Window],
) -> None:
    shop, customer = open_window(signed_in=True), open_window()
    page = shop_order(shop, "W-2003")
    theirs = opened_by_a_customer(customer, link_made(page))

    said(theirs, "declined", "Ada Thorn", "The second part is too thin.")

    page.wait_for_selector("[data-part=events] >> text=The second part is too thin.")
    last = page.locator("[data-part=events] li").first
    assert "Ada Thorn" in last.inner_text()
    assert "The second part is too thin." in theirs.inner_text(".verdicts")
    assert page.locator(RELEASE).count() == 1  # what to do about it is the shop's to decide


def test_a_disc_with_errors_is_released_with_who_and_why_and_its_drawing_says_so(
    open_window: Callable[..., Window],
) -> None:
    shop = open_window(signed_in=True)
    shop.watch.bears.append(REFUSED)
    page = shop_order(shop, "W-2004", movement="tarnlight-17")
    assert page.locator("table.files a:text-is('disc.dxf')").count() == 0

    page.fill("#release-by", "   ")
    page.fill("#release-why", "a test cut in card")
    page.click(f"{RELEASE} button")
    page.wait_for_selector("#release-by-fault")
    assert page.get_attribute("#release-by", "aria-invalid") == "true"
    assert "release-by-fault" in str(page.get_attribute("#release-by", "aria-describedby"))
    assert focused(page) == "release-by"
    assert page.input_value("#release-why") == "a test cut in card"  # nothing is lost
    page.fill("#release-by", "M. Bell")
    page.click(f"{RELEASE} button")
    page.wait_for_selector("form[data-do=reports]")
    with page.expect_download() as download:
        page.click("table.files a:text-is('disc.dxf')")

    plans = page.inner_text("[data-part=plans]")
    assert "M. Bell" in plans
    assert "a test cut in card" in plans
    assert "NOT-GOOD-TO-CUT" in download.value.suggested_filename
    content = content_of(download.value)
    assert b"NOT GOOD TO CUT: a test cut in card" in content  # a comment at its head
    assert read(io.StringIO(content.decode())).audit().errors == []


def test_a_release_that_comes_too_late_is_told_where_it_was_asked_for(open_window: Callable[..., Window]) -> None:
    shop = open_window(signed_in=True)
    shop.watch.bears += [REFUSED, "net::ERR_FAILED"]
    page = shop_order(shop, "W-2005")
    first = page.url.rsplit("/", 1)[-1]
    page.route("**/v1/**/events*", lambda route: route.abort())  # this browser hears nothing of what others do
    page.reload()
    page.fill("#release-by", "M. Bell")
    Client(shop.service.url, shop.service.key).cancel_order(first, {"reason": "called off by telephone"})

    page.click(f"{RELEASE} button")
    page.wait_for_selector(f"{RELEASE}", state="detached")

    assert page.inner_text("#not-done").startswith("This was not done, since the order has changed meanwhile")
    assert focused(page) == "not-done"
    assert "called off by telephone" in page.inner_text("[data-part=standing]")


def test_who_comes_back_to_a_disc_that_was_ordered_orders_it_once_more(open_window: Callable[..., Window]) -> None:
    shop = open_window(signed_in=True)
    page = shop.open("/discs/{disc}", "#rulings[data-ready]")
    names: list[str] = []

    def place(route: Route) -> None:
        names.append(route.request.headers["idempotency-key"])
        route.fulfill(status=202, json={"id": f"order_{len(names)}"})

    page.route("**/v1/orders", place)
    page.route("**/orders/order_*", lambda route: route.fulfill(status=204))  # the page stays, as one kept for Back
    button = "#ordering button[type=submit]"
    for _ in range(2):
        with page.expect_response("**/orders/order_*"):
            page.click(button)
        assert page.is_disabled(button)
        page.evaluate("dispatchEvent(new PageTransitionEvent('pageshow', { persisted: true }))")
        assert page.is_enabled(button)

    assert len(set(names)) == 2
