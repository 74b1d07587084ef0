"""The settings on the page of a new disc: what is shown when, what is sent, and files they come from and go into."""

import json
from collections.abc import Callable
from typing import Any

import pytest
from playwright.sync_api import Page

from tests.browser.access import faults_of
from tests.browser.conftest import SHORTEST_PX, SIZES, Window, wait_until
from tests.service.shop import TUNE

READY = "#new-disc[data-ready]"
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words
FORMAT = {"format": "discwright-settings/1"}


def begun(window: Window) -> Page:
    return window.open("/new", READY)


def at(name: str) -> str:
    return f"[id='{name}']"


def saved(page: Page) -> dict[str, Any]:
    """The settings as they would be sent: a file of them is made from the same words."""
    with page.expect_download() as download:
        page.click("#save-settings")
    settings: dict[str, Any] = json.loads(download.value.path().read_text(encoding="utf-8"))
    return settings


def take(page: Page, settings: object, name: str = "s.json") -> None:
    content = settings if isinstance(settings, bytes) else json.dumps(settings).encode()
    page.set_input_files("#settings-file", {"name": name, "mimeType": "application/json", "buffer": content})


def taken(page: Page, settings: object) -> None:
    take(page, settings)
    wait_until(page, "document.querySelector('#said').textContent.includes('s.json')")


def refused(page: Page, settings: object) -> str:
    """Why a file of settings is not taken."""
    take(page, settings)
    page.wait_for_selector("#settings-file-fault:not(:empty)")
    return page.inner_text("#settings-file-fault")


def test_as_the_page_is_opened_nothing_but_the_defaults_is_asked_for(window: Window) -> None:
    assert saved(begun(window)) == FORMAT


@pytest.mark.parametrize(
    ("choice", "value", "field", "wanted"),
    [
        ("transpose.mode", "fixed", "transpose.semitones", {"transpose": {"mode": "fixed", "semitones": 7}}),
        ("transpose.mode", "best", "transpose.range", {"transpose": {"range": 7}}),
        ("speed.mode", "factor", "speed.factor", {"speed": {"mode": "factor", "factor": 7}}),
        ("speed.mode", "fit", "speed.most", {"speed": {"mode": "fit", "most": 7}}),
        ("speed.mode", "best", "speed.most", {"speed": {"mode": "best", "most": 7}}),
        ("octave_moves", "outer", "octave_fit", {"octave_moves": "outer", "octave_fit": 7}),
        ("passage-from", "s", "passage.from_s", {"passage": {"from_s": 7}}),
        ("passage-from", "bar", "passage.from_bar", {"passage": {"from_bar": 7}}),
        ("passage-to", "s", "passage.to_s", {"passage": {"to_s": 7}}),
        ("passage-to", "bar", "passage.to_bar", {"passage": {"to_bar": 7}}),
    ],
)
def test_a_field_is_shown_and_sent_with_the_mode_that_it_belongs_to_alone_and_is_not_lost_with_another(
    window: Window, choice: str, value: str, field: str, wanted: dict[str, Any]
) -> None:
    page = begun(window)
    page.evaluate("document.querySelectorAll('details').forEach((one) => { one.open = true; })")
    options = page.locator(f"{at(choice)} option")
    other = "fixed" if value == "best" and choice == "transpose.mode" else str(options.first.get_attribute("value"))

    page.select_option(at(choice), other)
    assert not page.is_visible(at(field))
    page.select_option(at(choice), value)
    page.fill(at(field), "7")
    assert saved(page) == {**FORMAT, **wanted}
    page.select_option(at(choice), other)
    assert field.rpartition(".")[2] not in json.dumps(saved(page))
    page.select_option(at(choice), value)

    assert page.is_visible(at(field))
    assert saved(page) == {**FORMAT, **wanted}


def test_channels_are_ticked_and_either_left_out_or_kept_alone(window: Window) -> None:
    page = begun(window)
    page.click("#fold-channels summary")

    page.select_option("#channels-which", "leave_out")
    for channel in ("10", "3"):
        page.check(f"{at('channels.leave_out')} input[value='{channel}']")
    assert saved(page) == {**FORMAT, "channels": {"leave_out": [3, 10]}}
    assert page.inner_text("#fold-channels .changed") == "1 changed"
    page.select_option("#channels-which", "keep_only")
    page.check(f"{at('channels.keep_only')} input[value='1']")

    assert saved(page) == {**FORMAT, "channels": {"keep_only": [1]}}


def test_settings_come_from_a_json_file_and_go_into_one_unchanged(window: Window) -> None:
    page = begun(window)
    page.fill("#discs", "3")  # what a file does not state goes back to its default
    settings = {
        "format": "discwright-settings/1",
        "speed": {"mode": "factor", "factor": 1.1},
        "passage": {"from_bar": 3, "from_beat": 2.5, "to_s": 61.5},
        "channels": {"leave_out": [3, 4], "lead": 2},
        "title": "Evening",
        "rulings": [{"note": 1, "do": "leave-out"}],
    }

    taken(page, settings)

    assert page.input_value(at("speed.factor")) == "1.1"
    assert page.input_value("#passage-from") == "bar"
    assert page.inner_text("#fold-part .changed") == "3 changed"
    assert saved(page) == settings


