"""The pages of movements and cutters: whose documents are shown to whom, and that all that is shown is theirs."""

import json
import re
from collections.abc import Iterator
from typing import Any

import pytest
from flask.testing import FlaskClient

from layout.documents import read_movement, shipped_movement, shipped_text
from service.access.scopes import Scope
from service.pages.machines_comb import comb_chart
from service.pages.machines_told import tracks_of, unit_of, values_of
from service.parts import Parts
from service.store.documents import KeptDocument
from tests.service.api.guarded import bearing, new_key
from tests.service.pages.browsing import browsing, on_both_databases
from tests.service.pages.test_own_routes import HTML, Tags

MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")


@pytest.fixture
def client(parts: Parts) -> Iterator[FlaskClient]:
    with browsing(parts.settings) as client:
        yield client


@pytest.fixture
def own(parts: Parts) -> dict[str, str]:
    return bearing(new_key(parts, Scope.READ, Scope.MOVEMENTS, owner="Bellgrove"))


def as_document(**changed: Any) -> dict[str, Any]:
    return {**json.loads(shipped_text("tarnlight-17")), **changed}


def save(client: FlaskClient, who: dict[str, str], document: dict[str, Any]) -> None:
    path = f"/v1/movements/{document['id']}"
    answer = client.put(path, json=document, headers={**who, "If-None-Match": "*"})
    assert answer.status_code == 201, answer.text


@on_both_databases("documents in force in the order of their ids, page by page")
def test_the_list_of_movements_shows_what_ships_to_all_and_an_owners_own_to_its_key(
    client: FlaskClient, parts: Parts, own: dict[str, str]
) -> None:
    save(client, own, as_document(id="ashbeck-17", title="Ashbeck <b>"))
    other = bearing(new_key(parts, Scope.READ, owner="Thornbury"))

    for_all, for_owner, for_other = (client.get("/movements", headers={**HTML, **who}) for who in ({}, own, other))

    for movement_id in MOVEMENTS:
        assert f'href="/movements/{movement_id}"' in for_all.text
    assert "ashbeck" not in for_all.text + for_other.text
    assert "Ashbeck &lt;b&gt;" in for_owner.text
    assert client.get("/movements/ashbeck-17", headers=HTML).status_code == 404
    assert client.get("/movements/ashbeck-17", headers={**HTML, **own}).status_code == 200


@pytest.mark.parametrize("path", [*(f"/movements/{name}" for name in MOVEMENTS), "/movements", "/cutters"])
def test_a_page_of_machines_links_only_to_what_is_there_and_runs_nothing_inline(
    client: FlaskClient, own: dict[str, str], path: str
) -> None:
    answer = client.get(path, headers=HTML)

    assert answer.status_code == 200
    for tag, attributes in Tags(answer.text).tags:
        assert "style" not in (tag, *attributes)
        address = attributes.get("href") or ""
        if address.startswith(("/movements", "/cutters", "/v1", "/measuring")):
            assert client.get(address, headers={**HTML, **own}).status_code == 200, address


def test_a_movement_says_what_each_value_stands_on(client: FlaskClient, own: dict[str, str]) -> None:
    stated = {"value": 41.25, "plus_minus": 0.35, "basis": "calculated"}
    save(client, own, as_document(id="ashbeck-17", revolution_s=stated))

    shown = client.get("/movements/ashbeck-17", headers={**HTML, **own}).text
    row = re.search(r"<tr><th[^>]*>One turn takes</th>(.*?)</tr>", shown)

    assert row is not None
    assert re.findall(r"<td[^>]*>(.*?)</td>", row[1]) == ["41.25 s", "± 0.35", "calculated"]


def test_a_movement_is_saved_as_the_text_that_was_written(client: FlaskClient) -> None:
    tags = Tags(client.get("/movements/mossbrook-67", headers=HTML).text).tags
    (link,) = (attributes for tag, attributes in tags if "download" in attributes)

    assert client.get(link["href"] or "").data == shipped_text("mossbrook-67")
    assert link["download"] == "mossbrook-67.json"


