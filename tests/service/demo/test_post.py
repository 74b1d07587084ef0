import json
import threading
import zipfile
from collections.abc import Iterator
from dataclasses import dataclass, field
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from io import BytesIO
from pathlib import Path

import mido
import pytest
from werkzeug.wrappers import Request

from layout.documents.sheets import read_sheet_job
from service.demo import post
from service.demo.workshop import post_sheets

# 40 s a turn, 20 deg before and 14 deg after the music: 40 * 326 / 360 = 36.222 s free.
SHORT_TURN = {
    "id": "short-9",
    "title": "Short",
    "revolution_s": 40,
    "before_music_deg": 20,
    "after_music_deg": 14,
    "disc": {"outer_diameter_mm": 118},
}
LONG_TURN = SHORT_TURN | {"id": "long-9", "title": "Long", "revolution_s": 90}
FREE_PART_S = 40 * 326 / 360

LAYOUT = {
    "transposed_semitones": -3,
    "projections": [{"notes": [0, 1]}, {"notes": [2]}],
    "left_out": [{"note": 3, "reason": "web"}, {"note": 4, "reason": "no-such-pitch"}, {"note": 5, "reason": "web"}],
    "findings": [{"code": "web-thin", "level": "warning", "message": "thin"}],
}


@dataclass
class StandIn:
    """A service that keeps what it is sent and answers from a table."""

    address: str = ""
    movements: list[dict[str, object]] = field(default_factory=list)
    links: dict[str, str] = field(
        default_factory=lambda: {"disc.dxf": "/files/1", "hits.csv": "/files/2", "hearing.wav": "/files/3"}
    )
    refuses: str = ""
    posted: list[tuple[str, str, bytes]] = field(default_factory=list)

    def answer(self, path: str) -> tuple[int, bytes]:
        if self.refuses and path.startswith(self.refuses):
            return 422, json.dumps({"title": "Not good to cut", "detail": "the tune\nis bad"}).encode()
        if path == "/v1/movements":
            return 200, json.dumps({"movements": self.movements}).encode()
        if path.startswith("/v1/movements/"):
            [movement] = [m for m in self.movements if path.endswith(f"/{m['id']}")]
            return 200, json.dumps(movement).encode()
        if path.startswith("/v1/layouts"):
            return 201, json.dumps({"layout": LAYOUT, "links": self.links, "good_to_cut": True}).encode()
        if path.startswith(("/v1/trial-pieces", "/v1/sheets")):
            return 200, archive_with({"drawing.dxf": f"file {path}", "../parts.csv": "one"})
        return 200, f"file {path}".encode()


def archive_with(files: dict[str, str]) -> bytes:
    kept = BytesIO()
    with zipfile.ZipFile(kept, "w") as packed:
        for name, text in files.items():
            packed.writestr(name, text)
    return kept.getvalue()


@pytest.fixture
def stand_in() -> Iterator[StandIn]:
    service = StandIn()

    class Handler(BaseHTTPRequestHandler):
        def do_GET(self) -> None:
            status, body = service.answer(self.path)
            self.send_response(status)
            self.end_headers()
            self.wfile.write(body)

        def do_POST(self) -> None:
            body = self.rfile.read(int(self.headers["Content-Length"]))
            service.posted.append((self.path, self.headers["Content-Type"], body))
            self.do_GET()

        def log_message(self, *_: object) -> None:
            pass

    with ThreadingHTTPServer(("127.0.0.1", 0), Handler) as server:
        service.address = f"http://127.0.0.1:{server.server_address[1]}"
        thread = threading.Thread(target=server.serve_forever, args=(0.02,))
        thread.start()
        yield service
        server.shutdown()
        thread.join()


def midi_with_onsets_at(*onsets_s: int) -> bytes:
    track = mido.MidiTrack()
    now_s = 0
    for onset_s in onsets_s:
        # 480 ticks a beat, 120 beats a minute: 960 ticks a second
        track.append(mido.Message("note_on", note=60, time=960 * (onset_s - now_s)))
        track.append(mido.Message("note_off", note=60, time=0))
        now_s = onset_s
    track.append(mido.Message("note_on", note=60, velocity=0, time=960 * 100))
    kept = BytesIO()
    mido.MidiFile(tracks=[track], ticks_per_beat=480).save(file=kept)
    return kept.getvalue()


