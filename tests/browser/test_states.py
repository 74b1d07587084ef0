"""Pages in their other states: faults told, something chosen or ruled, a link refused, nothing there yet."""

from collections.abc import Callable

import pytest
from playwright.sync_api import Page

from service.client.client import Client
from tests.browser.access import contrast_faults_of, faults_of
from tests.browser.conftest import SCHEMES, SHORTEST_PX, Window
from tests.browser.doing import focused, tab_to_match, widest
from tests.browser.driving import wait_until

READY = "#rulings[data-ready]"


def new_disc_with_faults(window: Window) -> Page:
    page = window.open("/new", "#new-disc[data-ready]")
    page.fill("#discs", "99")
    page.set_input_files("#tune", {"name": "letter.mid", "mimeType": "audio/midi", "buffer": b"no tune, but a letter"})
    page.click("#send")
    page.wait_for_selector("#faults:not(:empty)")
    return page


def disc_with_a_ruling(window: Window) -> Page:
    page = window.open("/discs/{faulty}", READY)
    page.focus("#stage")
    page.keyboard.press("End")
    page.click("#rule-out")
    page.wait_for_selector("#ruling-list li")
    page.click("button[data-finding]")
    return page


def disc_with_a_ruling_refused(window: Window) -> Page:
    page = window.open("/discs/{faulty}", READY)
    page.focus("#stage")
    page.keyboard.press("Home")
    page.route("**/again", lambda route: route.abort())
    page.click("#rule-out")
    page.wait_for_selector("#ruling-fault:not(:empty)")
    return page


def disc_to_order(window: Window) -> Page:
    page = window.open("/discs/{disc}", READY)
    page.fill("#ordering-quantity", "0")
    page.click("#ordering button")
    page.wait_for_selector("#ordering-quantity-fault")
    return page


def order_with_a_link_and_a_fault(window: Window) -> Page:
    page = window.open("/orders/{order}")
    page.click("form[data-do=proof-links] button")
    page.wait_for_selector("#made-link:not([hidden])")
    page.fill("#release-by", "  ")
    page.click("form[data-do=release] button")
    page.wait_for_selector("#release-by-fault")
    return page


def proof_with_a_fault(window: Window) -> Page:
    page = window.open("/proof/{proof}")
    page.check("#declined")
    page.fill("#by", "  ")
    page.click("#verdict button[type=submit]")
    page.wait_for_selector("#by-fault")
    return page


def proof_link_refused(window: Window) -> Page:
    return window.open("/proof/" + "0" * 40)


def sign_in_refused(window: Window) -> Page:
    page = window.open("/sign-in")
    page.fill("#key", "dw_no-such-key")
    with page.expect_navigation():
        page.click("main button[type=submit]")
    return page


def movement_form_with_faults(window: Window) -> Page:
    page = window.open("/movements/tarnlight-17/edit", "form[data-ready]")
    page.fill("[id='at/tracks/count']", "0")
    page.wait_for_selector("#form [aria-invalid=true]")
    return page


def orders_none_such(window: Window) -> Page:
    return window.open("/orders?reference=nothing")


STATES: dict[str, tuple[Callable[[Window], Page], bool]] = {
    "new-faults": (new_disc_with_faults, False),
    "disc-ruled": (disc_with_a_ruling, False),
    "disc-ruling-refused": (disc_with_a_ruling_refused, False),
    "disc-order-fault": (disc_to_order, True),
    "order-link-fault": (order_with_a_link_and_a_fault, True),
    "proof-fault": (proof_with_a_fault, False),
    "proof-refused": (proof_link_refused, False),
    "sign-in-refused": (sign_in_refused, False),
    "movement-faults": (movement_form_with_faults, True),
    "orders-none-such": (orders_none_such, True),
}
BORNE = ("the server responded with a status of 4", "net::ERR_FAILED")  # what states are about


@pytest.mark.parametrize("name", STATES)
def test_a_page_in_another_state_keeps_the_rules_of_access_and_fits_a_phone(
    open_window: Callable[..., Window], name: str, take_pictures: Callable[[Page, str], None]
) -> None:
    come_to, signed_in = STATES[name]
    window = open_window(signed_in=signed_in)
    window.watch.bears += BORNE
    page = come_to(window)

    take_pictures(page, f"{name}-wide")
    faults = faults_of(page)
    for scheme in SCHEMES:
        page.emulate_media(color_scheme=scheme)
        faults += [f"{scheme}: {fault}" for fault in contrast_faults_of(page)]
    assert faults == []
    page.set_viewport_size({"width": SHORTEST_PX, "height": 740})
    wait_until(page, f"innerWidth === {SHORTEST_PX}")
    assert page.evaluate("document.documentElement.scrollWidth") <= SHORTEST_PX, widest(page)
    take_pictures(page, f"{name}-phone")


def test_a_key_that_is_refused_is_told_so_and_can_be_given_again(window: Window) -> None:
    window.watch.bears += BORNE
    page = sign_in_refused(window)
    assert page.inner_text("#key-fault").startswith("This is no key that is in force.")
    assert focused(page) == "key"
    assert page.get_attribute("#key", "aria-invalid") == "true"

    page.keyboard.type(window.service.key)
    with page.expect_navigation():
        page.keyboard.press("Enter")

    assert page.wait_for_selector("#sign-out")


def test_who_has_no_orders_yet_is_led_on_to_the_first(open_window: Callable[..., Window]) -> None:
    window = open_window()
    client = Client(window.service.url, window.service.key)
    key = client.make_key({"title": "a new shop", "scopes": ["read", "order"], "owner": "Thornbury"})["secret"]
    answer = window.context.request.post(f"{window.service.url}/sign-in", form={"key": key}, max_redirects=0)
    assert answer.status == 303
    page = window.open("/orders")

    assert page.locator("table").count() == 0
    assert faults_of(page) + contrast_faults_of(page) == []
    tab_to_match(page, "main a[href='/new']")
    page.keyboard.press("Enter")
    page.wait_for_url("**/new")


def test_who_wants_little_motion_sees_nothing_move_by_itself(window: Window) -> None:
    page = window.open("/discs/{faulty}", READY)
    page.click("button[data-finding]")
    page.focus("#stage")
    page.keyboard.press("+")

    assert page.evaluate("matchMedia('(prefers-reduced-motion: reduce)').matches")
    assert page.evaluate("document.getAnimations().length") == 0
    page.click("#play")  # what is asked for moves all the same
    wait_until(page, "Number(document.querySelector('#stage').dataset.turnedDeg) > 1")
