"""How long a ruling by hand takes, from the request that the disc's page sends to its answer: prints, never fails.

The demo tune on each shipped movement and cutter. One ruling after another is added to the settings, as the page adds
them: the transposition held, what is played left out, put on another track or an octave away, what is left out asked
for; then as many with the transposition let go, so that the best of all is looked for each time. Beside it the page
of the new disc, which the page asks for next, and the files of the last disc, made when the first is asked for.
"""

import logging
import sys
import tempfile
import time
from collections.abc import Iterator
from dataclasses import replace
from itertools import islice
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from flask.testing import FlaskClient

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import Movement, shipped_cutter_ids, shipped_movement, shipped_movement_ids
from layout.documents.pitch import key_of
from service.app import create_app
from service.settings import AccessSettings, settings_from
from tests.bench.opponents.table import say, say_table

TUNE = Path(__file__).resolve().parents[2] / "service" / "demo" / "tune.mid"
RULINGS = 24  # of each kind of asking and each disc
STEP = 5  # notes between two that are ruled
GOAL_CPU_S, GOAL_WALL_S = 0.5, 1.0  # at the 95th percentile; on a quiet machine
MANY = (1_000_000, 60)
OCTAVE = 12  # semitones
CREATED, CONTRADICTED = 201, 422

Record = dict[str, Any]


class Took(NamedTuple):
    """Seconds of one request: of the processor, and of the clock on the wall."""

    cpu_s: float
    wall_s: float


def main() -> None:
    """Measure, and print a table."""
    rows = []
    with tempfile.TemporaryDirectory() as folder:
        client = _client(Path(folder))
        for movement_id in shipped_movement_ids():
            for cutter_id in shipped_cutter_ids():
                rows += _rows(client, movement_id, cutter_id)
    say(f"{RULINGS} rulings of each row, one more each time; seconds of the processor, then of the clock on the wall")
    heads = ("disc", "transposition", "rulings", "refused", "median", "95 %", "worst", "95 % wall", "goal")
    say_table((*heads, "page 95 %", "files"), rows)


def _client(folder: Path) -> FlaskClient:
    settings = settings_from({"DISCWRIGHT_DATA": str(folder / "data"), "DISCWRIGHT_CACHE": str(folder / "kept")})
    access = AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY)
    app = create_app(replace(settings, access=access))
    logging.getLogger("discwright").setLevel(logging.WARNING)
    return app.test_client()


def _rows(client: FlaskClient, movement_id: str, cutter_id: str) -> Iterator[tuple[str, ...]]:
    asked = f"/v1/layouts?movement={movement_id}&cutter={cutter_id}"
    first = client.post(asked, data=TUNE.read_bytes(), content_type="audio/midi").get_json()
    for let_go in (False, True):
        took, pages, refused, last = _ruled(client, first, shipped_movement(movement_id), let_go=let_go)
        _, files = _timed(lambda last=last: client.get(last["links"]["work-sheet.pdf"]))  # type: ignore[misc]
        cpu_s, wall_s = np.array([one.cpu_s for one in took]), np.array([one.wall_s for one in took])
        at_95_s, wall_at_95_s = np.percentile(cpu_s, 95), np.percentile(wall_s, 95)
        met = at_95_s <= GOAL_CPU_S and wall_at_95_s <= GOAL_WALL_S
        yield (
            f"{movement_id}, {cutter_id}",
            "let go" if let_go else "held",
            str(len(took)),
            str(refused),
            *(f"{seconds:.2f}" for seconds in (np.median(cpu_s), at_95_s, cpu_s.max(), wall_at_95_s)),
            "met" if met else "MISSED",
            f"{np.percentile([page.cpu_s for page in pages], 95):.2f}",
            f"{files.cpu_s:.2f}",
        )


def _ruled(
    client: FlaskClient, first: Record, movement: Movement, *, let_go: bool
) -> tuple[list[Took], list[Took], int, Record]:
    """One ruling after another: what each took, what its page took, how many contradicted, and the last disc."""
    held: Record = (
        {} if let_go else {"transpose": {"mode": "fixed", "semitones": first["layout"]["transposed_semitones"]}}
    )
    took, pages, refused, made = [], [], 0, first
    rulings: list[Record] = []
    for ruling in islice(_rulings(first["layout"], movement), RULINGS):
        address, settings = f"/v1/layouts/{made['fingerprint']}/again", {**held, "rulings": [*rulings, ruling]}
        answer, one = _timed(lambda address=address, settings=settings: client.post(address, json=settings))  # type: ignore[misc]
        took.append(one)
        if answer.status_code == CONTRADICTED:
            refused += 1
            continue
        assert answer.status_code == CREATED, answer.text
        made, rulings = answer.get_json(), [*rulings, ruling]
        page = f"/discs/{made['fingerprint']}"
        pages.append(_timed(lambda page=page: client.get(page, headers={"Accept": "text/html"}))[1])  # type: ignore[misc]
    return took, pages, refused, made


def _rulings(layout: Record, movement: Movement) -> Iterator[Record]:
    """The rulings that a page offers, by turns, for notes all over the tune."""
    played = {note: thing["track"] for thing in layout["projections"] for note in thing["notes"]}
    left_out = [left["note"] for left in layout["left_out"] if left["reason"] not in ("outside-passage", "ruled-out")]
    keys = {tooth.track: key_of(tooth.pitch) for tooth in movement.teeth}
    asked_for = iter(left_out[::STEP])
    for place, note in enumerate(sorted(played)[::STEP]):
        here = played[note]
        others = [track for track in keys if track != here and (keys[track] - keys[here]) % OCTAVE == 0]
        missed = next(asked_for, None)
        if place % 3 == 1 and others:
            yield {"note": note, "do": "place", "track": others[place % len(others)]}
        elif place % 3 == 2 and missed is not None:
            yield {"note": missed, "do": "must-sound"}
        else:
            yield {"note": note, "do": "leave-out"}


def _timed(ask: Any) -> tuple[Any, Took]:
    cpu_s, wall_s = time.process_time(), time.perf_counter()
    answer = ask()
    return answer, Took(time.process_time() - cpu_s, time.perf_counter() - wall_s)


if __name__ == "__main__":
    main()
