"""Findings and left-out notes: from the list to disc and chart and back, one without a place, what was lost drawn."""

import pytest
from playwright.sync_api import Page

from service.client.client import Client
from tests.browser.conftest import Window
from tests.browser.doing import focused, tab_to, tab_to_match
from tests.service.shop import TUNE

READY = "#rulings[data-ready]"
MARK = "#chart-scroll [data-finding='0']"


@pytest.fixture
def page(window: Window) -> Page:
    """A disc with two findings: music past its turn, and letters that no press can engrave, which have no place."""
    asked = {"movement": "tarnlight-17", "cutter": "turn-press"}
    made = Client(window.service.url).make_layout({"tune": TUNE}, asked).json
    assert [bool(finding["at"]) for finding in made["layout"]["findings"]] == [True, False]
    return window.open(f"/discs/{made['fingerprint']}", READY)


def test_a_finding_is_marked_on_the_chart_too_and_from_there_a_press_leads_back(page: Page) -> None:
    page.click("button[data-finding='0']")
    assert page.locator(MARK).evaluate("mark => mark.classList.contains('current')")

    line = page.locator(f"{MARK} path").first
    line.scroll_into_view_if_needed()
    box = line.bounding_box()
    assert box is not None
    page.mouse.click(box["x"] + box["width"] / 2 + 3, box["y"] + 5)  # a hand is not as steady as the line is thin

    assert focused(page) == "finding-0"
    assert page.locator("#finding-0.current").count() == 1


def test_by_keys_alone_a_finding_leads_from_the_list_to_the_chart_and_back(page: Page) -> None:
    tab_to_match(page, "button[data-finding='0']")
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.matches('#stage [data-finding]')")  # the disc's mark first

    tab_to(page, "chart-scroll")
    page.keyboard.press("Tab")
    assert page.evaluate("mark => document.activeElement.matches(mark)", MARK)
    assert page.evaluate("document.activeElement.getAttribute('aria-label')") == "Finding 1: to its entry in the list"
    page.keyboard.press("Enter")

    assert focused(page) == "finding-0"


def test_a_finding_without_a_place_is_told_and_offers_no_way_to_one(page: Page) -> None:
    entry = page.locator("#finding-1")

    assert "label" in entry.inner_text().lower() or "letters" in entry.inner_text().lower()
    assert entry.locator("button").count() == 0
    assert page.locator("svg [data-finding='1']").count() == 0


def test_left_out_notes_are_drawn_on_disc_and_chart_and_told_with_their_reason(window: Window) -> None:
    page = window.open("/discs/{disc}", READY)
    layout = page.request.get(page.url.replace("/discs/", "/v1/layouts/")).json()["layout"]
    count = len(layout["left_out"])
    assert count > 5

    for area in ("#stage", "#chart-scroll"):
        assert page.locator(f"{area} .left-out").count() == count
    page.fill("#chart-wide", "4")
    third = page.locator("#chart-scroll .left-out").nth(2)
    assert layout["left_out"][2]["reason"] == "wheel-still-stepping"
    third.click()

    told = page.inner_text("#pointed")
    assert layout["notes"][layout["left_out"][2]["note"]]["pitch"] in told
    assert "because the star wheel has not finished its step before" in told
    assert page.locator("#stage .left-out.chosen").count() == 1
    assert str(count) in page.inner_text("[data-part=lost]")
