import csv
import io
import math
from dataclasses import replace

import numpy as np
import pytest

from layout.cut import plan_cuts
from layout.mechanics.arrays import frozen_floats
from layout.place.disc import Disc
from layout.write import write_hits
from tests.layout.write.examples import (
    EMPTY_DISC,
    EXAMPLE_DISCS,
    FINGERPRINT,
    LASER,
    MOSSBROOK,
    ONE_FOLD,
    PRESS,
    THREE_LANCES,
    disc_of,
    plan_by_hand,
)

HEADER = "sequence,tool,radius_mm,angle_deg,x_mm,y_mm,track,pitch"


def rows_of(hits: bytes) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(hits.decode("ascii"), newline="")))


def test_one_projection_at_a_quarter_turn_gives_its_own_row() -> None:
    hits = write_hits(plan_by_hand(ONE_FOLD), ONE_FOLD)

    # track 5 of fernhollow-31: 36 + 4 * 2.62 = 46.48 mm, at 90 degrees: x = 0, y = 46.48; its tooth is Bb4
    assert hits.decode() == f"{HEADER}\r\n1,,46.480000,90.00000000,0.000000,46.480000,5,Bb4\r\n"


def test_a_disc_without_projections_gives_the_header_alone() -> None:
    assert write_hits(plan_by_hand(EMPTY_DISC), EMPTY_DISC).decode() == f"{HEADER}\r\n"


@pytest.mark.parametrize("disc", [THREE_LANCES, EMPTY_DISC], ids=["projections", "none"])
def test_a_disc_cut_despite_an_error_says_so_in_every_row(disc: Disc) -> None:
    good, marked = (write_hits(plan_by_hand(disc, not_good=reason), disc).decode() for reason in (None, "trial"))

    assert marked.splitlines()[0] == f"{HEADER},not_good"
    assert [row["not_good"] for row in rows_of(marked.encode())] == ["NOT GOOD TO CUT"] * disc.projection_count
    assert [line.rpartition(",")[0] for line in marked.splitlines()] == good.splitlines()


def test_a_press_strikes_beside_the_working_edge_and_mirrored() -> None:
    disc = disc_of(MOSSBROOK, PRESS, [(1, 0.0)])

    [row] = rows_of(write_hits(plan_by_hand(disc), disc))

    # Tool L11 strikes 0.8 mm behind the edge, square to its own radius R = √(45² − 0.8²) on track 1. The disc turns
    # clockwise, so travel at 0 degrees is towards -y and behind is +y: at (R · R/45, R · 0.8/45). Drawn from the star
    # side y turns over.
    assert (row["tool"], row["x_mm"], row["y_mm"]) == ("L11", "44.985778", "-0.799874")
    assert float(row["radius_mm"]) == pytest.approx(44.992888, abs=1e-6)  # sqrt(45² − 0.8²)
    assert float(row["angle_deg"]) == pytest.approx(360 - math.degrees(math.asin(0.8 / 45)), abs=1e-8)


@pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())
def test_rows_follow_the_cutting_order_with_the_tracks_and_pitches_of_the_comb(disc: Disc) -> None:
    plan = plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)

    rows = rows_of(write_hits(plan, disc))

    assert [int(row["sequence"]) for row in rows] == list(range(1, disc.projection_count + 1))
    tracks = (disc.track_index[plan.order] + 1).tolist()
    assert [int(row["track"]) for row in rows] == tracks
    pitches = {tooth.track: tooth.pitch for tooth in disc.movement.teeth}
    assert [row["pitch"] for row in rows] == [pitches[track] for track in tracks]
    assert {row["tool"] for row in rows} <= {plan.tool}


@pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())
def test_radius_and_angle_are_the_same_place_as_x_and_y(disc: Disc) -> None:
    for row in rows_of(write_hits(plan_by_hand(disc), disc)):
        angle_rad = np.radians(float(row["angle_deg"]))
        x_mm, y_mm = float(row["radius_mm"]) * np.array([np.cos(angle_rad), np.sin(angle_rad)])
        assert (x_mm, y_mm) == pytest.approx((float(row["x_mm"]), float(row["y_mm"])), abs=2e-6)


def test_an_angle_just_below_a_whole_turn_is_written_as_zero() -> None:
    at_mm = frozen_floats(np.array([[45.0, -1e-12]]))
    plan = replace(plan_by_hand(disc_of(MOSSBROOK, LASER, [(1, 0.0)])), at_mm=at_mm)

    [row] = rows_of(write_hits(plan, THREE_LANCES))

    assert (row["angle_deg"], row["y_mm"]) == ("0.00000000", "0.000000")
