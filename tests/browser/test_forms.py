"""The forms of movements and cutters in use: faults as one types, cells of a spreadsheet, keys, JSON, saving."""

import json
from collections.abc import Callable
from itertools import count
from typing import Any

import pytest
from playwright.sync_api import Page, Request

from layout.documents import shipped_text
from tests.browser.conftest import Window, wait_until

READY = "form[data-ready]"
REFUSED = "the server responded with a status of 4"  # what the browser's own console says beside the page's words
PASTE = """([pointer, copied]) => {
  const held = new DataTransfer();
  held.setData("text/plain", copied);
  const told = { clipboardData: held, bubbles: true, cancelable: true };
  document.getElementById(`at${pointer}`).dispatchEvent(new ClipboardEvent("paste", told));
}"""
_numbers = count(1)


@pytest.fixture
def signed_in(open_window: Callable[..., Window]) -> Window:
    return open_window(signed_in=True)


def form_of(window: Window, path: str) -> Page:
    page = window.open(path, READY)
    # The question whether to leave what is not saved is the browser's own.
    page.on("dialog", lambda dialog: dialog.accept())
    return page


def field(page: Page, pointer: str) -> Any:
    return page.locator(f'[id="at{pointer}"]')


def fault(page: Page, pointer: str) -> str:
    return page.locator(f'[id="at{pointer}-fault"]').inner_text()


def document(page: Page) -> Any:
    return json.loads(page.input_value("#json-text"))


def focused(page: Page) -> str:
    return str(page.evaluate("document.activeElement.id"))


def paste(page: Page, pointer: str, copied: str) -> None:
    page.evaluate(PASTE, [pointer, copied])


def sent(page: Page) -> list[str]:
    """The writes that the page sends from now on."""
    asked: list[str] = []

    def note(request: Request) -> None:
        if request.method != "GET":
            asked.append(f"{request.method} {request.url}")

    page.on("request", note)
    return asked


def new_movement() -> dict[str, Any]:
    return {**json.loads(shipped_text("tarnlight-17")), "id": f"larkfield-{next(_numbers)}"}


def take_file(page: Page, text: str) -> None:
    page.set_input_files("#json-file", {"name": "m.json", "mimeType": "application/json", "buffer": text.encode()})
    wait_until(page, "document.querySelector('#said').textContent.includes('m.json')")


@pytest.mark.parametrize(
    ("path", "pointer", "wrong", "words", "right"),
    [
        (
            "/movements/tarnlight-17/edit",
            "/revolution_s",
            "0",
            "0 s is out of range; allowed is from 0.001 to 86400 s",
            "40",
        ),
        (
            "/movements/tarnlight-17/edit",
            "/disc/outer_diameter_mm",
            "2001",
            "2001 mm is out of range; allowed is",
            "118",
        ),
        ("/movements/tarnlight-17/edit", "/disc/outer_diameter_mm", "wide", "wide is no number as it is", "118"),
        (
            "/movements/tarnlight-17/edit",
            "/teeth/2/pitch",
            "H4",
            "H4 is not written as it must be here, such as C4,",
            "A4",
        ),
        ("/movements/tarnlight-17/edit", "/teeth/2/track", "1.5", "1.5 is no whole number; allowed is from 1", "3"),
        (
            "/cutters/turn-press/edit",
            "/min_web_mm",
            "51",
            "51 mm is out of range; allowed is from 0.001 to 50 mm",
            "0.5",
        ),
        ("/cutters/turn-press/edit", "/press/take_up_deg", "0", "0 ° is out of range; allowed is above 0 to 30 °", "1"),
    ],
)
def test_what_is_wrong_is_told_at_its_field_with_what_is_allowed_while_it_is_typed(
    signed_in: Window, path: str, pointer: str, wrong: str, words: str, right: str
) -> None:
    page = form_of(signed_in, path)
    asked = sent(page)

    field(page, pointer).fill(wrong)
    told = fault(page, pointer)
    described = field(page, pointer).get_attribute("aria-describedby")
    invalid = field(page, pointer).get_attribute("aria-invalid")
    field(page, pointer).fill(right)

    assert told.startswith(words)
    assert (described, invalid) == (f"at{pointer}-fault", "true")
    assert fault(page, pointer) == ""
    assert field(page, pointer).get_attribute("aria-invalid") is None
    assert asked == []


