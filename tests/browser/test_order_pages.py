"""Orders and proofs in use: what a customer sees and says, and what a shop does about one order."""

import io
import itertools
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import pypdf
import pytest
from playwright.sync_api import Page

from service.client.client import Client
from tests.browser.access import faults_of
from tests.browser.conftest import SCHEMES, SHORTEST_PX, SIZES, Window, wait_until
from tests.browser.served import ASKED, WITHIN_S, Served
from tests.service.shop import TUNE

HALF_SPEED = {"speed": {"mode": "factor", "factor": 0.5}}  # twice a turn: an error on one disc, no fault on two
READY = "#stage[data-ready]"
MOST_PAGES = 4  # of paper, for an order of one disc with a short story


@dataclass(frozen=True, slots=True, kw_only=True)
class Placed:
    """An order that waits for a decision, and the path of its proof."""

    order_id: str
    proof: str


class Shop:
    """Places orders in the running service as a shop's program does."""

    def __init__(self, service: Served) -> None:
        self.client = Client(service.url, service.key)

    def placed(self, **asked: Any) -> Placed:
        order: Any = {**ASKED, **asked}
        placed = self.client.order(TUNE, order)
        planned = self.client.wait_for(placed["id"], frozenset({"ready", "attention"}), within_s=WITHIN_S)
        text = self.client.make_proof_link(planned["id"])["href"].rpartition("/")[2]
        return Placed(order_id=planned["id"], proof=f"/proof/{text}")

    def released(self, order_id: str) -> None:
        order: Any = self.client.tell_order(order_id)
        tag = order["plan"]["tag"]
        self.client.release_order(order_id, {"by": "A. Maker", "plan": tag})


@pytest.fixture(scope="module")
def shop(service: Served) -> Shop:
    return Shop(service)


@pytest.fixture(scope="module")
def faulty(shop: Shop) -> Placed:
    """An order of one disc with an error; nothing is decided about it."""
    return shop.placed(reference="W-2001", settings=HALF_SPEED)


@pytest.fixture(scope="module")
def box(shop: Shop) -> Placed:
    """An order of two discs; nothing is decided about it."""
    return shop.placed(reference="W-2002", settings={**HALF_SPEED, "discs": 2})


@pytest.fixture
def signed_in(open_window: Callable[..., Window]) -> Window:
    return open_window(signed_in=True)


def order_page(window: Window, placed: Placed) -> Page:
    return window.open(f"/orders/{placed.order_id}")


def state_becomes(page: Page, words: str) -> None:
    wait_until(page, f"document.querySelector('#state').textContent === '{words}'")


def test_a_customer_without_a_key_plays_the_disc_as_it_plays_and_as_it_is_written(window: Window) -> None:
    page = window.open("/proof/{proof}", READY)
    assert page.locator("header nav").count() == 0

    page.click("#play")
    wait_until(page, "document.querySelector('#sound').currentTime > 0.5")
    turned_deg = float(page.get_attribute("#stage", "data-turned-deg") or 0)
    page.check("input[name=hear][value=written]")
    wait_until(page, "document.querySelector('#sound').src.includes('of=written')")
    wait_until(page, f"Number(document.querySelector('#stage').dataset.turnedDeg) > {turned_deg}")

    sound = page.evaluate("document.querySelector('#sound').src")
    assert "/v1/proofs/" in sound
    assert "/v1/orders/" not in page.content()
    page.click("#play")
    assert page.get_attribute("#stage", "data-playing") == "false"


def test_a_finding_of_a_proof_leads_to_its_place_on_the_disc_and_from_there_back(
    window: Window, faulty: Placed
) -> None:
    page = window.open(faulty.proof, READY)

    page.locator("button[data-finding='0']").focus()
    page.keyboard.press("Enter")
    assert page.evaluate("[document.activeElement.tagName, document.activeElement.dataset.finding]") == ["g", "0"]
    page.keyboard.press("Enter")

    assert page.evaluate("document.activeElement.id") == "finding-0"


