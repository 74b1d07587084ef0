"""From a tune to its disc, in the browser: dropped, chosen by keys, refused, under way, given up, as several discs."""

import math
from collections.abc import Callable

import pytest
from playwright.sync_api import FilePayload, Page, Route

from tests.browser.conftest import Window, wait_until
from tests.browser.doing import drop, focused, tab_to
from tests.service.shop import TUNE

READY = "#new-disc[data-ready]"
FILE: FilePayload = {"name": "turning-day.mid", "mimeType": "audio/midi", "buffer": TUNE}
NO_TUNE: FilePayload = {"name": "letter.mid", "mimeType": "audio/midi", "buffer": b"no tune, but a letter"}
LATE_MS = 20_000  # how late a slow network brings an answer
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words


def begun(window: Window) -> Page:
    return window.open("/new", READY)


def _hold(_: Route) -> None:
    """Let no answer come."""


@pytest.mark.parametrize("place", ["#drop", "h1"])
def test_a_tune_that_is_dropped_anywhere_leads_to_the_page_of_its_disc(window: Window, place: str) -> None:
    page = begun(window)

    drop(page, TUNE, "turning-day.mid", at=place)
    assert page.inner_text("#chosen") == f"turning-day.mid, {math.ceil(len(TUNE) / 102.4) / 10} KiB"  # to a tenth, up
    page.click("#send")
    page.wait_for_url("**/discs/*")

    assert page.wait_for_selector("#rulings[data-ready]")
    assert page.inner_text("h1") == "Turning Day at Wickenbeck"


def test_what_is_no_tune_is_told_at_the_file_with_what_to_do_and_all_is_kept(window: Window) -> None:
    window.watch.bears.append(REFUSED)
    page = begun(window)
    page.set_input_files("#tune", NO_TUNE)
    page.click("#fold-lettering summary")
    page.fill("[id='title']", "Kept")

    page.click("#send")
    page.wait_for_selector("#tune-fault:not(:empty)")

    words = page.inner_text("#tune-fault")
    assert "MThd" in words
    assert page.get_attribute("#tune", "aria-invalid") == "true"
    assert "tune-fault" in str(page.get_attribute("#tune", "aria-describedby"))
    assert focused(page) == "faults"
    assert words in page.inner_text("#faults")
    assert page.evaluate("document.querySelector('#tune').files[0].name") == "letter.mid"
    assert page.input_value("[id='title']") == "Kept"


def test_a_setting_out_of_its_range_is_told_at_its_field_and_laid_out_once_mended(window: Window) -> None:
    window.watch.bears.append(REFUSED)
    page = begun(window)
    page.set_input_files("#tune", FILE)
    page.fill("#discs", "99")

    page.click("#send")
    page.wait_for_selector("#discs-fault:not(:empty)")
    assert page.get_attribute("#discs", "aria-invalid") == "true"
    assert page.inner_text("#tune-fault") == ""
    page.fill("#discs", "2")
    page.click("#send")
    page.wait_for_selector("#made li")

    links = page.locator("#made a")
    assert links.count() == 2
    assert all(str(links.nth(place).get_attribute("href")).startswith("/discs/") for place in range(2))


def test_without_a_tune_nothing_is_sent_and_the_field_says_what_is_missing(window: Window) -> None:
    page = begun(window)
    asked: list[str] = []
    page.on("request", lambda request: asked.append(request.url))

    page.click("#send")

    assert page.inner_text("#tune-fault") == "No tune is chosen. Choose a MIDI file."
    assert asked == []


def test_of_several_files_dropped_none_is_taken_and_the_field_says_so(window: Window) -> None:
    page = begun(window)

    drop(page, TUNE, "one.mid", "two.mid")

    assert page.inner_text("#tune-fault") == "2 files were dropped. Drop one."
    assert page.inner_text("#chosen") == ""


def test_a_file_that_is_too_large_or_empty_is_told_when_it_is_chosen_and_not_sent(window: Window) -> None:
    page = begun(window)
    asked: list[str] = []
    page.on("request", lambda request: asked.append(request.url))
    most = int(str(page.get_attribute("#new-disc", "data-most-bytes")))

    page.set_input_files("#tune", {**FILE, "buffer": bytes(most + 1)})
    assert page.inner_text("#tune-fault").endswith(f"{most // 1024} KiB are the most this service takes.")
    page.click("#send")
    assert page.get_attribute("#tune", "aria-invalid") == "true"
    page.set_input_files("#tune", {**FILE, "buffer": b""})
    assert page.inner_text("#tune-fault") == "turning-day.mid is empty. Choose another file."
    page.set_input_files("#tune", {**FILE, "buffer": bytes(most)})

    assert page.inner_text("#tune-fault") == ""
    assert asked == []


