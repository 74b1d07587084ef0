"""What the measure sheet says gives back the true value: a piece is folded or tried with another, and measured."""

import math
import re

import numpy as np
import pytest

from layout.documents import Movement
from layout.trial.piece import Ladder, TrialPiece
from tests.layout.examples import LASER, SHIPPED, cutter_with, movement_with
from tests.layout.trial.reading import Read, at_mark, read_piece, size_mm

FOLDED = [movement for movement in SHIPPED if movement.projection.kind == "standing"]
RELIEF_MM, SLIT_MM = 0.3, 0.42  # of the shipped laser's fold


def ladder_of(piece: TrialPiece, name: str) -> Ladder:
    [found] = [ladder for ladder in piece.ladders if ladder.name == name]
    return found


def blanks_mm(piece: TrialPiece, read: Read) -> list[float]:
    """What there is to bend of each tab of the depth ladder, from the fold's relief to its free edge, as drawn."""
    marks = [step.mark for step in ladder_of(piece, "depth").steps]
    return [size_mm(at_mark(read, mark)[0])[1] - SLIT_MM - RELIEF_MM for mark in marks]


def taken_up_mm(radius_mm: float, thickness_mm: float) -> float:
    """DIN 6935: k = 0.65 + 0.5·log10(r/s) for r/s up to 5, and a bend of 90° takes π/2·(r + k·s/2) of the blank."""
    k = 0.65 + 0.5 * math.log10(radius_mm / thickness_mm)
    return math.pi / 2 * (radius_mm + k * thickness_mm / 2)


@pytest.mark.parametrize("movement", FOLDED, ids=[movement.id for movement in FOLDED])
@pytest.mark.parametrize("bent_to_mm", [0.36, 0.38, 0.42, 0.44])
def test_a_piece_folded_to_another_radius_and_measured_gives_that_radius_back(
    movement: Movement, bent_to_mm: float
) -> None:
    piece, read = read_piece(movement, cutter_with({"fold/inside_radius_mm": 0.40}))
    depth, thickness_mm = ladder_of(piece, "depth"), movement.disc.thickness_mm
    # Once folded, a tab of the blank L stands L − a(r) above the end of its bend, and the bend r above the sheet.
    measured = [blank - taken_up_mm(bent_to_mm, thickness_mm) + bent_to_mm for blank in blanks_mm(piece, read)]

    e = float(np.mean(measured) - np.mean([step.nominal_mm for step in depth.steps]))
    [(stated, sign, slope)] = re.findall(r"fold\.inside_radius_mm = ([\d.]+) ([+-]) e / ([\d.]+)\.", depth.how)
    corrected_mm = float(stated) + {"+": 1, "-": -1}[sign] * e / float(slope)

    assert float(stated) == 0.40
    assert abs(e) > 0.01
    assert corrected_mm == pytest.approx(bent_to_mm, abs=0.002)  # a tenth of the least step tried here


@pytest.mark.parametrize("off_mm", [-0.3, 0.25])
def test_a_wheel_that_stands_elsewhere_gives_its_track_the_radius_it_stands_on(off_mm: float) -> None:
    movement = movement_with({})
    piece, read = read_piece(movement, LASER)
    tracks = ladder_of(piece, "tracks")

    for step in tracks.steps:
        wheel_mm = step.nominal_mm + off_mm
        # The projection's middle lies where the drawing has its opening: across the travel, halfway.
        stands_mm = min(
            (np.hypot(opening.centroid.x, opening.centroid.y) for opening in read.openings),
            key=lambda found: abs(found - step.nominal_mm),
        )
        outside_mm = wheel_mm - stands_mm
        [sign] = re.findall(r"radius_mm = nominal ([+-]) how far the wheel's middle lies outside the", tracks.how)
        corrected_mm = step.nominal_mm + {"+": 1, "-": -1}[sign] * outside_mm

        assert corrected_mm == pytest.approx(wheel_mm, abs=0.01)
        assert "(- where inside)" in tracks.how


def test_a_laser_that_cuts_wider_than_it_states_gives_its_kerf_back() -> None:
    for compensated, stated_mm in ((False, 0.12), (True, 0.12)):
        piece, read = read_piece(SHIPPED[0], cutter_with({"kerf_compensated": compensated}))
        kerf = ladder_of(piece, "kerf")
        drawn = [size_mm(at_mark(read, step.mark)[0])[0] for step in kerf.steps]
        true_mm = 0.15
        # A machine that is set to the stated kerf runs half of it inside; the beam then takes half the true one.
        set_mm = 0.0 if compensated else stated_mm
        measured = [width - set_mm + true_mm for width in drawn]

        more = float(np.mean(measured) - np.mean([step.nominal_mm for step in kerf.steps]))
        [(stated, sign)] = re.findall(r"kerf_mm = ([\d.]+) ([+-]) the mean of \(measured - nominal\)", kerf.how)

        assert float(stated) + {"+": 1, "-": -1}[sign] * more == pytest.approx(true_mm, abs=1e-4)