def test_a_tune_lasts_from_its_first_onset_to_its_last() -> None:
    tune = post.read_tune(midi_with_onsets_at(2, 30, 61))

    assert (tune.first_onset_s, tune.last_onset_s) == pytest.approx((2.0, 61.0))
    assert tune.lasts_s == pytest.approx(59.0)


def test_a_tune_without_notes_cannot_be_posted() -> None:
    with pytest.raises(post.DemoFailedError, match="holds no note"):
        post.read_tune(midi_with_onsets_at())


def test_a_tune_that_fits_the_turn_is_posted_as_it_is(stand_in: StandIn) -> None:
    stand_in.movements = [SHORT_TURN]
    midi = midi_with_onsets_at(0, 36)

    post.make_disc(stand_in.address, "short-9", post.read_tune(midi), lambda _: None)

    assert stand_in.posted == [("/v1/layouts?movement=short-9", "audio/midi", midi)]


def test_a_tune_longer_than_the_turn_is_posted_with_a_passage_of_one_free_turn(stand_in: StandIn) -> None:
    stand_in.movements = [SHORT_TURN]
    midi = midi_with_onsets_at(0, 37)
    said: list[str] = []

    post.make_disc(stand_in.address, "short-9", post.read_tune(midi), said.append)

    [(path, media_type, body)] = stand_in.posted
    assert path == "/v1/layouts?movement=short-9"
    # read by werkzeug, the form reader of the service's web framework
    with Request.from_values(method="POST", content_type=media_type, data=body) as form:
        assert set(form.files) == {"tune", "settings"}
        assert form.files["tune"].read() == midi
        assert form.files["tune"].mimetype == "audio/midi"
        settings = json.loads(form.files["settings"].read())
    # RFC 2046 section 4.1.1: lines end with CR LF
    assert b"\n" not in body.replace(midi, b"").replace(b"\r\n", b"")
    assert settings["format"] == "discwright-settings/1"
    assert settings["passage"] == {"from_s": 0, "to_s": pytest.approx(FREE_PART_S)}
    assert "  the tune lasts 37.0 s, one turn plays 36.2 s: that much of it is taken" in said


def test_the_report_counts_what_is_kept_and_why_the_rest_is_left_out() -> None:
    assert post.report(LAYOUT) == [
        "kept 3 of 6 notes, moved by -3 semitones",
        "left out 3: 1 no-such-pitch, 2 web",
        "good to cut",
        "to look at: 1 web-thin",
    ]


def test_cutting_files_of_an_earlier_demo_do_not_stay_beside_a_disc_that_keeps_them_back(tmp_path: Path) -> None:
    post.keep({"disc.dxf": b"old", "hits.csv": b"old", "disc.svg": b"old"}, tmp_path)

    post.keep({"disc.svg": b"new"}, tmp_path)

    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == {"disc.svg": b"new"}


def test_the_report_counts_notes_outside_the_passage_apart() -> None:
    outside = [{"note": 8, "reason": "outside-passage"}, {"note": 9, "reason": "outside-passage"}]

    lines = post.report(LAYOUT | {"left_out": [*LAYOUT["left_out"], *outside]})

    assert lines[0] == "kept 3 of the 6 notes of the passage, moved by -3 semitones"
    assert lines[1] == "left out 3: 1 no-such-pitch, 2 web"
    assert "outside the passage: 2 notes" in lines


def test_the_report_says_what_stands_against_cutting() -> None:
    fault = {"code": "web-thin", "level": "error", "message": "0.1 mm of web"}

    lines = post.report(LAYOUT | {"left_out": [], "findings": [fault]})

    assert lines == [
        "kept 3 of 3 notes, moved by -3 semitones",
        "NOT GOOD TO CUT",
        "error web-thin: 0.1 mm of web",
    ]


