"""Random movements, cutters and tunes: what is called good to cut reads back and keeps its webs; the rest is kept back.

The webs are measured here anew, by shapely alone, on what ezdxf reads of record.dxf: every pair of openings, and each
against the rim, the holes and the rings kept clear.
"""

import io
import itertools
import json
import math

import ezdxf.path
import numpy as np
import shapely
from ezdxf.filemanagement import read
from hypothesis import given, settings
from hypothesis import strategies as st

from layout import walk
from layout.check.finding import Code
from layout.documents import Cutter, Movement, read_movement, read_settings
from layout.documents.movement import MeasuredStarWheel
from layout.file_names import CUTTING_FILES
from tests.fuzz.random_machines import cutters, movements, tunes
from tests.thorough import THOROUGH

ASKED = read_settings('{"speed": {"mode": "fit", "least": 0.5, "most": 4}}')
CHORD_MM = 0.001  # how far inside its arc a chord of what is read may lie


def areas(dxf: bytes, layer: str) -> list[shapely.Polygon]:
    """The areas of a layer's closed outlines."""
    found = read(io.StringIO(dxf.decode())).modelspace().query(f'*[layer=="{layer}"]')
    outlines = [ezdxf.path.make_path(entity).flattening(CHORD_MM) for entity in found]
    return [shapely.Polygon([(point.x, point.y) for point in outline]) for outline in outlines]


def thinnest_webs_mm(files: dict[str, bytes], movement: Movement) -> dict[str, float]:
    """The least metal of each sort beside an opening, in what record.dxf draws; none of a sort is infinite."""
    openings = areas(files["record.dxf"], "AFTER_FORMING")
    holes = areas(files["record.dxf"], "HOLES")
    [rim] = areas(files["record.dxf"], "RIM")
    pairs = itertools.combinations(openings, 2)
    centre = shapely.Point(0, 0)
    nearest_mm = min((shapely.distance(centre, one) for one in openings), default=math.inf)
    farthest_mm = max((shapely.hausdorff_distance(centre, one) for one in openings), default=0.0)
    return {
        "between openings": min((shapely.distance(*pair) for pair in pairs), default=math.inf),
        "to the rim": min((shapely.distance(rim.exterior, one) for one in openings), default=math.inf),
        "to a hole": min((shapely.distance(*pair) for pair in itertools.product(openings, holes)), default=math.inf),
        "inside every ring": min(
            (max(nearest_mm - ring.to_radius_mm, ring.from_radius_mm - farthest_mm) for ring in movement.keep_out),
            default=math.inf,
        ),
    }


# The arranging stage lets edges be 1e-9 rad nearer than stated, a tenth of a nanometre at 100 mm, so that rounding
# decides nothing; moments are then whole nanoseconds, rounded so as not to come nearer still.
ROUNDING_DEG = math.degrees(1e-9)


def assert_wheels_have_their_steps(files: dict[str, bytes], movement: Movement) -> None:
    """On a track no two working edges stand nearer than a star wheel's step, over the turn's seam as well."""
    told = json.loads(files["layout.json"])["projections"]
    wheel = movement.star_wheel
    arc_mm = (
        wheel.engagement_arc_mm
        if isinstance(wheel, MeasuredStarWheel)
        else 2 * wheel.tip_radius_mm * math.sin(math.pi / wheel.points)
    )
    for track in movement.tracks:
        angles_deg = np.sort([one["angle_deg"] % 360 for one in told if one["track"] == track.track])
        # with an offset the row stands askew: sin δ = d / r
        askew = math.cos(math.asin(movement.gantry_offset_mm / track.radius_mm))
        least_deg = math.degrees((track.engagement_arc_mm or arc_mm or 0.0) / (track.radius_mm * askew))
        if len(angles_deg) > 1:
            apart_deg = np.diff([*angles_deg, angles_deg[0] + 360])
            assert apart_deg.min() >= least_deg - ROUNDING_DEG


@settings(max_examples=150 if THOROUGH else 25)
@given(movement=movements(), cutter=cutters(), tune=tunes())
def test_what_is_called_good_reads_back_plays_the_same_and_keeps_its_webs(
    movement: Movement, cutter: Cutter, tune: bytes
) -> None:
    laid_out = walk.lay_out(tune, movement, cutter, ASKED)
    files = walk.files_of(laid_out)
    assert laid_out.good_to_cut == all(name in files for name in ("disc.dxf", "hits.csv"))
    if not laid_out.good_to_cut:
        return

    checked = walk.check_drawing(files["disc.dxf"], movement, cutter)

    assert checked.good_to_cut, [finding.message for finding in checked.findings]
    promised = sorted((one["track"], one["sounds_s"]) for one in json.loads(files["layout.json"])["projections"])
    played = sorted(zip((checked.plucks.track_index + 1).tolist(), checked.plucks.sounds_s.tolist(), strict=True))
    assert [track for track, _ in played] == [track for track, _ in promised]
    # a drawing's sixth decimal is 1e-6 mm, at 2 mm/s half a microsecond
    assert np.abs(np.array(played) - np.array(promised)).max(initial=0) < 1e-5
    thinnest_mm = thinnest_webs_mm(files, movement)
    assert len(areas(files["record.dxf"], "AFTER_FORMING")) == len(promised)
    assert thinnest_mm.pop("inside every ring") >= -CHORD_MM
    assert all(web_mm >= cutter.min_web_mm - CHORD_MM for web_mm in thinnest_mm.values()), thinnest_mm
    assert_wheels_have_their_steps(files, movement)


def faulty(movement: Movement, how: str) -> Movement:
    """The movement, spoilt so that every disc of it has an error."""
    document = movement.model_dump(mode="json", exclude_none=True)
    if how == "thick star wheels":  # wider than half a projection can be sure to meet
        document["star_wheel"]["thickness_mm"] = 1.9
    else:  # the last track and no metal left to the rim
        document["disc"]["outer_diameter_mm"] = 2 * movement.tracks[-1].radius_mm + 1.3
        document["teeth"] = [tooth | {"track": movement.tracks[-1].track} for tooth in document["teeth"][:1]]
        document["teeth"][0]["pitch"] = "C5"
    return read_movement(json.dumps(document))


FAULTS = st.sampled_from(["thick star wheels", "no metal to the rim"])


@settings(max_examples=30 if THOROUGH else 8)
@given(movement=movements(), how=FAULTS, cutter=cutters(), tune=tunes())
def test_what_has_an_error_is_given_as_a_cutting_file_when_asked_alone_and_says_so(
    movement: Movement, how: str, cutter: Cutter, tune: bytes
) -> None:
    spoilt = faulty(movement, how)
    laid_out = walk.lay_out(tune, spoilt, cutter, ASKED)
    assert not laid_out.good_to_cut

    unasked, asked = walk.files_of(laid_out), walk.files_of(laid_out, not_good="a test cut")

    assert not set(unasked) & set(CUTTING_FILES)
    assert set(asked) - set(unasked) == {name for name in CUTTING_FILES if name != "press.nc" or cutter.kind != "laser"}
    read_back = walk.check_drawing(asked["disc.dxf"], spoilt, cutter)
    assert Code.MARKED_NOT_GOOD in [finding.code for finding in read_back.findings]
    assert not read_back.good_to_cut
