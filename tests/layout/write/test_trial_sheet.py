import io
from dataclasses import replace

import numpy as np
import pypdfium2
import pytest
from pypdf import PdfReader

from layout.documents import Cutter, Movement
from layout.trial import TrialPiece, trial_piece
from layout.trial.piece import NotTried
from layout.write.trial_sheet import MARGIN, MOST_TOLD, write_trial_sheet
from tests.layout.examples import LASER, PRESS, SHIPPED, movement_with

FERNHOLLOW = SHIPPED[0]
A4_POINTS = (595.28, 841.89)  # ISO 216: 210 by 297 mm, at 72 points to 25.4 mm
EVERY = [
    pytest.param(movement, cutter, id=f"{movement.id}-{cutter.id}") for movement in SHIPPED for cutter in (LASER, PRESS)
]


def words_of(pdf: bytes) -> str:
    """All words of the page with single blanks between them, whatever line they stand on."""
    [page] = PdfReader(io.BytesIO(pdf)).pages
    return " ".join(page.extract_text().split())


def ink_of(pdf: bytes) -> tuple[float, float, float, float]:
    """Left, top, right and bottom of what is printed, in points from the top left corner."""
    scale = 2
    picture = np.asarray(pypdfium2.PdfDocument(pdf)[0].render(scale=scale).to_pil().convert("L"))
    rows, columns = np.flatnonzero(picture.min(axis=1) < 200), np.flatnonzero(picture.min(axis=0) < 200)
    return columns[0] / scale, rows[0] / scale, columns[-1] / scale, rows[-1] / scale


def crowded() -> TrialPiece:
    """A piece with more that is not tried than fits in a line."""
    left = tuple(
        NotTried(what=f"track {number}", why="its opening leaves less than 0.5 mm to the rim or to a hole")
        for number in range(1, 30)
    )
    return replace(trial_piece(FERNHOLLOW, LASER), not_tried=left)


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_the_sheet_tells_every_step_its_nominal_value_and_what_to_correct(movement: Movement, cutter: Cutter) -> None:
    piece = trial_piece(movement, cutter)

    words = words_of(write_trial_sheet(piece))

    assert f"Movement {movement.id}, revision 1. Cutter {cutter.id}" in words
    for ladder in piece.ladders:
        assert ladder.measure in words
        assert ladder.how in words
        marks = " ".join(step.mark for step in ladder.steps)
        nominal = " ".join(f"{round(step.nominal_mm, 3):g}" for step in ladder.steps)
        assert f"step {marks} nominal, mm {nominal} measured, mm" in words
        assert all(f"{step.document} {step.field}" in words for step in ladder.steps)
    assert all(caution in words for caution in piece.cautions)
    assert "Not tried" not in words


@pytest.mark.parametrize(
    ("cutter", "danger"),
    [(LASER, "fume extraction on; never look into the light"), (PRESS, "hands out of the die space, guards closed")],
    ids=["laser", "press"],
)
def test_the_sheet_warns_of_the_machine_of_edges_and_of_a_wound_spring(cutter: Cutter, danger: str) -> None:
    words = words_of(write_trial_sheet(trial_piece(FERNHOLLOW, cutter)))

    assert danger in words
    assert "Edges, tabs and burrs are sharp" in words
    assert "let it down fully before the movement is opened" in words
    assert "Never take out comb, brake or governor while the spring is wound" in words
    assert "turn by hand" in words
    assert "Local rules and trained people come first" in words
    assert ("zinc" in words.lower()) == (cutter is LASER)


@pytest.mark.parametrize("piece", [trial_piece(m, c) for m in SHIPPED for c in (LASER, PRESS)] + [crowded()])
def test_the_sheet_is_one_page_of_a4_with_its_margins_white(piece: TrialPiece) -> None:
    pdf = write_trial_sheet(piece)

    [page] = PdfReader(io.BytesIO(pdf)).pages
    assert tuple(map(float, page.mediabox[2:])) == pytest.approx(A4_POINTS, abs=0.01)
    left, top, right, bottom = ink_of(pdf)
    assert min(left, top, A4_POINTS[0] - right, A4_POINTS[1] - bottom) >= MARGIN - 1


def test_what_is_not_tried_is_told_and_the_rest_counted() -> None:
    words = words_of(write_trial_sheet(crowded()))

    assert "Not tried track 1: its opening leaves less than 0.5 mm to the rim or to a hole." in words
    assert f"And {29 - MOST_TOLD} more, all in trial-piece.json." in words


def test_letters_that_the_page_cannot_show_become_question_marks() -> None:
    movement = movement_with({"disc/material": "Stahl gewalzt, gl\u00e4nzend \u65e5"})

    words = words_of(write_trial_sheet(trial_piece(movement, LASER)))

    assert "Sheet Stahl gewalzt, gl\u00e4nzend ?, 0.5 mm." in words


def test_a_word_wider_than_the_page_is_broken() -> None:
    movement = movement_with({"disc/material": "W" * 120})

    _, _, right, _ = ink_of(write_trial_sheet(trial_piece(movement, LASER)))

    assert right <= A4_POINTS[0] - MARGIN + 1
