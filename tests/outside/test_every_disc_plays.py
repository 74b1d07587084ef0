"""The proof of the main job: what is cut, read by GDAL, plays what layout.json says, on real pieces.

For every shipped movement and cutter, on the demo tune, on public-domain pieces that a general music
library ships, and on generated pieces. By default the demo tune is tried on every pair, and every piece on one of them,
which they take in turn; with TESTS=thorough every piece on every pair.
"""

import csv
import io
import itertools
import json
from functools import cache
from pathlib import Path
from typing import Any

import ezdxf
import mido
import numpy as np
import pytest
import shapely
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from layout import walk
from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.write.laid_out import LaidOut
from service.demo.compose import demo_tune
from tests.layout.examples import cutter_with
from tests.layout.write import reading
from tests.layout.write.reading import read_dxf, read_svg, upside_down
from tests.outside.gdal_drawing import area_of, layers_of, plucks_from_cut_geometry
from tests.outside.pieces import PIECE_NAMES, public_domain_piece
from tests.thorough import THOROUGH, tried

MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
CUTTERS = ("fibre-laser", "turn-press")
PAIRS = list(itertools.product(MOVEMENTS, CUTTERS))
# The demo on every pair, and every other piece on one of them: reading a drawing entity by entity takes its time.
AUDITED = [("demo", pair) for pair in PAIRS]
AUDITED += [(name, PAIRS[place % len(PAIRS)]) for place, name in enumerate(PIECE_NAMES)]
PLAYED = list(itertools.product(("demo", *PIECE_NAMES), PAIRS)) if THOROUGH else AUDITED
FIT = '{"speed": {"mode": "fit", "least": 0.5, "most": 4}}'
GDAL_ARC_MM = 0.002  # mm; how far inside a round end GDAL's chords may lie: 0.65 mm radius in steps of 4 degrees


def piece(name: str) -> bytes:
    return demo_tune() if name == "demo" else public_domain_piece(name)


@cache
def laid_out(name: str, movement_id: str, cutter_id: str) -> tuple[LaidOut, dict[str, bytes]]:
    result = walk.lay_out(piece(name), shipped_movement(movement_id), shipped_cutter(cutter_id), read_settings(FIT))
    return result, walk.files_of(result, not_good="a test reads it")


def assert_plays_what_it_says(files: dict[str, bytes], pair: tuple[str, str], folder: Path) -> int:
    """GDAL's plucks equal layout.json's within 1 ms, each on its track; how many there are."""
    movement, cutter = shipped_movement(pair[0]), shipped_cutter(pair[1])
    promised = [(entry["track"], entry["sounds_s"]) for entry in json.loads(files["layout.json"])["projections"]]

    layers = layers_of(files["disc.dxf"], folder)
    read = plucks_from_cut_geometry(layers, movement, cutter) if promised else []

    assert [track for track, _ in sorted(read)] == [track for track, _ in sorted(promised)]
    for (_, read_s), (_, promised_s) in zip(sorted(read), sorted(promised), strict=True):
        assert read_s == pytest.approx(promised_s, abs=0.001)
    assert set(layers) <= {"SLITS", "SLOTS", "HITS", "HOLES", "RIM", "MARKS"}
    return len(promised)


def assert_every_web_holds_in_the_record(
    result: LaidOut, files: dict[str, bytes], limit_mm: float, folder: Path
) -> None:
    """Recomputed from record.dxf alone: no two openings nearer than the limit, unless an error says so."""
    outlines = np.array([area_of(line) for line in layers_of(files["record.dxf"], folder)["AFTER_FORMING"]])

    assert len(outlines) == len(result.disc.track_index)
    assert all(shapely.is_valid(outlines))
    one, two = shapely.STRtree(outlines).query(outlines, predicate="dwithin", distance=limit_mm)
    thinnest_mm = min(shapely.distance(outlines[one[one < two]], outlines[two[one < two]]), default=limit_mm)
    told_mm = min((f.measured or 0.0 for f in result.findings if f.code == "web-too-thin"), default=limit_mm)
    assert thinnest_mm >= max(told_mm, 0.0) - GDAL_ARC_MM