@pytest.mark.parametrize("movement_id", MOVEMENTS)
def test_a_comb_shows_every_tooth_once_and_every_gap_of_the_scale_hollow(movement_id: str) -> None:
    movement = shipped_movement(movement_id)
    chart = comb_chart(movement)

    assert len({(tooth.x, tooth.y) for tooth in chart.teeth}) == len(movement.teeth)
    by_place: dict[int, set[str]] = {}
    pitch_of_tooth = {tooth.tooth: tooth.pitch for tooth in movement.teeth}
    for shown in chart.teeth:
        number = int(re.search(r"tooth (\d+)", shown.words)[1])  # type: ignore[index]  # else the test fails
        by_place.setdefault(shown.x + chart.box // 2, set()).add(pitch_of_tooth[number])
    assert {len(pitches) for pitches in by_place.values()} == {1}
    assert {pitch.x for pitch in chart.pitches if pitch.has_tooth} == set(by_place)
    assert len(chart.pitches) == len({pitch.x for pitch in chart.pitches})


def test_a_comb_stacks_doubled_teeth_and_names_what_the_scale_lacks() -> None:
    teeth = [{"tooth": 1, "track": 1, "pitch": "C4"}, {"tooth": 2, "track": 2, "pitch": "D4", "damped": False}]
    teeth += [{"tooth": 3, "track": 3, "pitch": "D4", "usable": False}]
    movement = shipped_movement("tarnlight-17").model_validate(as_document(tracks=_three_tracks(), teeth=teeth))
    chart = comb_chart(movement)

    assert [pitch.has_tooth for pitch in chart.pitches] == [True, False, True]  # C4, C#4, D4
    assert [(tooth.x, tooth.look) for tooth in chart.teeth] == [(8, "damped"), (56, "undamped"), (56, "unusable")]
    assert chart.teeth[1].y - chart.teeth[2].y == 24  # one step of the picture
    assert chart.words == (
        "3 teeth of 2 pitches, from C4 to D4.",
        "The scale lacks C#4.",
        "More than one tooth: D4 × 2.",
        "Without a damper: tooth 2.",
        "Not to be used: tooth 3.",
    )


def _three_tracks() -> list[dict[str, Any]]:
    return [{"track": number, "radius_mm": 20 + 3 * number} for number in (1, 2, 3)]


def test_a_track_repeats_no_sooner_than_its_wheel_its_damper_and_its_metal_let_it() -> None:
    tracks = tracks_of(shipped_movement("tarnlight-17"))

    # Wheel: 3.2 mm at 20 mm = 0.16 rad = 9.167°, 40 s · 0.16 / 2π = 1.0186 s.
    assert (tracks[0].least_deg, tracks[0].least_s, tracks[0].why) == ("9.2", "1.02", "the wheel's step")
    # Outermost, 53.6 mm: 3.2 / 53.6 = 0.0597 rad = 3.42°, 0.380 s; the damper's 0.15 s of 36 s are 1.5°.
    assert (tracks[-1].least_deg, tracks[-1].least_s) == ("3.4", "0.38")


@pytest.mark.parametrize(
    ("name", "unit"),
    [
        ("kerf_mm", "mm"),
        ("stiffness_n_per_mm", "N/mm"),
        ("torque_limit_nmm", "N·mm"),
        ("cut_mm_per_s", "mm/s"),
        ("revolution_s", "s"),
        ("wound_turns", "turns"),
        ("brake_turns_per_s", "1/s"),
        ("count", ""),
        ("turns", ""),
    ],
)
def test_a_field_has_the_unit_its_name_carries(name: str, unit: str) -> None:
    assert unit_of(name) == unit


def test_values_stand_in_groups_and_a_list_of_numbers_in_one_row() -> None:
    press = KeptDocument(kind="cutter", id="turn-press", revision=1, text=shipped_text("turn-press"), owner_id=None)
    groups = {
        group.title: {row.name: row.value for _, rows in group.parts for row in rows} for group in values_of(press)
    }

    assert groups["In general"]["Kerf"] == "0 mm"
    assert groups["Tools · 3"]["Working edge ahead of the strike point"] == "-1.1 mm"
    assert groups["Least sizes in sheet thicknesses: error, warning, advice below"]["Hole"] == "1 / 1.2 / 1.5"
    assert groups["Rates"]["For each hit"] == "0.004"


def test_what_a_blank_has_more_than_one_of_stands_under_a_heading_each() -> None:
    text = shipped_text("mossbrook-67")
    movement = KeptDocument(kind="movement", id="mossbrook-67", revision=1, text=text, owner_id=None)
    (disc,) = [group for group in values_of(movement) if group.title == "Disc"]

    assert [part for part, _ in disc.parts] == [
        "",
        "Holes, slots and notches of the blank · 1",
        "Holes, slots and notches of the blank · 2",
    ]
    assert [row.name for row in disc.parts[1][1]][:2] == ["What for", "Shape"]


def test_a_movement_that_the_usual_cutter_cannot_make_is_shown_with_its_repeats_all_the_same(
    client: FlaskClient, own: dict[str, str]
) -> None:
    shipped = json.loads(shipped_text("fernhollow-31"))
    document = {**shipped, "id": "ashbeck-31", "projection": {**shipped["projection"], "forming": "lance"}}
    save(client, own, document)  # a laser lances nothing

    page = client.get("/movements/ashbeck-31", headers={**HTML, **own})

    assert page.status_code == 200
    of_both = [tracks_of(read_movement(json.dumps(one))) for one in (document, shipped)]
    assert of_both[0] == of_both[1]  # of the tab's own size
