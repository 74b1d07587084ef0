"""The plain way that timings measure against draws the same disc: what it is faster or slower at is the same job."""

import io

import numpy as np
import pytest
import shapely
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.filemanagement import read

from layout.check.webs import webs_between_openings_hold
from layout.documents import Settings, shipped_cutter, shipped_movement
from layout.mechanics.spacing import core_geometries
from layout.read import read_score
from layout.walk import files_of, lay_out
from layout.write.laid_out import LaidOut
from tests.bench.opponents.large_disc import large_tune
from tests.bench.opponents.plain_way import (
    plain_from_arrangement,
    plain_notes,
    plain_outlines,
    plain_polygon,
    plain_tabs,
)
from tests.service.shop import TUNE

CUTTER = shipped_cutter("fibre-laser")


@pytest.fixture(scope="module", params=["fernhollow-31", "mossbrook-67", "tarnlight-17"])
def laid_out(request: pytest.FixtureRequest) -> LaidOut:
    return lay_out(TUNE, shipped_movement(request.param), CUTTER, Settings())


def slit_corners(dxf: bytes) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
    """The first corner of every slit or slot, in order of x and y."""
    space = read(io.StringIO(dxf.decode())).modelspace()
    lines = [line for line in space if isinstance(line, LWPolyline) and line.dxf.layer in ("SLITS", "SLOTS")]
    first = [line.get_points("xy")[0] for line in lines]
    return np.array(sorted((round(x, 5), round(y, 5)) for x, y in first))


def test_the_plain_way_cuts_the_same_tabs_at_the_same_places(laid_out: LaidOut) -> None:
    plain = plain_from_arrangement(laid_out.arrangement, laid_out.disc.movement, CUTTER)

    ours = slit_corners(files_of(laid_out, not_good="compared only")["disc.dxf"])

    assert len(ours) == laid_out.disc.projection_count
    assert slit_corners(plain.dxf) == pytest.approx(ours, abs=1.1e-5)  # both are rounded to 1e-5 mm, either way


def test_every_corner_that_the_plain_way_cuts_is_ours_to_a_millionth_of_a_millimetre(laid_out: LaidOut) -> None:
    disc = laid_out.disc
    tabs = plain_tabs(laid_out.arrangement, disc.movement)
    name = "opening" if disc.pattern.cut is None else "cut"
    outlines = plain_outlines(tabs, disc.movement, CUTTER)
    plain = np.array([[corner[:2] for corner in outline[name]] for outline in outlines])

    order = np.lexsort((disc.edge_angle_rad, disc.track_index))
    ours = disc.placed_mm((disc.pattern.cut or disc.pattern.opening).points_mm)[order]

    assert plain == pytest.approx(ours, abs=1e-6)


def test_the_plain_way_reads_the_same_notes_in_the_same_order() -> None:
    score = read_score(large_tune(300), sequence=1)

    notes = plain_notes(large_tune(300))

    assert [(note.pitch, note.channel + 1) for note in notes] == list(
        zip(score.pitch.tolist(), score.channel.tolist(), strict=True)
    )
    assert [note.onset_s for note in notes] == pytest.approx(score.onset_s.tolist(), abs=1e-9)


def test_the_openings_of_the_plain_way_are_ours(laid_out: LaidOut) -> None:
    disc = laid_out.disc
    tabs = plain_tabs(laid_out.arrangement, disc.movement)
    plain = [plain_polygon(outline["opening"]) for outline in plain_outlines(tabs, disc.movement, CUTTER)]

    order = np.lexsort((disc.edge_angle_rad, disc.track_index))
    cores = core_geometries(disc.placed_mm(disc.pattern.core_points_mm))[order]
    ours = shapely.buffer(cores, disc.pattern.core_round_mm, quad_segs=8) if disc.pattern.core_round_mm else cores

    # Half circles are straight pieces here and there: their areas differ by less than a fiftieth.
    apart = shapely.area(shapely.symmetric_difference(np.array(plain), ours)) / shapely.area(ours)
    assert apart.max() < (0.02 if disc.pattern.core_round_mm else 1e-6)
    assert webs_between_openings_hold(disc) == []
