"""Rulings by hand on a disc's page: what the page brings for them, their words, and what the scripts make of settings.

What is pure of the scripts is run by node where there is one; the pages themselves are driven in a browser elsewhere.
"""

import json
import re
import shutil
import subprocess
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient

import service.pages
from service.pages.assets import assets
from service.pages.texts import for_scripts
from service.settings import AccessSettings, PlaceSettings, ServiceSettings
from tests.service.conftest import parts_of
from tests.service.fakes import MANY
from tests.service.pages.browsing import browsing
from tests.service.pages.discs_shown import shown
from tests.service.pages.test_disc import FORBIDDEN, _page_of
from tests.service.pages.test_own_routes import HTML
from tests.service.shop import TUNE

SCRIPTS = {name: one.content.decode() for name, one in assets().items() if name.startswith("js/rulings/")}
FOLDER = Path(service.pages.__file__).parent / "assets" / "js"
NODE = shutil.which("node")
by_node = pytest.mark.skipif(NODE is None, reason="NOT RUN: no node here to run what is pure of the pages' scripts")

# A comb of C5, C4 on two tracks, C3 and D4, and a track without a usable tooth.
MOVEMENT = {
    "tracks": [
        {"pitch": pitch, "key": key, "teeth": [{"tooth": place}] if key else []}
        for place, (pitch, key) in enumerate(
            [("C5", 72), ("C4", 60), ("C4", 60), ("C3", 48), ("D4", 62), (None, None)], start=1
        )
    ]
}
LAYOUT = {"notes": [{"pitch": "C4", "onset_s": 0.0}, {"pitch": "D4", "onset_s": 1.0}], "transposed_semitones": 0}


def run(module: str, names: str, expression: str) -> Any:
    """The value of an expression of a script's exports, as JSON."""
    assert NODE is not None
    address = (FOLDER / "rulings" / module).as_uri()
    given = f"const [movement, layout] = {json.dumps([MOVEMENT, LAYOUT])};"
    program = f'import {{ {names} }} from "{address}";{given}console.log(JSON.stringify({expression}));'
    command = [NODE, "--experimental-default-type=module", "--input-type=module", "-e", program]
    made = subprocess.run(command, capture_output=True, text=True, timeout=30, check=False)
    assert made.returncode == 0, made.stderr
    return json.loads(made.stdout)


@pytest.fixture
def client(tmp_path: Path) -> Iterator[FlaskClient]:
    parts = parts_of(tmp_path)
    places = PlaceSettings(data_directory=parts.settings.places.data_directory, cache_directory=tmp_path / "kept")
    access = AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY)
    with browsing(ServiceSettings(places=places, access=access)) as client:
        yield client
    parts.store.close()


def data_of(html: str) -> dict[str, Any]:
    found = re.search(r'<script type="application/json" id="disc-data">(.*?)</script>', html, re.DOTALL)
    assert found is not None
    told: dict[str, Any] = json.loads(found[1])
    return told


def test_a_page_of_a_layout_says_where_rulings_go_and_each_ruling_leads_to_a_page_that_takes_more(
    client: FlaskClient,
) -> None:
    made = client.post("/v1/layouts?movement=fernhollow-31", data=TUNE, content_type="audio/midi").get_json()
    first = client.get(f"/discs/{made['fingerprint']}", headers=HTML).text

    again = client.post(data_of(first)["rulings_at"], json={"rulings": [{"note": 0, "do": "leave-out"}]})
    second = client.get(f"/discs/{again.get_json()['fingerprint']}", headers=HTML).text

    assert 'id="rulings"' in first
    assert data_of(second)["rulings_at"] == f"/v1/layouts/{again.get_json()['fingerprint']}/again"
    assert f'href="/v1/layouts/{again.get_json()["fingerprint"]}/settings.json"' in second
    assert data_of(second)["layout"]["worth"]["kept"] < data_of(first)["layout"]["worth"]["kept"]
    assert data_of(second)["layout"]["disc"] == {"number": 1, "of": 1}


def test_a_disc_that_takes_no_rulings_has_no_part_for_them() -> None:
    html = _page_of(shown()).get_data(as_text=True)

    assert 'id="rulings"' not in html
    assert data_of(html)["rulings_at"] is None


def test_the_scripts_of_rulings_have_every_word_they_show_and_no_word_more() -> None:
    everything = "\n".join(SCRIPTS.values())
    had = {key.removeprefix("rulings.") for key in for_scripts(("rulings",)) if key.startswith("rulings.")}

    plain = set(re.findall(r'"rulings\.(\w+)"', everything))
    made = set(re.findall(r"`rulings\.(\w*)\$\{", everything))  # beginnings of keys that a value ends
    ended = {"octave_up", "octave_down", "gone", "added", "moved"}
    assert made == {"octave_", ""}
    assert plain | ended == had


