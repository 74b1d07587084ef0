"""From a tune to its disc, in the browser: dropped, chosen by keys, refused, given up, as several discs."""

import json
from collections.abc import Callable

from playwright.sync_api import FilePayload, Page, Route

from tests.browser.conftest import Window, wait_until
from tests.service.shop import TUNE

READY = "#new-disc[data-ready]"
FILE: FilePayload = {"name": "turning-day.mid", "mimeType": "audio/midi", "buffer": TUNE}
NO_TUNE: FilePayload = {"name": "letter.mid", "mimeType": "audio/midi", "buffer": b"no tune, but a letter"}
DROP = """([bytes, name]) => {
  const held = new DataTransfer();
  held.items.add(new File([new Uint8Array(bytes)], name, { type: "audio/midi" }));
  const told = { dataTransfer: held, bubbles: true, cancelable: true };
  const place = document.querySelector("#drop");
  for (const kind of ["dragenter", "dragover", "drop"]) place.dispatchEvent(new DragEvent(kind, told));
}"""
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words


def begun(window: Window) -> Page:
    return window.open("/new", READY)


def _hold(_: Route) -> None:
    """Let no answer come."""


def focused(page: Page) -> str:
    return str(page.evaluate("document.activeElement.id"))


def tab_to(page: Page, wanted: str) -> None:
    """Go on by Tab alone until a field has the focus."""
    for _ in range(80):
        if focused(page) == wanted:
            return
        page.keyboard.press("Tab")
    raise AssertionError(f"Tab never reaches {wanted}")


def test_a_tune_that_is_dropped_leads_to_the_page_of_its_disc(window: Window) -> None:
    page = begun(window)

    page.evaluate(DROP, [list(TUNE), "turning-day.mid"])
    assert page.inner_text("#chosen").startswith("turning-day.mid")
    page.click("#send")
    page.wait_for_url("**/discs/*")

    assert page.wait_for_selector("#rulings[data-ready]")
    assert page.inner_text("h1") == "Turning Day at Wickenbeck"


def test_what_is_no_tune_is_told_at_the_file_with_what_to_do_and_all_is_kept(window: Window) -> None:
    window.watch.bears.append(REFUSED)
    page = begun(window)
    page.set_input_files("#tune", NO_TUNE)
    page.click("details.more summary")
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
    page.wait_for_selector("#give-up:not([hidden])")
    tab_to(page, "give-up")
    page.keyboard.press("Enter")
    page.wait_for_selector("#give-up[hidden]", state="attached")
    assert "Given up" in page.inner_text("#faults")
    page.unroute("**/v1/layouts?*")
    tab_to(page, "send")
    page.keyboard.press("Enter")
    page.wait_for_url("**/discs/*")


def test_settings_come_from_a_json_file_and_go_into_one_unchanged(window: Window) -> None:
    page = begun(window)
    settings = {
        "format": "discwright-settings/1",
        "speed": {"mode": "factor", "factor": 1.1},
        "channels": {"leave_out": [3, 4]},
        "rulings": [{"note": 1, "do": "leave-out"}],
    }
    content = json.dumps(settings).encode()
    page.set_input_files("#settings-file", {"name": "s.json", "mimeType": "application/json", "buffer": content})
    wait_until(page, "document.querySelector('#said').textContent.includes('s.json')")

    with page.expect_download() as download:
        page.click("#save-settings")

    assert page.input_value("[id='speed.factor']") == "1.1"
    assert json.loads(download.value.path().read_text(encoding="utf-8")) == settings


def test_who_is_signed_in_sends_the_token_that_writes_must_bring(open_window: Callable[..., Window]) -> None:
    page = begun(open_window(signed_in=True))
    page.set_input_files("#tune", FILE)

    page.click("#send")
    page.wait_for_url("**/discs/*")

    assert page.wait_for_selector("#rulings[data-ready]")