@pytest.mark.parametrize(
    ("name", "pair"), PLAYED, ids=lambda value: value if isinstance(value, str) else "-".join(value)
)
def test_a_disc_read_by_gdal_plays_every_pluck_and_keeps_every_web(
    name: str, pair: tuple[str, str], tmp_path: Path
) -> None:
    result, files = laid_out(name, *pair)

    assert assert_plays_what_it_says(files, pair, tmp_path) > 0
    assert_every_web_holds_in_the_record(result, files, shipped_cutter(pair[1]).min_web_mm, tmp_path)


# The other ways a laser's shop may fold and draw, each with the shipped movements that stand.
WAYS = {
    "folded ahead": {"fold/fold_side": "ahead"},
    "open slit": {"fold/slit": "centre-line", "fold/slit_width_mm": None},
    "open slit, ahead": {"fold/slit": "centre-line", "fold/slit_width_mm": None, "fold/fold_side": "ahead"},
    "wide relief": {"fold/relief_width_mm": 0.6},
    "from the star side": {"drawn_from": "star-side"},
    "ahead, from the star side": {"fold/fold_side": "ahead", "drawn_from": "star-side"},
}


@pytest.mark.parametrize("movement_id", MOVEMENTS[:2])
@pytest.mark.parametrize("way", WAYS)
def test_every_way_to_fold_and_draw_plays_every_pluck(way: str, movement_id: str, tmp_path: Path) -> None:
    movement, cutter = shipped_movement(movement_id), cutter_with(WAYS[way])
    result = walk.lay_out(demo_tune(), movement, cutter, read_settings("{}"))
    files = walk.files_of(result, not_good="a test reads it")

    read = plucks_from_cut_geometry(layers_of(files["disc.dxf"], tmp_path), movement, cutter)

    promised = [(entry["track"], entry["sounds_s"]) for entry in json.loads(files["layout.json"])["projections"]]
    assert [track for track, _ in sorted(read)] == [track for track, _ in sorted(promised)]
    assert [time_s for _, time_s in sorted(read)] == pytest.approx(
        [time_s for _, time_s in sorted(promised)], abs=0.001
    )
    assert_every_web_holds_in_the_record(result, files, cutter.min_web_mm, tmp_path)


@pytest.mark.parametrize(
    ("name", "pair"), AUDITED, ids=lambda value: value if isinstance(value, str) else "-".join(value)
)
def test_both_drawings_are_clean_millimetre_drawings(name: str, pair: tuple[str, str]) -> None:
    _, files = laid_out(name, *pair)

    for drawing in ("disc.dxf", "record.dxf"):
        document = ezdxf.read(io.StringIO(files[drawing].decode()))
        audited = document.audit()
        assert audited.errors == []
        assert audited.fixes == []  # of the first audit: a second one finds what the first has mended
        assert document.header["$INSUNITS"] == 4
        seen = [_signature(entity) for entity in document.modelspace()]
        assert len(seen) == len(set(seen))
        for entity in document.modelspace().query("LWPOLYLINE"):
            points = np.array(entity.get_points("xy"))
            assert np.hypot(*np.diff(points, axis=0).T).min() > 1e-6


def _signature(entity: Any) -> tuple[Any, ...]:
    if entity.dxftype() == "LWPOLYLINE":
        return (entity.dxf.layer, tuple(sorted(entity.get_points("xyb"))))
    if entity.dxftype() == "CIRCLE":
        return (entity.dxf.layer, *entity.dxf.center, entity.dxf.radius)
    return (entity.dxf.layer, *entity.dxf.location)


@pytest.mark.parametrize("pair", PAIRS, ids="-".join)
def test_the_hit_table_lists_every_projection_once(pair: tuple[str, str]) -> None:
    result, files = laid_out("demo", *pair)

    rows = list(csv.DictReader(io.StringIO(files["hits.csv"].decode(), newline="")))

    assert [int(row["sequence"]) for row in rows] == list(range(1, len(result.disc.track_index) + 1))
    listed = sorted((int(row["track"]), row["pitch"]) for row in rows)
    record = json.loads(files["layout.json"])
    assert listed == sorted((entry["track"], entry["pitch"]) for entry in record["projections"])