def test_while_it_is_under_way_the_stage_is_told_and_nothing_can_be_changed(window: Window) -> None:
    page = begun(window)
    slow = {"offline": False, "latency": LATE_MS, "downloadThroughput": -1, "uploadThroughput": -1}
    page.context.new_cdp_session(page).send("Network.emulateNetworkConditions", slow)
    page.set_input_files("#tune", FILE)

    page.click("#send")
    wait_until(page, "/^[1-9] s\\./.test(document.querySelector('#elapsed').textContent)")

    assert page.inner_text("#stage") == "Finding the best arrangement …"
    assert page.get_attribute("#progress", "value") is None  # how far it is nobody knows
    assert page.evaluate("document.querySelector('#new-disc').inert")
    assert focused(page) == "stage"
    below = page.evaluate("document.querySelector('#give-up').getBoundingClientRect().bottom - innerHeight")
    assert below <= 0, "the button that gives up is out of sight"
    page.click("#give-up")
    assert not page.evaluate("document.querySelector('#new-disc').inert")
    assert page.evaluate("document.querySelector('#tune').files.length") == 1


def test_the_share_that_is_sent_is_told(window: Window) -> None:
    page = begun(window)
    sent: list[tuple[str, float]] = []
    page.expose_function("told", lambda words, value: sent.append((words, value)))
    page.evaluate(
        """() => new MutationObserver(() => told(
             document.querySelector("#elapsed").textContent, document.querySelector("#progress").value,
           )).observe(document.querySelector("#elapsed"), { childList: true })"""
    )
    page.set_input_files("#tune", FILE)

    page.click("#send")
    page.wait_for_url("**/discs/*")

    assert ("100 % sent", 1) in sent


def test_a_fault_at_a_field_goes_when_the_field_is_changed(window: Window) -> None:
    page = begun(window)
    page.select_option("[id='speed.mode']", "factor")
    page.set_input_files("#tune", FILE)

    page.click("#send")
    assert page.inner_text("[id='speed.factor-fault']") == "This is needed."
    assert page.inner_text("#faults li") == "Times as fast as written: This is needed."
    page.click("#faults a")
    assert focused(page) == "speed.factor"
    page.keyboard.type("1")

    assert page.inner_text("[id='speed.factor-fault']") == ""
    assert page.get_attribute("[id='speed.factor']", "aria-invalid") is None
    assert page.inner_text("#faults") == ""  # it was the only one


def test_what_the_service_finds_between_fields_is_told_at_the_choice_they_belong_to(window: Window) -> None:
    window.watch.bears.append(REFUSED)
    page = begun(window)
    page.set_input_files("#tune", FILE)
    page.select_option("[id='speed.mode']", "best")
    page.fill("[id='speed.least']", "2")

    page.click("#send")
    page.wait_for_selector("[id='speed.mode-fault']:not(:empty)")

    assert "least (2) must not be above most (1.25)" in page.inner_text("[id='speed.mode-fault']")


def test_by_keys_alone_a_disc_is_begun_given_up_and_laid_out(window: Window) -> None:
    page = begun(window)
    page.route("**/v1/layouts?*", _hold)
    page.set_input_files("#tune", FILE)  # the chooser of files is the system's own, past the page

    for wanted in ("tune", "movement", "cutter", "transpose.mode"):
        tab_to(page, wanted)
    page.keyboard.press("ArrowDown")
    tab_to(page, "transpose.semitones")
    page.keyboard.type("0")
    tab_to(page, "send")
    page.keyboard.press("Enter")
    page.wait_for_selector("#under-way:not([hidden])")
    tab_to(page, "give-up")
    page.keyboard.press("Enter")
    page.wait_for_selector("#under-way[hidden]", state="attached")
    assert "Given up" in page.inner_text("#faults")
    page.unroute("**/v1/layouts?*")
    tab_to(page, "send")
    page.keyboard.press("Enter")
    page.wait_for_url("**/discs/*")


def test_who_goes_back_from_the_disc_finds_the_settings_with_the_fields_that_belong_to_them(window: Window) -> None:
    page = begun(window)
    page.select_option("[id='speed.mode']", "best")
    page.fill("[id='speed.least']", "0.9")
    page.set_input_files("#tune", FILE)
    page.click("#send")
    page.wait_for_url("**/discs/*")
    page.wait_for_selector("#rulings[data-ready]")

    page.go_back()
    page.wait_for_selector(READY)

    wait_until(page, "!document.getElementById('speed.least').closest('[data-when]').hidden")
    assert page.input_value("[id='speed.least']") == "0.9"
    assert not page.evaluate("document.querySelector('#new-disc').inert")


def test_who_is_signed_in_sends_the_token_that_writes_must_bring(open_window: Callable[..., Window]) -> None:
    page = begun(open_window(signed_in=True))
    page.set_input_files("#tune", FILE)

    page.click("#send")
    page.wait_for_url("**/discs/*")

    assert page.wait_for_selector("#rulings[data-ready]")