def test_the_demo_keeps_the_files_of_every_movement_in_a_folder_of_its_own(stand_in: StandIn, tmp_path: Path) -> None:
    stand_in.movements = [SHORT_TURN, LONG_TURN]
    said: list[str] = []

    post.post_demo(stand_in.address, tmp_path, said.append)

    kept = {str(path.relative_to(tmp_path)): path.read_text() for path in tmp_path.rglob("*.*")}
    assert kept == {
        "short-9/disc.dxf": "file /files/1",
        "short-9/hits.csv": "file /files/2",
        "long-9/disc.dxf": "file /files/1",
        "long-9/hits.csv": "file /files/2",
        "trial-piece/drawing.dxf": "file /v1/trial-pieces?movement=short-9",
        "trial-piece/parts.csv": "one",
        "sheets/drawing.dxf": "file /v1/sheets",
        "sheets/parts.csv": "one",
    }
    assert f"  written to {tmp_path / 'long-9'}: disc.dxf, hits.csv" in said


def test_the_demo_asks_for_sheets_of_discs_of_every_movement_and_takes_them_whole(stand_in: StandIn) -> None:
    documents = [{"id": name, "disc": {"outer_diameter_mm": size}} for name, size in (("a-1", 100), ("b-2", 200.5))]

    files = post_sheets(stand_in.address, documents, lambda _: None)

    [(path, media_type, body)] = stand_in.posted
    job = read_sheet_job(body)  # as the service reads it
    assert (path, media_type) == ("/v1/sheets", "application/json")
    assert [(one.id, one.diameter_mm, one.quantity) for one in job.discs] == [("a-1", 100, 4), ("b-2", 200.5, 4)]
    assert [stock.id for stock in job.stock] == ["offcut", "sheet"]
    assert set(files) == {"drawing.dxf", "../parts.csv"}


def test_a_file_name_with_a_path_in_it_stays_in_its_folder(tmp_path: Path) -> None:
    post.keep({"../outside.txt": b"x"}, tmp_path / "inside")

    assert [path.name for path in (tmp_path / "inside").iterdir()] == ["outside.txt"]


@pytest.mark.parametrize("refused", ["/v1/layouts", "/files/2"])
def test_a_refusal_is_told_on_one_line_and_nothing_is_kept(stand_in: StandIn, tmp_path: Path, refused: str) -> None:
    stand_in.movements = [SHORT_TURN]
    stand_in.refuses = refused

    with pytest.raises(post.DemoFailedError, match=rf"{refused}\S* was refused: 422, the tune is bad$"):
        post.post_demo(stand_in.address, tmp_path, lambda _: None)

    assert list(tmp_path.iterdir()) == []


def test_a_service_that_ships_no_movement_is_a_failure(stand_in: StandIn, tmp_path: Path) -> None:
    with pytest.raises(post.DemoFailedError, match="ships no movement"):
        post.post_demo(stand_in.address, tmp_path, lambda _: None)


def test_a_proxy_named_by_the_surroundings_is_not_asked(stand_in: StandIn, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("no_proxy", raising=False)
    monkeypatch.delenv("NO_PROXY", raising=False)
    monkeypatch.setenv("http_proxy", "http://127.0.0.1:1")
    stand_in.movements = [SHORT_TURN]

    assert json.loads(post.fetch(f"{stand_in.address}/v1/movements")) == {"movements": [SHORT_TURN]}


def test_the_command_ends_with_one_line_where_nothing_answers(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    # port 1 is below the ports that programs may take
    monkeypatch.setattr("sys.argv", ["post", "--address", "http://127.0.0.1:1", "--out", str(tmp_path)])

    with pytest.raises(SystemExit, match=r"^demo: http://127\.0\.0\.1:1/v1/movements does not answer: [^\n]+$"):
        post.main()


def test_the_command_ends_with_one_line_where_the_answer_is_not_as_promised(
    stand_in: StandIn, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    stand_in.movements = [{"id": "short-9", "title": "Short"}]
    monkeypatch.setattr("sys.argv", ["post", "--address", stand_in.address, "--out", str(tmp_path)])

    with pytest.raises(SystemExit, match=r"answered something unexpected: KeyError\('before_music_deg'\)$"):
        post.main()