def test_what_a_number_is_worth_is_stated_beside_it_and_checked_by_itself(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    place = page.locator('.field[data-pointer="/disc/thickness_mm"]')

    place.locator(".off-by").fill("-1")
    told, invalid = fault(page, "/disc/thickness_mm"), place.locator("[aria-invalid]")
    assert told == "-1 mm is out of range; allowed is from 0 to 1000000000 mm"
    assert invalid.count() == 1
    assert "off-by" in str(invalid.get_attribute("class"))
    place.locator(".off-by").fill("0.02")
    place.locator("select").select_option("calculated")

    assert document(page)["disc"]["thickness_mm"] == {"value": 0.5, "plus_minus": 0.02, "basis": "calculated"}
    assert fault(page, "/disc/thickness_mm") == ""


def test_nothing_is_sent_while_a_field_is_wrong_and_the_focus_goes_to_the_first(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    field(page, "/teeth/0/track").fill("0")
    field(page, "/disc/thickness_mm").fill("")
    asked = sent(page)

    page.click("#save")

    assert focused(page) == "at/disc/thickness_mm"
    assert "/teeth/0/track" in page.inner_text("#answer")
    page.click("#first")
    assert focused(page) == "at/disc/thickness_mm"
    page.wait_for_timeout(1000)  # longer than the pause after which the service is asked
    assert asked == []


def test_a_clash_that_only_reading_finds_is_told_at_its_field_after_a_pause_and_is_gone_once_mended(
    signed_in: Window,
) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    asked = sent(page)

    field(page, "/teeth/4/track").fill("99")
    wait_until(page, "document.getElementById('at/teeth/4/track-fault').textContent !== ''")
    told = fault(page, "/teeth/4/track")
    page.locator('[id="at/teeth/4/track"]').fill("5")
    wait_until(page, "document.getElementById('at/teeth/4/track-fault').textContent === ''")

    assert told == "tooth 5: there is no track 99"
    wait_until(page, "document.querySelector('#first').hidden")
    assert {one.rpartition("/v1")[2] for one in asked} == {"/movements/check"}


def test_a_clash_that_has_no_field_of_its_own_is_told_all_the_same(signed_in: Window) -> None:
    page = form_of(signed_in, "/cutters/turn-press/edit")
    page.locator("summary", has_text="R3").click()

    field(page, "/tools/3/tool").fill("R5")
    wait_until(page, "document.querySelector('[data-pointer=\"/tools\"] .fault').textContent !== ''")

    assert page.locator('[data-pointer="/tools"] > fieldset > .fault').inner_text() == "two tools have the same name"


def test_teeth_copied_from_a_spreadsheet_are_pasted_with_their_names_and_without(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")

    paste(
        page,
        "/teeth/0/tooth",
        "Tooth\tTrack\tPitch\tHas a damper\tOut of tune by\r\n1\t1\tE4\tno\t-4 ± 1 measured\r\n2\t2\tF#4\tyes\t2,5\r\n",
    )
    paste(page, "/teeth/16/track", "17\tA6\n18\tH6")

    teeth = document(page)["teeth"]
    worth = {"value": -4, "plus_minus": 1, "basis": "measured"}
    assert teeth[0] == {"tooth": 1, "track": 1, "pitch": "E4", "damped": False, "cents": worth}
    assert teeth[1] == {"tooth": 2, "track": 2, "pitch": "F#4", "damped": True, "cents": 2.5}
    assert teeth[16:] == [{"tooth": 17, "track": 17, "pitch": "A6"}, {"track": 18, "pitch": "H6"}]
    assert field(page, "/teeth/0/cents").input_value() == "-4 ± 1 measured"
    assert fault(page, "/teeth/17/pitch").startswith("H6 is not written as it must be")
    assert focused(page) == "at/teeth/16/track"
    assert page.inner_text("#said") == "Rows pasted: 2."


def test_columns_that_are_pasted_past_the_last_one_are_told_and_not_lost_in_silence(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    before = document(page)["teeth"][0]

    paste(page, "/teeth/0/pitch", "\t".join(["F#4", *["1"] * 20]))

    assert document(page)["teeth"][0]["pitch"] == "F#4" != before["pitch"]
    told = page.inner_text("#said")  # pitch is the last of the columns shown
    assert told.startswith("Rows pasted: 1. Columns not taken: 20, past the last one shown.")


def test_a_list_of_tracks_is_pasted_by_its_radii(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    page.locator('[data-pointer="/tracks"] .either select').select_option(index=0)
    page.locator('[data-pointer="/tracks"] .under button').first.click()
    assert document(page)["tracks"] == [{"track": 1}]

    paste(page, "/tracks/0/track", "1\t20.1 ± 0.05\n2\t22,3\n3\t22.2")
    wait_until(page, "document.querySelector('[id=\"at/tracks/2/radius_mm-fault\"]') !== null")

    worth = {"value": 20.1, "plus_minus": 0.05}
    assert [track["radius_mm"] for track in document(page)["tracks"]] == [worth, 22.3, 22.2]
    wait_until(page, "document.getElementById('at/tracks/2/radius_mm-fault').textContent !== ''")
    assert fault(page, "/tracks/2/radius_mm") == "track 3 (22.2 mm) must lie outside track 2 (22.3 mm)"


def test_by_keys_alone_a_row_is_added_filled_and_removed_and_the_comb_follows(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    before = document(page)["teeth"]
    field(page, "/teeth/16/pitch").focus()

    page.keyboard.press("Enter")
    assert focused(page) == "at/teeth/17/track"
    page.keyboard.type("17")
    page.keyboard.press("Tab")
    page.keyboard.type("G6")
    assert document(page)["teeth"] == [*before, {"tooth": 18, "track": 17, "pitch": "G6"}]
    assert page.locator(".comb-live .tooth").count() == 18
    page.keyboard.press("ArrowUp")
    assert focused(page) == "at/teeth/16/pitch"
    page.keyboard.press("ArrowDown")
    page.keyboard.press("Alt+Delete")

    assert document(page)["teeth"] == before
    assert focused(page).startswith("at/teeth/16/")
    assert page.locator(".comb-live .tooth").count() == 17


def test_a_document_comes_from_a_file_and_goes_into_one_without_loss_and_what_is_unknown_is_kept(
    signed_in: Window,
) -> None:
    page = form_of(signed_in, "/movements/add")
    movement = {**new_movement(), "maker_note": {"seen": [1, "two", None]}}
    movement["revolution_s"] = {"value": 40, "plus_minus": 0.5, "basis": "assumed"}
    text = json.dumps(movement, ensure_ascii=False, indent=1)
    take_file(page, text)
    with page.expect_download() as untouched:
        page.click("#to-file")

    field(page, "/title").fill("Larkfield, ½ turn")
    with page.expect_download() as changed:
        page.click("#to-file")

    assert untouched.value.path().read_text(encoding="utf-8") == text
    kept = json.loads(changed.value.path().read_text(encoding="utf-8"))
    assert kept == {**movement, "title": "Larkfield, ½ turn"}
    assert list(kept) == list(movement)
    assert "there is no such field" in str(
        page.evaluate("document.querySelector('#save').click(), document.querySelector('#answer').innerText")
    )


def test_a_movement_is_entered_saved_changed_and_saved_again(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/add")
    movement = new_movement()
    del movement["revision"]
    take_file(page, json.dumps(movement))

    page.click("#save")
    page.wait_for_selector("#answer .good")
    field(page, "/revolution_s").fill("41")
    page.click("#save")
    wait_until(page, "document.querySelector('#answer').innerText.includes('revision 2')")

    assert page.url.endswith(f"/movements/{movement['id']}/edit")
    told = page.evaluate(f"fetch('/v1/movements/{movement['id']}').then((answer) => answer.json())")
    assert (told["revolution_s"], told["revision"]) == (41, 2)


def test_what_the_service_finds_on_saving_is_told_at_its_field_and_the_focus_goes_there(signed_in: Window) -> None:
    signed_in.watch.bears.append(REFUSED)
    page = form_of(signed_in, "/movements/add")
    take_file(page, json.dumps(new_movement()))

    field(page, "/fastest_revolution_s").fill("50")
    page.click("#save")  # before the pause is over
    page.wait_for_selector("#answer .problem-detail")

    assert fault(page, "/fastest_revolution_s").startswith("fastest_revolution_s (50) is the shortest turn")
    assert focused(page) == "at/fastest_revolution_s"


def test_what_only_some_presses_need_is_asked_for_where_it_is_needed(signed_in: Window) -> None:
    page = form_of(signed_in, "/cutters/turn-press/edit")

    field(page, "/drawn_from").select_option("")
    assert fault(page, "/drawn_from") == "this is needed"
    page.locator('[data-pointer="/press"] details.rare summary').click()
    field(page, "/press/forms").select_option('"up"')

    assert fault(page, "/drawn_from") == ""
    wait_until(page, "document.querySelector('#first').hidden")


def test_what_is_not_stated_is_folded_away_and_opened_where_something_is_to_mend(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/tarnlight-17/edit")
    rare = page.locator('[data-pointer="/disc"] details.rare')
    assert not field(page, "/disc/rolled_along_deg").is_visible()

    rare.locator("summary").click()
    field(page, "/disc/rolled_along_deg").fill("361")
    rare.locator("summary").click()
    assert "to-mend" in str(rare.get_attribute("class"))
    page.click("#first")

    assert focused(page) == "at/disc/rolled_along_deg"
    assert fault(page, "/disc/rolled_along_deg") == "361 ° is out of range; allowed is from -360 to 360 °"


def test_a_part_that_is_not_stated_is_begun_by_one_button_and_left_out_by_another(signed_in: Window) -> None:
    page = form_of(signed_in, "/movements/add")
    assert field(page, "/damper_arc_mm").is_visible()  # usually stated, so not folded away

    page.locator(".absent button", has_text="Rings where nothing may be cut").click()
    field(page, "/keep_out/0/why").fill("spindle plate")
    assert document(page)["keep_out"] == [{"why": "spindle plate"}]
    page.locator('[data-pointer="/keep_out"] button.leave').click()

    assert "keep_out" not in document(page)


@pytest.mark.parametrize("size", ["wide", "phone"])
def test_a_form_with_faults_shown_fits_its_window(
    open_window: Callable[..., Window], take_pictures: Callable[[Page, str], None], size: str
) -> None:
    page = form_of(open_window(size=size, signed_in=True), "/movements/mossbrook-67/edit")
    field(page, "/revolution_s").fill("0")
    field(page, "/teeth/1/pitch").fill("a long word that is no pitch")

    take_pictures(page, f"movement-edit-faults-{size}")

    assert page.evaluate("document.documentElement.scrollWidth") <= page.viewport_size["width"]  # type: ignore[index]