def test_of_several_discs_each_turns_on_a_page_of_its_own(window: Window, box: Placed) -> None:
    page = window.open(box.proof, READY)
    first = page.locator("#stage .projection").count()

    page.click("nav a:not([aria-current])")
    page.wait_for_selector(READY)

    assert page.text_content("#drawing-title") == "Disc 2 of 2"
    assert page.locator("#stage .projection").count() not in (0, first)
    page.click("#play")
    wait_until(page, "document.querySelector('#sound').src.includes('/files/2/hearing.wav')")


def test_a_customer_s_word_stands_on_the_proof_and_is_told_on_the_open_page_of_the_order(
    open_window: Callable[..., Window], signed_in: Window, shop: Shop
) -> None:
    placed = shop.placed(reference="W-2003")
    watched = order_page(signed_in, placed)
    page = open_window().open(placed.proof, READY)

    page.check("#declined")
    page.fill("#by", "B. Client")
    page.fill("#note", "The bass is too thin.")
    page.keyboard.press("Tab")
    page.keyboard.press("Enter")
    page.wait_for_selector("#said-so-far")

    assert "B. Client declined it" in page.inner_text("#said-so-far")
    assert "“The bass is too thin.”" in page.inner_text("#said-so-far")
    assert page.evaluate("document.querySelector('#said-so-far').getBoundingClientRect().top < innerHeight")
    wait_until(watched, "document.querySelector('#said').textContent.includes('The customer declined the proof')")
    assert "B. Client declined its proof" in watched.inner_text("[data-part=plans]")


def test_a_decision_without_a_name_is_not_sent(window: Window) -> None:
    page = window.open("/proof/{proof}", READY)

    page.check("#accepted")
    page.click("#verdict button")

    assert page.evaluate("document.activeElement.id") == "by"
    assert page.locator("#said-so-far").count() == 0


def test_a_link_that_shows_nothing_can_be_read_on_a_phone_and_leads_nowhere(
    open_window: Callable[..., Window],
) -> None:
    window = open_window(size="phone")
    window.watch.bears.append("status of 404")

    page = window.open("/proof/{proof}"[:-1] + "}x")

    assert page.inner_text("h1") == "This link shows nothing"
    assert page.locator("a[href]:not(.skip)").count() == 0
    page.set_viewport_size({"width": SHORTEST_PX, "height": 740})
    assert page.evaluate("document.documentElement.scrollWidth") <= SHORTEST_PX


def test_an_order_is_cancelled_with_a_reason_and_a_yes_and_then_deleted(signed_in: Window, shop: Shop) -> None:
    page = order_page(signed_in, shop.placed(reference="W-2004"))
    page.click("#cancelling summary")
    page.fill("#cancel-reason", "a wrong tune")
    page.click("#cancelling button")
    assert page.evaluate("document.activeElement.id") == "cancel-confirmed"  # no yes yet: nothing is sent
    page.check("#cancel-confirmed")
    page.click("#cancelling button")
    state_becomes(page, "Cancelled")
    assert "a wrong tune" in page.inner_text("[data-part=standing]")

    page.click("#erasing summary")
    page.check("#erase-confirmed")
    page.click("#erasing button")

    wait_until(page, "document.querySelector('#next').textContent.startsWith('It was deleted.')")
    assert page.locator("form[data-do]").count() == 0


def test_a_released_order_is_ordered_again_and_the_page_goes_to_the_new_one(signed_in: Window, shop: Shop) -> None:
    placed = shop.placed(reference="W-2005")
    shop.released(placed.order_id)
    page = order_page(signed_in, placed)

    page.click("#repeating summary")
    page.fill("#repeat-quantity", "3")
    page.fill("#repeat-reference", "W-2006")
    page.click("#repeating button")

    page.wait_for_url(lambda url: "/orders/" in url and placed.order_id not in url)
    page.wait_for_selector("#state")
    assert page.inner_text("h1") == "W-2006"
    assert "3 of each disc" in page.inner_text("[data-part=facts]")
    assert page.inner_text("#state") == "Ready to be released"


