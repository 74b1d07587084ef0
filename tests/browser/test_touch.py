"""Fingers on the disc, on a phone: a tap chooses, one scrolls the page or moves the drawing, two do all at once."""

import math
from collections.abc import Callable, Sequence

import pytest
from playwright.sync_api import CDPSession, Page

from tests.browser.conftest import Window
from tests.browser.doing import turned_deg
from tests.browser.driving import wait_until

READY = "#rulings[data-ready]"
STEPS = 8  # of a movement; a finger is seen some 60 times a second
# A place near projections where none lies: a finger is wider than what it is meant for.
BESIDE = """() => {
  for (const one of document.querySelectorAll("#stage .projection")) {
    const box = one.getBoundingClientRect();
    for (const [right, down] of [[9, 0], [-9, 0], [0, 9], [0, -9]]) {
      const place = [box.x + box.width / 2 + right, box.y + box.height / 2 + down];
      const there = document.elementFromPoint(...place);
      if (there?.closest("#stage .disc") && !there.closest(".projection, .left-out")) return place;
    }
  }
  return null;
}"""
Places = Sequence[tuple[float, float]]


class Fingers:
    """Fingers on the screen, each at a place in pixels."""

    def __init__(self, page: Page) -> None:
        self.cdp: CDPSession = page.context.new_cdp_session(page)

    def _send(self, kind: str, places: Places) -> None:
        points = [{"x": x, "y": y, "id": finger} for finger, (x, y) in enumerate(places)]
        self.cdp.send("Input.dispatchTouchEvent", {"type": kind, "touchPoints": points})

    def go(self, begin: Places, end: Places) -> None:
        """Put fingers down, move them evenly, and take them off."""
        for count in range(1, len(begin) + 1):
            self._send("touchStart", begin[:count])
        for step in range(1, STEPS + 1):
            share = step / STEPS
            pairs = zip(begin, end, strict=True)
            self._send("touchMove", [(x + (u - x) * share, y + (v - y) * share) for (x, y), (u, v) in pairs])
        self._send("touchEnd", [])


@pytest.fixture
def page(open_window: Callable[..., Window]) -> Page:
    page = open_window(size="phone", touch=True).open("/discs/{disc}", READY)
    page.locator("#stage").evaluate("stage => stage.scrollIntoView({block: 'center'})")
    return page


def middle_of_stage(page: Page) -> tuple[float, float]:
    box = page.locator("#stage").bounding_box()
    assert box is not None
    return box["x"] + box["width"] / 2, box["y"] + box["height"] / 2


def zoom(page: Page) -> float:
    return float(str(page.get_attribute("#stage", "data-zoom")))


def where_drawn(page: Page) -> str:
    return str(page.get_attribute("#stage .view", "transform"))


def round_about(middle: tuple[float, float], radius: float, deg: float) -> Places:
    """Two fingers across from each other on a circle."""
    x, y = radius * math.cos(math.radians(deg)), radius * math.sin(math.radians(deg))
    return [(middle[0] - x, middle[1] - y), (middle[0] + x, middle[1] + y)]


def test_two_fingers_apart_bring_the_disc_nearer_and_do_not_turn_it(page: Page) -> None:
    middle = middle_of_stage(page)

    Fingers(page).go(round_about(middle, 30, 20), round_about(middle, 90, 20))

    assert zoom(page) == pytest.approx(3, rel=0.1)  # 90 / 30
    assert turned_deg(page) == pytest.approx(0, abs=0.5) or turned_deg(page) == pytest.approx(360, abs=0.5)


def test_two_fingers_round_about_turn_the_disc_as_far_as_they_go(page: Page) -> None:
    middle = middle_of_stage(page)

    Fingers(page).go(round_about(middle, 80, 20), round_about(middle, 80, 50))

    turned = turned_deg(page)
    assert min(turned, 360 - turned) == pytest.approx(30, abs=2)
    assert zoom(page) == pytest.approx(1, abs=0.15)


def test_one_finger_scrolls_the_page_over_a_whole_disc_and_moves_one_that_is_near(page: Page) -> None:
    x, y = middle_of_stage(page)
    whole, scrolled = where_drawn(page), page.evaluate("scrollY")

    Fingers(page).go([(x, y)], [(x, y - 120)])
    wait_until(page, f"scrollY > {scrolled + 40}")
    assert where_drawn(page) == whole

    page.click("#nearer")
    page.click("#nearer")
    page.locator("#stage").evaluate("stage => stage.scrollIntoView({block: 'center'})")
    x, y = middle_of_stage(page)
    near, scrolled = where_drawn(page), page.evaluate("scrollY")
    Fingers(page).go([(x, y)], [(x - 40, y - 60)])

    assert where_drawn(page) != near
    assert page.evaluate("scrollY") == scrolled
    assert page.get_attribute("#pointed", "data-thing") is None  # what moved the drawing chooses nothing


def test_a_tap_beside_a_projection_chooses_it_and_its_rulings_are_offered(page: Page) -> None:
    beside = page.evaluate(BESIDE)
    assert beside is not None

    page.touchscreen.tap(*beside)

    assert page.locator("#stage .projection.chosen, #stage .left-out.chosen").count() == 1
    assert str(page.get_attribute("#pointed", "data-thing")).split(" ")[0] in ("projection", "left_out")
    assert page.locator("#ruling-choices button").count() > 0
    assert " at " in page.inner_text("#brief")
