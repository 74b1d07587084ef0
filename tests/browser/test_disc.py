"""The page of a disc in use: sound in step with the turn, findings there and back, the keys."""

import itertools
import json
from typing import Any

import pytest
from playwright.sync_api import Page

from tests.browser.conftest import Window
from tests.browser.driving import wait_until

READY = "#rulings[data-ready]"
MOST_APART_S = 0.020  # what a pluck may sound before or after it is seen
PARTS_OF_THE_TURN = (0.05, 0.3, 0.55, 0.8, 0.95)
LISTEN_MS = 1200  # at each place
# At each frame: what the page draws, and what the sound says at the same moment. The sound's own time comes in steps of
# its buffers; of each step the first frame that sees it is kept, where it is least stale. It is as stale as this frame
# comes after the one before, and as this comes after the page's own look in it: where a busy machine keeps the browser
# waiting for either, a frame tells nothing.
LISTEN = """(during_ms) => new Promise((done) => {
  const stage = document.querySelector("#stage");
  const sound = document.querySelector("#sound");
  const seen = [];
  const from_ms = performance.now();
  let last_s = null;
  let last_ms = -Infinity;
  const look = (now_ms) => {
    const sound_s = sound.currentTime;
    const in_time = now_ms - last_ms < 20 && performance.now() - now_ms < 20;
    if (in_time && sound_s !== last_s && !sound.paused && !sound.seeking && sound.readyState >= 3)
      seen.push([sound_s, Number(stage.dataset.soundS), Number(stage.dataset.turnedDeg)]);
    last_s = sound_s;
    last_ms = now_ms;
    if (performance.now() - from_ms < during_ms) requestAnimationFrame(look);
    else done(seen);
  };
  requestAnimationFrame(look);
})"""


def opened(window: Window, disc: str) -> Page:
    return window.open(f"/discs/{{{disc}}}", READY)


def turned_deg(table: list[list[float]], time_s: float) -> float:
    """The angle at a time of a rising table of (seconds, degrees), by straight lines."""
    for (from_s, from_deg), (to_s, to_deg) in itertools.pairwise(table):
        if time_s <= to_s:
            return from_deg + (to_deg - from_deg) * (time_s - from_s) / (to_s - from_s)
    return table[-1][1]


def test_the_disc_turns_in_step_with_its_sound_over_the_whole_turn(window: Window) -> None:
    page = opened(window, "disc")
    data: dict[str, Any] = json.loads(page.text_content("#disc-data") or "")
    page.click("#play")
    wait_until(page, "document.querySelector('#sound').currentTime > 0.3")

    apart: list[float] = []
    for part in PARTS_OF_THE_TURN:
        page.evaluate(
            "deg => {const r = document.querySelector('#turned'); r.value = deg; r.dispatchEvent(new Event('input'));}",
            360 * part,
        )
        page.wait_for_timeout(400)  # the sound is fetched from there
        seen = page.evaluate(LISTEN, LISTEN_MS)
        assert len(seen) > 10, f"at {part} of the turn the sound stands still"
        apart += [abs(drawn_s - sound_s) for sound_s, drawn_s, _ in seen]
        for _, drawn_s, drawn_deg in seen:
            assert drawn_deg == pytest.approx(turned_deg(data["turning"], drawn_s), abs=0.01)
    assert max(apart) <= MOST_APART_S, sorted(apart)[-10:]


def test_a_finding_leads_to_its_place_on_the_disc_and_from_there_back(window: Window) -> None:
    page = opened(window, "faulty")
    button = page.locator("button[data-finding]").first
    place = button.get_attribute("data-finding")

    button.focus()
    page.keyboard.press("Enter")
    on_the_disc = page.evaluate("[document.activeElement.tagName, document.activeElement.dataset.finding]")
    assert on_the_disc == ["g", place]
    assert page.locator(f"#stage [data-finding='{place}']").evaluate("mark => mark.classList.contains('current')")
    page.keyboard.press("Enter")

    assert page.evaluate("document.activeElement.id") == f"finding-{place}"


def test_by_keys_the_disc_is_looked_at_nearer_moved_turned_and_played(window: Window) -> None:
    page = opened(window, "disc")
    stage = page.locator("#stage")
    drawn = page.locator("#stage svg [transform^='translate']").first
    stage.focus()

    page.keyboard.press("+")
    page.keyboard.press("+")
    assert float(str(stage.get_attribute("data-zoom"))) == pytest.approx(1.35**2, abs=0.01)
    before = drawn.get_attribute("transform")
    page.keyboard.press("Shift+ArrowRight")
    assert drawn.get_attribute("transform") != before
    page.keyboard.press("0")
    assert stage.get_attribute("data-zoom") == "1"
    page.keyboard.press("PageDown")
    page.keyboard.press("]")
    assert stage.get_attribute("data-turned-deg") == "11.0000"  # 10 and 1 degree
    page.keyboard.press("Space")
    assert stage.get_attribute("data-playing") == "true"
    page.keyboard.press("Space")
    assert stage.get_attribute("data-playing") == "false"


def test_as_written_and_as_the_disc_plays_are_two_sounds_and_the_place_stays(window: Window) -> None:
    page = opened(window, "disc")
    page.click("#play")
    wait_until(page, "document.querySelector('#sound').currentTime > 0.5")
    assert "of=disc" in page.evaluate("document.querySelector('#sound').src")

    page.check("input[name=hear][value=written]")
    wait_until(page, "document.querySelector('#sound').currentTime > 0.6")

    assert "of=written" in page.evaluate("document.querySelector('#sound').src")
    assert page.get_attribute("#stage", "data-playing") == "true"
    page.click("#play")
    assert page.evaluate("document.querySelector('#sound').paused")