def test_a_number_that_is_stated_with_its_worth_comes_as_the_number(window: Window) -> None:
    page = begun(window)

    taken(page, {"largest_nudge_ms": {"value": 12, "plus_minus": 1, "basis": "assumed"}})

    assert saved(page) == {**FORMAT, "largest_nudge_ms": 12}


def test_rulings_that_come_with_a_file_are_told_and_can_be_taken_away(window: Window) -> None:
    page = begun(window)
    rulings = [
        {"note": 7, "do": "leave-out"},
        {"note": 12, "do": "place", "track": 4},
        {"note": 90, "do": "must-sound"},
    ]
    assert not page.is_visible("#rulings")

    taken(page, {"rulings": rulings})
    assert page.inner_text("#rulings-title") == "3 rulings by hand come with this file"
    rows = page.locator("#rulings-list li span")
    assert rows.all_inner_texts() == ["Note 7 is left out", "Note 12 goes on track 4", "Note 90 must sound"]
    assert page.is_visible(at("octave_fit"))  # a ruling may move a note by octaves
    page.click("[aria-label='Remove: Note 12 goes on track 4']")
    assert page.evaluate("document.activeElement.id") == "rulings"
    assert saved(page) == {**FORMAT, "rulings": [rulings[0], rulings[2]]}
    page.click("#rulings-drop")

    assert not page.is_visible("#rulings")
    assert not page.is_visible(at("octave_fit"))
    assert saved(page) == FORMAT


def test_a_ruling_that_the_service_refuses_is_told_where_the_rulings_stand(window: Window) -> None:
    window.watch.bears.append(REFUSED)
    page = begun(window)
    page.set_input_files("#tune", {"name": "t.mid", "mimeType": "audio/midi", "buffer": TUNE})
    taken(page, {"rulings": [{"note": 0, "do": "leave-out"}, {"note": 49_999, "do": "leave-out"}]})

    page.click("#send")
    page.wait_for_selector("#rulings-fault:not(:empty)")

    assert page.inner_text("#rulings-fault").startswith("Note 49999 is left out: ")


@pytest.mark.parametrize("size", SIZES)
def test_with_all_unfolded_with_faults_and_rulings_the_page_breaks_no_rule_of_access_and_never_scrolls_sideways(
    open_window: Callable[..., Window], size: str, take_pictures: Callable[[Page, str], None]
) -> None:
    window = open_window(size=size)
    window.watch.bears.append(REFUSED)
    page = begun(window)
    page.set_input_files("#tune", {"name": "t.mid", "mimeType": "audio/midi", "buffer": TUNE})
    taken(
        page,
        {
            **{"speed": {"mode": "best"}, "octave_moves": "all", "passage": {"from_bar": 1, "to_s": 50}},
            **{"channels": {"lead": 2, "leave_out": [2]}, "rulings": [{"note": 49_999, "do": "leave-out"}]},
        },
    )
    page.evaluate("document.querySelectorAll('details').forEach((one) => { one.open = true; })")
    page.fill("#discs", "99")
    page.click("#send")
    page.wait_for_selector("#discs-fault:not(:empty)")

    take_pictures(page, f"new-unfolded-{size}")
    assert faults_of(page) == []
    if size == "phone":
        page.set_viewport_size({"width": SHORTEST_PX, "height": 740})
        assert page.evaluate("document.documentElement.scrollWidth") <= SHORTEST_PX


@pytest.mark.parametrize(
    ("settings", "why"),
    [
        ({"titel": "Evening", "discs": 2}, "/titel no such field; remove it or check its spelling"),
        ({"speed": {"mode": "fit", "fast": 1}}, "/speed/fast no such field; remove it or check its spelling"),
        ({"rulings": [{"note": 1, "do": "leave-out", "why": 1}]}, "/rulings/0/why no such field"),
        (
            {"rulings": [{"note": 1, "do": "louder"}]},
            "/rulings/0/do louder is not among what may stand here: leave-out,",
        ),
        ({"discs": "two"}, "/discs two is no number as it is written here"),
        ({"format": "discwright-settings/2"}, "/format discwright-settings/2 is not among what may"),
        ([1], "an object is needed here"),
        (b"{", "s.json is not JSON"),
    ],
)
def test_a_file_that_holds_what_no_settings_have_is_refused_whole_and_the_fields_stay(
    window: Window, settings: object, why: str
) -> None:
    page = begun(window)
    page.fill("#discs", "3")

    assert why in refused(page, settings)

    assert page.inner_text("#faults p") == "The settings file is not taken. The fields are as they were."
    assert saved(page) == {**FORMAT, "discs": 3}


def test_of_a_file_with_many_faults_the_first_are_told_and_how_many_more_there_are(window: Window) -> None:
    words = refused(begun(window), {f"field_{n}": n for n in range(20)})

    assert "/field_7" in words
    assert "/field_8" not in words
    assert words.strip().endswith("and 12 more")