@pytest.mark.parametrize(
    ("name", "pair"), AUDITED, ids=lambda value: value if isinstance(value, str) else "-".join(value)
)
def test_the_picture_read_by_another_library_has_the_outlines_of_the_record(
    name: str, pair: tuple[str, str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # Chords of 2 degrees: on a round end of 0.65 mm they lie 0.65 * (1 - cos 1 deg) = 0.0001 mm inside.
    monkeypatch.setattr(reading, "ARC_STEP_DEG", 2.0)
    _, files = laid_out(name, *pair)

    shown = read_svg(files["disc.svg"])

    drawn: dict[str, list[shapely.Geometry]] = {}
    for layer, shape in read_dxf(files["record.dxf"], tmp_path):
        drawn.setdefault(layer, []).append(upside_down(shape))
    for layer in ("AFTER_FORMING", "SLITS", "SLOTS"):
        ours, theirs = drawn.get(layer, []), shown.get(layer.lower(), [])
        assert len(ours) == len(theirs)
        for one, other in zip(ours, theirs, strict=True):
            assert shapely.hausdorff_distance(one, other) < 0.001


@pytest.mark.parametrize("movement_id", MOVEMENTS)
def test_the_demo_tune_gives_every_movement_a_disc_that_is_good_to_cut_on_the_laser(movement_id: str) -> None:
    movement = shipped_movement(movement_id)
    free_s = movement.revolution_s * (360 - movement.before_music_deg - movement.after_music_deg) / 360
    passage = {"passage": {"from_s": 0, "to_s": free_s}} if movement_id == "tarnlight-17" else {}

    result = walk.lay_out(demo_tune(), movement, shipped_cutter("fibre-laser"), read_settings(json.dumps(passage)))

    assert [finding for finding in result.findings if finding.level == "error"] == []
    assert result.good_to_cut
    kept = sum(len(notes) for notes in result.arrangement.notes)
    asked = kept + sum(note.reason != "outside-passage" for note in result.arrangement.left_out)
    assert kept / asked > 0.75


def tune_of(notes: list[tuple[int, int, int]]) -> bytes:
    """A MIDI file of (gap in ticks of 1/480 quarter at 120 to the minute, key, velocity)."""
    track = mido.MidiTrack()
    for gap, key, velocity in notes:
        track.append(mido.Message("note_on", note=key, velocity=velocity, time=gap))
        track.append(mido.Message("note_off", note=key, velocity=0, time=30))
    song = mido.MidiFile(ticks_per_beat=480, tracks=[track])
    buffer = io.BytesIO()
    song.save(file=buffer)
    return buffer.getvalue()


NOTES = st.lists(st.tuples(st.integers(0, 900), st.integers(36, 100), st.integers(1, 127)), min_size=1, max_size=60)


@settings(max_examples=tried(25), deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(notes=NOTES, pair=st.sampled_from(PAIRS))
def test_a_generated_piece_plays_every_pluck_at_its_moment(
    notes: list[tuple[int, int, int]], pair: tuple[str, str], tmp_path: Path
) -> None:
    result = walk.lay_out(tune_of(notes), shipped_movement(pair[0]), shipped_cutter(pair[1]), read_settings("{}"))
    files = walk.files_of(result, not_good="a test reads it")

    assert_plays_what_it_says(files, pair, tmp_path)

    record = json.loads(files["layout.json"])
    told = [note for entry in record["projections"] for note in entry["notes"]]
    told += [entry["note"] for entry in record["left_out"]]
    assert sorted(told) == list(range(result.score.note_count))


@pytest.mark.parametrize("pair", PAIRS, ids="-".join)
def test_a_drawing_read_back_is_the_disc_it_was_drawn_from(pair: tuple[str, str]) -> None:
    result, files = laid_out("demo", *pair)

    checked = walk.check_drawing(files["disc.dxf"], shipped_movement(pair[0]), shipped_cutter(pair[1]))

    assert [finding for finding in checked.findings if finding.level == "error"] == []
    order = np.lexsort((result.plucks.sounds_s, result.disc.track_index))
    found = np.lexsort((checked.plucks.sounds_s, checked.disc.track_index))
    assert checked.disc.track_index[found].tolist() == result.disc.track_index[order].tolist()
    np.testing.assert_allclose(checked.plucks.sounds_s[found], result.plucks.sounds_s[order], atol=1e-4)
