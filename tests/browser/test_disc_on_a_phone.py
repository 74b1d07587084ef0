"""What a disc's page lays out anew on a phone: its tables are read without scrolling sideways, and whole."""

from collections.abc import Callable

import pytest

from tests.browser.conftest import Window

READY = "#rulings[data-ready]"
PAST_ITS_EDGE = """part => {
  const box = document.querySelector(`[data-part=${part}] .wide`);
  return box.scrollWidth - box.clientWidth;
}"""


@pytest.mark.parametrize("part", ["lost", "files"])
def test_a_table_is_read_on_a_phone_without_scrolling_sideways_and_all_that_it_says_is_there(
    open_window: Callable[..., Window], part: str
) -> None:
    wide, phone = (open_window(size=size).open("/discs/{faulty}", READY) for size in ("wide", "phone"))

    said = [page.locator(f"[data-part={part}] tbody :is(th, td)").all_inner_texts() for page in (wide, phone)]
    shown = phone.locator(f"[data-part={part}] tbody :is(th, td):visible").all_inner_texts()

    assert said[0] == said[1]
    assert shown == [words for words in said[1] if words != "–"]  # a dash says nothing where no column lines it up
    assert phone.evaluate(PAST_ITS_EDGE, part) <= 0