@pytest.mark.parametrize("name", SCRIPTS)
def test_a_script_of_rulings_is_short_enough_to_read_and_makes_nothing_of_strings(name: str) -> None:
    assert len(SCRIPTS[name].splitlines()) <= 400
    assert not re.search(FORBIDDEN, SCRIPTS[name])


@by_node
def test_a_ruling_takes_the_place_of_what_was_ruled_for_the_same_notes_and_others_stay() -> None:
    before = '{ title: "T", rulings: [{ note: 4, do: "must-sound" }, { note: 7, do: "leave-out" }] }'

    out = run("settings.js", "leaveOut", f"leaveOut({before}, [4, 5])")
    placed = run("settings.js", "placeOn", f"placeOn({before}, [4, 5], 3)")
    back = run("settings.js", "without", f"without(without({before}, [4]), [7])")

    kept = {"note": 7, "do": "leave-out"}
    assert out == {"title": "T", "rulings": [kept, {"note": 4, "do": "leave-out"}, {"note": 5, "do": "leave-out"}]}
    assert placed == {"title": "T", "rulings": [kept, {"note": 4, "do": "place", "track": 3}]}
    assert back == {"title": "T"}


@by_node
def test_the_tune_is_held_at_its_transposition_or_let_go_to_what_was_asked_at_first() -> None:
    first = '{ title: "T", transpose: { mode: "best", range: 5 } }'

    fixed = run("settings.js", "held", f"held({first}, -2)")
    again = run("settings.js", "held, letGo", f"letGo(held({first}, -2), {first})")
    free = run("settings.js", "held, letGo", "letGo(held({}, -2), held({}, 3))")

    assert fixed == {"title": "T", "transpose": {"mode": "fixed", "semitones": -2}}
    assert again == {"title": "T", "transpose": {"mode": "best", "range": 5}}
    assert free == {}


@by_node
def test_a_note_may_be_put_on_tracks_of_its_pitch_in_any_octave_the_nearest_first() -> None:
    offered = run("settings.js", "tracksFor", "tracksFor(0, layout, movement).map((one) => [one.track, one.octaves])")

    assert offered == [[2, 0], [3, 0], [1, 1], [4, -1]]  # not D4, and not the track without a tooth


@by_node
def test_a_note_on_a_higher_octave_is_moved_from_where_it_is() -> None:
    at = '{ kind: "projection", notes: [0], track: 1 }'  # C4 on C5's track

    down = run("settings.js", "octaveTrack", f"octaveTrack({at}, -1, layout, movement).track")
    up = run("settings.js", "octaveTrack", f"octaveTrack({at}, 1, layout, movement)")

    assert (down, up) == (2, None)  # no C6 on the comb


@by_node
def test_the_difference_tells_what_is_gone_new_and_moved_each_pluck_once() -> None:
    def pluck(track: int, sounds_s: float, *notes: int) -> dict[str, Any]:
        return {"track": track, "sounds_s": sounds_s, "notes": list(notes)}

    worth = {"transposed_semitones": 0, "worth": {"kept": 10}}
    before = {"projections": [pluck(1, 0, 0, 1), pluck(2, 1, 2), pluck(3, 2, 3), pluck(1, 3, 5)], **worth}
    after = {
        "projections": [pluck(2, 0, 0, 1), pluck(3, 2.0004, 3), pluck(4, 4, 4), pluck(1, 3.006, 5)],
        **{**worth, "worth": {"kept": 9}},
    }

    told = run("difference.js", "differenceOf", f"differenceOf({json.dumps(before)}, {json.dumps(after)})")

    # 0 and 1 are one pluck, on another track; 3 is 0.4 ms off, below what is told; 5 is 6 ms off.
    assert told == {"gone": [2], "added": [4], "moved": [0, 5], "worth": [10, 9], "transposed": [0, 0]}


@by_node
def test_undo_and_redo_go_along_what_was_looked_at_and_a_new_one_ends_what_could_be_redone() -> None:
    steps = (
        '(() => { const seen = []; const one = new History("a"); seen.push(one.undo(), one.canUndo);'
        'one.add("b"); one.add("c"); seen.push(one.undo(), one.canRedo, one.redo(), one.undo(), one.undo());'
        'one.add("d"); seen.push(one.now, one.canRedo, one.redo(), one.undo()); return seen; })()'
    )

    assert run("history.js", "History", steps) == ["a", False, "b", True, "c", "b", "a", "d", False, "d", "a"]
