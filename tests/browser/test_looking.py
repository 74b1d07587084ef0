"""What a disc's page tells of a projection, and what it draws of the pluck: the tooth lifted, let go, at rest again."""

import json
import math
from typing import Any

import pytest
from playwright.sync_api import Page

from tests.browser.conftest import Window
from tests.browser.driving import wait_until

READY = "#rulings[data-ready]"
TURN_TO = """deg => {
  const place = document.querySelector("#turned");
  place.step = "any";
  place.value = deg;
  place.dispatchEvent(new Event("input"));
}"""
TOOTH = """track => {
  const tooth = document.querySelector(`#stage .tooth[data-track="${track}"]`);
  return [tooth.getAttribute("class"), Number(/scale\\(1 ([\\d.]+)\\)/.exec(tooth.getAttribute("transform"))[1])];
}"""
# Seconds of sound over seconds of the clock, both from the page itself.
PACE = """during_ms => new Promise((done) => {
  const stage = document.querySelector("#stage");
  const begin = [Number(stage.dataset.soundS), performance.now()];
  const look = (now_ms) => {
    if (now_ms - begin[1] < during_ms) requestAnimationFrame(look);
    else done((1000 * (Number(stage.dataset.soundS) - begin[0])) / (now_ms - begin[1]));
  };
  requestAnimationFrame(look);
})"""
MOST_STEPS = 120


def layout_of(window: Window) -> Any:
    page = window.context.request.get(f"{window.service.url}/v1/layouts/{window.service.places['disc']}")
    return page.json()["layout"]


def pointed_at(page: Page) -> int:
    """The projection that is told of, by its place in the layout."""
    kind, index = str(page.get_attribute("#pointed", "data-thing")).split(" ")
    return int(index) if kind == "projection" else -1


def tells_all_of(page: Page, layout: Any, movement: Any) -> None:
    """The panel tells note, moment, tooth, track, place and nudge of the projection that is pointed at."""
    projection = layout["projections"][pointed_at(page)]
    told = page.inner_text("#pointed")
    nudge_ms = 1000 * (projection["sounds_s"] - projection["asked_s"])
    teeth = [tooth for tooth in movement["teeth"] if tooth["track"] == projection["track"]]

    assert f"{layout['notes'][projection['notes'][0]]['pitch']}\n" in told
    assert f"{projection['sounds_s']:.3f} s into the music" in told
    assert f"track {projection['track']}, {projection['radius_mm']:.2f} mm from the centre" in told
    assert f"at {projection['angle_deg']:.2f}°" in told
    assert all(f"{tooth['tooth']}" in told for tooth in teeth)
    wanted = "none" if abs(nudge_ms) < 0.05 else f"{abs(nudge_ms):.1f} ms {'late' if nudge_ms > 0 else 'early'}"
    assert wanted in told


def test_pointing_at_a_projection_tells_its_note_moment_tooth_track_and_nudge(window: Window) -> None:
    layout = layout_of(window)
    movement = window.context.request.get(f"{window.service.url}/v1/movements/fernhollow-31").json()
    nudged = {place for place, one in enumerate(layout["projections"]) if abs(one["sounds_s"] - one["asked_s"]) > 0.001}
    page = window.open("/discs/{disc}", READY)

    page.fill("#chart-wide", "4")
    thing = page.locator("#chart-scroll .projection").nth(40)
    thing.scroll_into_view_if_needed()
    box = thing.bounding_box()
    assert box is not None
    page.mouse.move(box["x"] + box["width"] / 2, box["y"] + box["height"] / 2)
    tells_all_of(page, layout, movement)

    page.mouse.move(0, 0)  # what a mouse points at goes before what keys have chosen
    page.focus("#stage")
    page.keyboard.press("Home")
    for _ in range(MOST_STEPS):
        if pointed_at(page) in nudged:
            break
        page.keyboard.press("ArrowRight")
    assert pointed_at(page) in nudged
    tells_all_of(page, layout, movement)


def test_the_tooth_of_a_pluck_is_drawn_lifted_then_springing_back_then_at_rest(window: Window) -> None:
    page = window.open("/discs/{disc}", READY)
    data: dict[str, Any] = json.loads(page.text_content("#disc-data") or "")
    tracks, revolution_s = data["movement"]["tracks"], data["movement"]["revolution_s"]
    projections = layout_of(window)["projections"]
    alone = next(
        one
        for one in projections
        if one["sounds_s"] > 5
        and sum(abs(one["sounds_s"] - other["sounds_s"]) < 2 for other in projections if other["track"] == one["track"])
        == 1
    )
    track, before_deg = alone["track"], data["movement"]["before_music_deg"]
    plucked_deg = before_deg + 360 * alone["sounds_s"] / revolution_s
    pushed_deg = math.degrees(tracks[track - 1]["engagement_mm"] / tracks[track - 1]["radius_mm"])

    def drawn_at(turned_deg: float) -> tuple[str, float]:
        page.evaluate(TURN_TO, turned_deg)
        wait_until(page, f"Math.abs(Number(document.querySelector('#stage').dataset.turnedDeg) - {turned_deg}) < 0.001")
        name, scale = page.evaluate(TOOTH, track)
        return name, scale

    def after(time_s: float) -> float:
        return plucked_deg + 360 * time_s / revolution_s

    assert drawn_at(plucked_deg - 1.5 * pushed_deg) == ("tooth", 1.0)
    name, half_way = drawn_at(plucked_deg - pushed_deg / 2)
    assert name == "tooth lifted"
    name, at_the_top = drawn_at(plucked_deg - pushed_deg / 50)
    assert (name, at_the_top < half_way < 1) == ("tooth lifted", True)
    name, let_go = drawn_at(after(0.001))
    assert (name, at_the_top < let_go < 1) == ("tooth sounding", True)
    name, past_rest = drawn_at(after(1 / 18))  # half a swing of nine a second
    assert (name, past_rest > 1) == ("tooth sounding", True)
    assert drawn_at(after(1.0)) == ("tooth", 1.0)


@pytest.mark.parametrize("share", ["1.0", "0.5", "0.25"])
def test_the_disc_plays_at_true_speed_or_at_the_share_of_it_that_is_chosen(window: Window, share: str) -> None:
    page = window.open("/discs/{disc}", READY)
    page.select_option("#speed", share)
    page.click("#play")
    wait_until(page, "document.querySelector('#sound').currentTime > 0.2")

    pace = page.evaluate(PACE, 2000)

    assert pace == pytest.approx(float(share), rel=0.05)
    page.click("#play")
    assert page.evaluate("document.querySelector('#sound').paused")