def test_an_order_is_planned_anew_with_other_settings_and_the_page_tells_the_difference(
    signed_in: Window, shop: Shop
) -> None:
    page = order_page(signed_in, shop.placed(reference="W-2007"))

    page.click("#replanning summary")
    page.fill("#replan-settings", '{"rulings": [{"note": 5, "do": "leave-out"}]}')
    page.click("#replanning button")

    wait_until(page, "document.querySelector('[data-part=plans]').textContent.includes('Plan 2')")
    state_becomes(page, "Ready to be released")
    assert "Setting rulings: not stated → 1 entry" in page.inner_text("[data-part=plans]")
    assert page.inner_text("#said").startswith("The order has changed. Ready to be released.")


def test_the_way_from_a_disc_to_its_rulings_ends_in_the_settings(signed_in: Window) -> None:
    page = signed_in.open("/orders/{order}/discs/1", READY)

    page.click("#how-to-rule a")
    page.wait_for_selector("#replan-settings")

    wait_until(page, "document.querySelector('#replanning').open")


def test_the_work_sheet_is_seen_in_the_page(signed_in: Window, take_pictures: Callable[[Page, str], None]) -> None:
    page = signed_in.open("/orders/{order}")
    images = page.locator("#sheet-1 img")
    assert images.evaluate_all("all => all.filter(one => one.naturalWidth > 0).length") == 0  # not before it is wanted

    page.click("#sheet-1 summary")
    for place in range(images.count()):
        images.nth(place).scroll_into_view_if_needed()
    wait_until(
        page, "[...document.querySelectorAll('#sheet-1 img')].every(one => one.complete && one.naturalWidth > 800)"
    )

    take_pictures(page, "order-work-sheet")


def test_an_order_is_printed_with_its_story_and_without_its_forms(signed_in: Window) -> None:
    page = signed_in.open("/orders/{order}")

    paper = pypdf.PdfReader(io.BytesIO(page.pdf(prefer_css_page_size=True)))

    words = " ".join(" ".join(sheet.extract_text() for sheet in paper.pages).split())
    assert len(paper.pages) <= MOST_PAGES
    for there in ("W-1001", "Cautions", "Plan 1", "The order came in"):
        assert there in words
    for not_there in ("Release it to be cut", "Ask the customer", "All orders", "Sign out"):
        assert not_there not in words


def test_a_disc_is_printed_with_the_name_of_its_order(signed_in: Window) -> None:
    page = signed_in.open("/orders/{order}/discs/1", READY)

    paper = pypdf.PdfReader(io.BytesIO(page.pdf(prefer_css_page_size=True)))

    words = " ".join(paper.pages[0].extract_text().split())
    assert "Order W-1001, plan 1." in words
    assert "Play" not in words


def test_a_wrong_key_is_told_beside_its_field_and_the_right_one_leads_to_the_page_wanted(window: Window) -> None:
    window.watch.bears += ["status of 401", "status of 403"]
    page = window.open("/orders?reference=W-1001", "#key")

    page.fill("#key", "dw_none")
    page.keyboard.press("Enter")
    page.wait_for_selector("#key-fault")
    assert page.evaluate("document.activeElement.id") == "key"
    page.fill("#key", window.service.key)
    page.keyboard.press("Enter")
    page.wait_for_selector("table.orders")

    assert page.url.endswith("/orders?reference=W-1001")


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("which", ["proof", "order"])
def test_with_everything_unfolded_a_page_is_accessible_and_fits_a_phone(
    open_window: Callable[..., Window], faulty: Placed, which: str, scheme: str
) -> None:
    window = open_window(size="phone", scheme=scheme, signed_in=which == "order")
    page = window.open(faulty.proof, READY) if which == "proof" else order_page(window, faulty)

    page.evaluate("document.querySelectorAll('details').forEach(one => { one.open = true; })")

    assert faults_of(page) == []
    for width in (SIZES["phone"][0], SHORTEST_PX):
        page.set_viewport_size({"width": width, "height": 740})
        assert page.evaluate("document.documentElement.scrollWidth") <= width


@pytest.mark.parametrize("path", ["/orders", "/orders/{order}", "/proof/{proof}", "/sign-in"])
def test_headings_go_down_one_step_at_a_time(signed_in: Window, path: str) -> None:
    page = signed_in.open(path)

    levels = page.eval_on_selector_all("h1, h2, h3, h4", "all => all.map(one => Number(one.tagName[1]))")

    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after - before <= 1 for before, after in itertools.pairwise(levels))
