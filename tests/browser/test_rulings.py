"""Rulings by hand: from disc and chart, by mouse and by keys alone, back and forth, and such as cannot be."""

from typing import Any

import pytest
from playwright.sync_api import Locator, Page

from tests.browser.conftest import Window
from tests.browser.doing import focused, settings_of, tab_to
from tests.browser.driving import wait_until

READY = "#rulings[data-ready]"
DONE = "document.querySelector('#rulings').getAttribute('aria-busy') === 'false'"
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words
CLASSES = {"projection": "projection", "left_out": "left-out"}
MOST_STEPS = 80
NOTCHES = 6  # of the wheel


def layout_of(page: Page) -> Any:
    """The layout of the disc whose address the page has, as the API keeps it."""
    answer = page.request.get(page.url.replace("/discs/", "/v1/layouts/"))
    assert answer.status == 200, answer.text()
    return answer.json()["layout"]


def chosen(page: Page) -> tuple[str, int]:
    """What is told of: "projection" or "left_out", and which in the layout."""
    kind, index = str(page.get_attribute("#pointed", "data-thing")).split(" ")
    return kind, int(index)


def note_chosen(page: Page) -> int:
    kind, index = chosen(page)
    layout = layout_of(page)
    note = layout["projections"][index]["notes"][0] if kind == "projection" else layout["left_out"][index]["note"]
    assert page.inner_text("#ruling-for").startswith(f"{layout['notes'][note]['pitch']} at ")
    return int(note)


def played(page: Page) -> set[int]:
    """The notes that the disc plays."""
    return {note for one in layout_of(page)["projections"] for note in one["notes"]}


def place_left_out(page: Page, note: int) -> int:
    return next(place for place, one in enumerate(layout_of(page)["left_out"]) if one["note"] == note)


def middle(thing: Locator) -> tuple[float, float]:
    box = thing.bounding_box()
    assert box is not None
    return box["x"] + box["width"] / 2, box["y"] + box["height"] / 2


class ByMouse:
    """Somebody with a mouse."""

    def __init__(self, page: Page, area: str) -> None:
        self.page, self.area = page, area

    def choose(self, kind: str, place: int) -> int:
        """Go near a projection or a left-out note, and press on it; gives the note that is chosen then."""
        self.page.fill("#chart-wide", "4")
        self.page.click("#whole")
        thing = self.page.locator(f"{self.area} .{CLASSES[kind]}").nth(place)
        thing.scroll_into_view_if_needed()
        if self.area == "#stage":
            self.page.mouse.move(*middle(thing))
            for _ in range(NOTCHES):
                self.page.mouse.wheel(0, -100)
            wait_until(self.page, "Number(document.querySelector('#stage').dataset.zoom) > 5")
        self.page.mouse.click(*middle(thing))
        assert chosen(self.page) == (kind, place)
        return note_chosen(self.page)

    def press(self, button: str) -> None:
        self.page.click(f"#{button}")
        wait_until(self.page, DONE)

    def undo(self) -> None:
        self.press("ruling-undo")

    def redo(self) -> None:
        self.press("ruling-redo")


class ByKeys(ByMouse):
    """Somebody with a keyboard alone."""

    def choose(self, kind: str, place: int) -> int:
        """Go along the disc by the arrow keys from its beginning, to the first of a kind past some; gives its note."""
        self.page.keyboard.press("Escape")
        tab_to(self.page, self.area[1:])
        self.page.keyboard.press("Home")
        for _ in range(MOST_STEPS):
            if place <= 0 and chosen(self.page)[0] == kind:
                assert self.page.evaluate("document.activeElement.getAttribute('aria-label')")
                return note_chosen(self.page)
            self.page.keyboard.press("ArrowRight")
            place -= 1
        raise AssertionError(f"no {kind} is reached")

    def press(self, button: str) -> None:
        tab_to(self.page, button)
        self.page.keyboard.press("Enter")
        wait_until(self.page, DONE)

    def undo(self) -> None:
        self.page.keyboard.press("Control+z")

    def redo(self) -> None:
        self.page.keyboard.press("Control+Shift+Z")


