"""What people do in pages, in the tests: drop a file, go by Tab alone, listen, unfold, look."""

from pathlib import Path
from typing import Any

from playwright.sync_api import Page

from tests.browser.driving import wait_until

MOST_TABS = 300  # the form of a movement has some 200 fields
DROP = """([bytes, names, at]) => {
  const held = new DataTransfer();
  for (const name of names) held.items.add(new File([new Uint8Array(bytes)], name, { type: "audio/midi" }));
  const told = { dataTransfer: held, bubbles: true, cancelable: true };
  const place = document.querySelector(at);
  for (const kind of ["dragenter", "dragover", "drop"]) place.dispatchEvent(new DragEvent(kind, told));
}"""
# webkitAudioDecodedByteCount is chromium's own: how much sound came out of the file.
HEARD = """selector => {
  const sound = document.querySelector(selector);
  return sound.currentTime > 0.5 && !sound.paused && sound.error === null && sound.webkitAudioDecodedByteCount > 0;
}"""


UNFOLD = """() => {
  const folded = [...document.querySelectorAll("details:not([open])")];
  for (const one of folded) one.open = true;
  return folded.length;
}"""
# What reaches past the right edge, where nothing that holds it scrolls by itself.
WIDEST = """() => {
  const scrolls = (one) => getComputedStyle(one).overflowX !== "visible";
  const held = (one) => !one.matches("body") && (scrolls(one) || held(one.parentElement));
  return [...document.querySelectorAll("body *")]
    .filter((one) => one.getBoundingClientRect().right > document.documentElement.clientWidth + 0.5)
    .filter((one) => !held(one.parentElement)).slice(0, 5).map((one) => one.outerHTML.slice(0, 120));
}"""
TALLEST_PX = 6000  # of a picture: the page of reference is twenty times as tall


def unfold(page: Page) -> int:
    """Open all that is folded; gives how many parts that were."""
    return int(page.evaluate(UNFOLD))


def widest(page: Page) -> Any:
    """The first things that reach past the right edge of the page."""
    return page.evaluate(WIDEST)


def take_picture(page: Page, path: Path) -> None:
    """A picture of the page, or of its beginning where it is very tall.

    In a window as tall as the picture: one past the window's edge makes the browser paint all of a page. The window is
    as it was afterwards.
    """
    size = page.viewport_size
    assert size is not None
    high = page.evaluate("document.documentElement.scrollHeight")
    page.set_viewport_size({"width": size["width"], "height": min(high, TALLEST_PX)})
    page.evaluate("scrollTo(0, 0)")
    page.screenshot(path=path)
    page.set_viewport_size(size)


def drop(page: Page, tune: bytes, *names: str, at: str = "#drop") -> None:
    """Drop a file on the page of a new disc, under each of the names, by default where it takes one."""
    page.evaluate(DROP, [list(tune), names, at])


def focused(page: Page) -> str:
    """The id of what has the focus."""
    return str(page.evaluate("document.activeElement.id"))


def tab_to(page: Page, wanted: str) -> None:
    """Go on by Tab alone until what has this id has the focus."""
    for _ in range(MOST_TABS):
        if focused(page) == wanted:
            return
        page.keyboard.press("Tab")
    raise AssertionError(f"Tab never reaches {wanted}")


def tab_to_match(page: Page, selector: str) -> None:
    """Go on by Tab alone until what matches has the focus."""
    for _ in range(MOST_TABS):
        if page.evaluate("wanted => document.activeElement.matches(wanted)", selector):
            return
        page.keyboard.press("Tab")
    raise AssertionError(f"Tab never reaches {selector}")


def hear(page: Page, selector: str) -> None:
    """Wait until a sound plays: its time goes on, and bytes of sound came out of its file."""
    wait_until(page, f"({HEARD})({selector!r})")


def turned_deg(page: Page) -> float:
    """How far the disc is drawn turned."""
    return float(str(page.get_attribute("#stage", "data-turned-deg")))


def settings_of(page: Page) -> Any:
    """The settings that the API keeps for the disc whose address the page has."""
    answer = page.request.get(page.url.replace("/discs/", "/v1/layouts/").split("?")[0] + "/settings.json")
    assert answer.status == 200, answer.text()
    return answer.json()
