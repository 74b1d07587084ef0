"""The keys of a disc's page: every key there is is pressed, and what the page lists is what its scripts answer to."""

from collections.abc import Callable

from playwright.sync_api import Page

from tests.browser.conftest import Window

READY = "#rulings[data-ready]"
# Every character of a plain keyboard, and the keys that have names (W3C, UI Events KeyboardEvent key Values).
CHARACTERS = tuple(chr(code) for code in range(ord("!"), ord("~") + 1))
NAMED = (
    *("Enter", "Escape", "Tab", "Backspace", "Delete", "Insert", "Home", "End", "PageUp", "PageDown"),
    *("ArrowLeft", "ArrowRight", "ArrowUp", "ArrowDown", "ContextMenu", "F1", "F2", "F5", "Pause"),
)
HELD = ("", "Shift+", "Control+", "Control+Shift+", "Meta+", "Meta+Shift+", "Alt+", "Alt+Shift+")
# A key is answered where the page keeps the browser from answering it.
PRESS = """([place, keys]) => keys.filter((whole) => {
  const held = whole.match(/^((?:Control|Meta|Alt|Shift)[+])*/)[0];
  const name = whole.slice(held.length);
  return !document.querySelector(place).dispatchEvent(new KeyboardEvent("keydown", {
    key: name === "Space" ? " " : name, ctrlKey: held.includes("Control"), metaKey: held.includes("Meta"),
    altKey: held.includes("Alt"), shiftKey: held.includes("Shift"), bubbles: true, cancelable: true,
  }));
})"""


def answered(page: Page, place: str, held: tuple[str, ...] = HELD) -> set[str]:
    """The keys that are answered where the focus is; letters held with others are told as capitals."""
    keys = [f"{before}{key}" for before in held for key in (*CHARACTERS, "Space", *NAMED)]
    return {capital(key) for key in page.evaluate(PRESS, [place, keys])}


def capital(key: str) -> str:
    return key[:-1] + key[-1].upper() if key[:-1].endswith("+") else key


def listed(page: Page) -> set[str]:
    rows = page.locator("#keys dt[data-keys]")
    return {key for place in range(rows.count()) for key in str(rows.nth(place).get_attribute("data-keys")).split()}


def test_the_keys_that_are_listed_are_those_that_drawing_and_chart_answer_to_and_no_others(window: Window) -> None:
    page = window.open("/discs/{disc}", READY)
    told = {key for key in listed(page) if not key.startswith("Mark+")}
    # With Shift a key does what it does alone, unless it is told to do something else: + is typed with Shift.
    told |= {f"Shift+{key}" for key in told if not key.startswith(("Shift", "Control", "Meta"))}

    for place in ("#stage", "#chart-scroll"):
        assert answered(page, place) == told, place


def test_on_the_mark_of_a_finding_the_keys_listed_for_it_are_answered_and_no_others(window: Window) -> None:
    page = window.open("/discs/{faulty}", READY)

    told = {key.removeprefix("Mark+") for key in listed(page) if key.startswith("Mark+")}

    assert told == {"Enter", "Space"}
    assert answered(page, "#stage [data-finding]", ("",)) == told


def test_where_no_ruling_can_be_made_its_keys_are_neither_listed_nor_answered(
    open_window: Callable[..., Window],
) -> None:
    page = open_window(signed_in=True).open("/orders/{order}/discs/1", "#stage[data-ready]")

    assert not {key for key in listed(page) if "Control" in key or "Meta" in key}
    assert not {key for key in answered(page, "#stage") if "Control" in key or "Meta" in key}