class Ruled:
    """The rulings that were made on a page, and what must hold after each."""

    def __init__(self, page: Page) -> None:
        self.page = page
        self.addresses = [page.url]
        self.rulings: list[dict[str, Any]] = []

    def now(self, ruling: dict[str, Any], words: str) -> Any:
        """List, difference, address and the settings that the API keeps tell of one ruling more; gives the layout."""
        self.rulings.append(ruling)
        assert self.page.inner_text("#ruling-fault") == ""
        assert self.page.locator("#ruling-list li").count() == len(self.rulings)
        assert words in self.page.inner_text("#ruling-difference-words")
        assert self.page.url not in self.addresses
        self.addresses.append(self.page.url)
        assert settings_of(self.page)["rulings"] == self.rulings
        return layout_of(self.page)


def take_out(person: ByMouse, ruled: Ruled) -> None:
    note = person.choose("projection", 5)
    person.press("rule-out")
    layout = ruled.now({"note": note, "do": "leave-out"}, "Gone: 1")
    assert {"note": note, "reason": "ruled-out"} in layout["left_out"]


def put_on_a_tooth(person: ByMouse, ruled: Ruled) -> None:
    note = person.choose("left_out", 9)
    track = int(person.page.input_value("#rule-track"))
    person.press("rule-put")
    layout = ruled.now({"note": note, "do": "place", "track": track}, "New: ")
    assert note in [one["notes"][0] for one in layout["projections"] if one["track"] == track]


def move_by_an_octave(person: ByMouse, ruled: Ruled) -> None:
    note = person.choose("projection", 16)
    step = "rule-up" if person.page.locator("#rule-up").count() else "rule-down"
    person.press(step)
    moved = next(one for one in layout_of(person.page)["projections"] if note in one["notes"])
    ruled.now({"note": note, "do": "place", "track": moved["track"]}, "Moved: ")
    assert moved["octave_semitones"] == (12 if step == "rule-up" else -12)


def say_what_must_sound(person: ByMouse, ruled: Ruled) -> None:
    note = person.choose("projection", 20)
    person.press("rule-must")
    ruled.now({"note": note, "do": "must-sound"}, "Worth kept: ")


@pytest.mark.parametrize("way", [ByMouse, ByKeys])
@pytest.mark.parametrize("area", ["#stage", "#chart-scroll"])
def test_notes_are_taken_out_put_on_a_tooth_moved_and_made_to_sound_and_all_is_undone_and_done_again(
    window: Window, area: str, way: type[ByMouse]
) -> None:
    page = window.open("/discs/{faulty}", READY)
    person, ruled = way(page, area), Ruled(page)

    for deed in (take_out, put_on_a_tooth, move_by_an_octave, say_what_must_sound):
        deed(person, ruled)
    for address in reversed(ruled.addresses[:-1]):
        person.undo()
        wait_until(page, f"location.href === {address!r}")
    assert page.locator("#ruling-list li").count() == 0
    assert page.is_disabled("#ruling-undo")
    for address in ruled.addresses[1:3]:
        person.redo()
        wait_until(page, f"location.href === {address!r}")

    assert page.locator("#ruling-list li").count() == 2
    assert settings_of(page)["rulings"] == ruled.rulings[:2]


def test_a_ruling_that_cannot_be_is_told_and_nothing_is_lost(window: Window) -> None:
    window.watch.bears.append(REFUSED)
    page = window.open("/discs/{faulty}", READY)
    person = ByMouse(page, "#chart-scroll")
    before = played(page)
    wanted = person.choose("left_out", 0)
    person.press("rule-must")
    assert page.inner_text("#ruling-fault") == ""
    beaten = min(before - played(page))  # it gave way on the same tooth
    address, listed = page.url, page.inner_text("#ruling-list")

    person.choose("left_out", place_left_out(page, beaten))
    page.click("#rule-must")
    page.wait_for_selector("#ruling-fault:not(:empty)")

    words = page.inner_text("#ruling-fault")
    assert words.startswith("These rulings cannot be followed. The disc shown is as it was.")
    assert str(beaten) in words
    assert str(wanted) in words
    assert focused(page) == "ruling-fault"
    assert page.inner_text("#ruling-list") == listed
    assert page.url == address
    assert settings_of(page)["rulings"] == [{"note": wanted, "do": "must-sound"}]
    person.undo()
    assert page.inner_text("#ruling-fault") == ""
    assert played(page) == before
    person.redo()
    assert page.url == address
