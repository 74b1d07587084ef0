"""The work sheet as a whole: its pages, its frame, its words, the same bytes, and discs of all sizes."""

import hashlib
import io
import os
import subprocess
import sys
from collections import Counter
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pypdf
import pytest

from layout.check.finding import Code, Finding, Level
from layout.cut import plan_cuts
from layout.documents import Cutter, Movement, Settings, shipped_cutter, shipped_movement
from layout.making import making_of
from layout.place.disc import Disc
from layout.walk import lay_out
from layout.write.work_sheet import write_work_sheet
from layout.write.work_sheet.cautions import cautions_for
from tests.layout.write.examples import (
    EMPTY_DISC,
    EXAMPLE_DISCS,
    FERNHOLLOW,
    LASER,
    MOSSBROOK,
    NEAR_LIMIT,
    ONE_FOLD,
    PRESS,
    TARNLIGHT,
    THIN_WEB,
    THREE_FOLDS,
    THREE_LANCES,
    THREE_SLOTS,
    disc_of,
    full_disc,
    laid_out_of,
    without,
)
from tests.layout.write.work_sheets import (
    PIXELS_PER_MM,
    counts_told,
    ink_of,
    pages_of,
    plan_of,
    set_sheet_of,
    sheet_of,
    text_boxes_mm,
    words_of,
)

TOP = Path(__file__).parents[3]
TUNE = (TOP / "service" / "demo" / "tune.mid").read_bytes()
LONG = "words that go on and on " * 5
# ISO 5457, from memory: the frame of an A4 sheet, 20 mm from the left edge and 10 mm from the others.
FRAME_MM = (20.0, 10.0, 200.0, 287.0)
GRAIN_MM = 0.05  # what a box round letters may be wider than the letters

PROGRAM = """
import hashlib, sys
sys.path.insert(0, sys.argv[1])
from tests.layout.write.examples import NEAR_LIMIT, THIN_WEB, THREE_FOLDS, THREE_LANCES
from tests.layout.write.work_sheets import sheet_of

for disc in (THREE_FOLDS, THREE_LANCES):
    pdf = sheet_of(disc, findings=(THIN_WEB, NEAR_LIMIT), not_good="trial")
    print(hashlib.sha256(pdf).hexdigest())
"""


def disc_with_tracks(count: int, cutter: Cutter = LASER) -> Disc:
    """A disc with so many tracks, every third twice as full as the others."""
    document = FERNHOLLOW.model_dump(mode="json")
    document["tracks"] = [{"track": place + 1, "radius_mm": 30 + place * 80 / count} for place in range(count)]
    document["teeth"] = [{"tooth": place + 1, "track": place + 1, "pitch": "C5"} for place in range(count)]
    placed = [
        (track, 40.0 * turn + 1.9 * track) for track in range(1, count + 1) for turn in range(4 if track % 3 else 8)
    ]
    return disc_of(Movement.model_validate(document), cutter, placed)


def findings_of(count: int) -> tuple[Finding, ...]:
    """So many findings of different kinds, errors, warnings and advice in turn."""
    codes, levels = list(Code), list(Level)
    return tuple(
        without(THIN_WEB, code=codes[place % len(codes)], level=levels[place % 3], message=f"Number {place}: {LONG}.")
        for place in range(count)
    )


def wordy_disc() -> Disc:
    """A disc whose every name is as long as a document allows, and which states all it can."""
    movement, cutter = FERNHOLLOW.model_dump(mode="json"), LASER.model_dump(mode="json")
    hole = movement["disc"]["features"][0]
    movement |= {"id": "m" * 64, "title": "W" * 120}
    movement["disc"] |= {
        "material": "W" * 120,
        "features": [{**hole, "count": 1, "first_at_deg": 30.0 * place} for place in range(9)],
        "centre_hole_play_mm": 0.05,
        "rolled_along_deg": 30.0,
    }
    cutter |= {
        "id": "c" * 64,
        "title": "W" * 120,
        "burr_side": "star-side",
        "lead_in": {"length_mm": 1.5},
        "bridges": {"count": 4, "width_mm": 0.4},
        "tolerance_class": "iso-9013-1",
        "fold": {**cutter["fold"], "springback": {"opens_deg": 3.5}},
    }
    placed = [(track, 11.0 * turn) for track in range(1, 32) for turn in range(30)]
    return disc_of(Movement.model_validate(movement), Cutter.model_validate(cutter), placed)


SIXTY_TRACKS, MOST_TRACKS, WORDY = disc_with_tracks(60), disc_with_tracks(200, PRESS), wordy_disc()
ALL_DISCS = EXAMPLE_DISCS | {
    "60 tracks": SIXTY_TRACKS,
    "200 tracks on a press": MOST_TRACKS,
    "long names": WORDY,
    "a full large disc": full_disc(MOSSBROOK, LASER),
}


@pytest.mark.parametrize("name", ALL_DISCS)
def test_a_work_sheet_is_two_upright_a4_pages(name: str) -> None:
    pdf = sheet_of(ALL_DISCS[name])

    pages = pypdf.PdfReader(io.BytesIO(pdf)).pages

    # ISO 216: A4 is 210 by 297 mm; a point is 1/72 inch.
    sizes_mm = [(float(page.mediabox.width) / 72 * 25.4, float(page.mediabox.height) / 72 * 25.4) for page in pages]
    assert sizes_mm == [pytest.approx((210, 297), abs=0.01)] * 2
    assert [f"{number} / 2" in text for number, text in enumerate(pages_of(pdf), 1)] == [True] * 2


@pytest.mark.parametrize("not_good", [None, LONG * 3])
@pytest.mark.parametrize("name", ALL_DISCS)
def test_no_word_stands_outside_the_frame(name: str, not_good: str | None) -> None:
    pdf = sheet_of(ALL_DISCS[name], title="W" * 80, findings=findings_of(40), not_good=not_good)

    boxes = np.array([box for page in (0, 1) for box in text_boxes_mm(pdf, page)])

    assert len(boxes) > 100
    assert (boxes[:, :2] >= np.array(FRAME_MM[:2]) - GRAIN_MM).all()
    assert (boxes[:, 2:] <= np.array(FRAME_MM[2:]) + GRAIN_MM).all()


@pytest.mark.parametrize("disc", [ONE_FOLD, THREE_LANCES, THREE_SLOTS, WORDY, MOST_TRACKS])
def test_no_words_are_written_over_others(disc: Disc) -> None:
    for count in (0, 3, 200):
        pdf = sheet_of(disc, title="W" * 80, findings=findings_of(count))
        for page in (0, 1):
            boxes = np.array(list(text_boxes_mm(pdf, page)))
            boxes = boxes[boxes[:, 3] - boxes[:, 1] < 100]  # without the warning across the page

            deep_mm = np.minimum(boxes[:, None, 2:], boxes[None, :, 2:]) - np.maximum(
                boxes[:, None, :2], boxes[None, :, :2]
            )
            over = np.triu((deep_mm > 0.3).all(axis=-1), k=1)

            assert np.argwhere(over).tolist() == []


@pytest.mark.parametrize("page", [0, 1])
@pytest.mark.parametrize("name", ["long names", "tracks off the disc"])
def test_nothing_is_drawn_outside_the_frame_but_the_centring_marks(name: str, page: int) -> None:
    # A blank that was made smaller than the tracks: projections far outside the rim.
    small = MOSSBROOK.model_dump(mode="json")
    small["disc"] |= {"outer_diameter_mm": 118, "features": []}
    off = disc_of(Movement.model_validate(small), LASER, [(67, 90.0), (67, 180.0), (67, 0.0), (67, 270.0)])
    ink = ink_of(sheet_of(off if name == "tracks off the disc" else WORDY), page)

    left, bottom, right, top = (round(edge * PIXELS_PER_MM) for edge in FRAME_MM)
    height, width = ink.shape
    half_line = round(0.3 * PIXELS_PER_MM)
    ink[height - top - half_line : height - bottom + half_line, left - half_line : right + half_line] = False
    middle_row, middle_column = height // 2, width // 2
    ink[middle_row - half_line : middle_row + half_line] = False
    ink[:, middle_column - half_line : middle_column + half_line] = False

    assert ink.sum() == 0


def test_the_same_disc_gives_the_same_bytes_in_this_process_and_in_another() -> None:
    here = [
        hashlib.sha256(sheet_of(disc, findings=(THIN_WEB, NEAR_LIMIT), not_good="trial")).hexdigest()
        for disc in (THREE_FOLDS, THREE_LANCES)
        for _ in (1, 2)
    ]
    environment = os.environ | {"PYTHONHASHSEED": "7", "TZ": "Pacific/Auckland", "LC_ALL": "C"}

    ran = subprocess.run(
        [sys.executable, "-W", "ignore", "-c", PROGRAM, str(TOP)],
        env=environment,
        capture_output=True,
        check=True,
        text=True,
    )

    there = ran.stdout.split()
    assert here == [there[0], there[0], there[1], there[1]]
    assert there[0] != there[1]


def test_a_work_sheet_carries_no_moment_of_its_making() -> None:
    details = pypdf.PdfReader(io.BytesIO(sheet_of(ONE_FOLD, title="Turning"))).metadata

    assert details is not None
    assert details.title == "Work sheet: Turning"
    assert details.creation_date is None or details.creation_date.year == 2000  # the library's fixed date


@pytest.mark.parametrize("cutter", ["fibre-laser", "turn-press"])
@pytest.mark.parametrize("movement", ["fernhollow-31", "mossbrook-67", "tarnlight-17"])
def test_a_tune_on_every_shipped_movement_and_cutter_has_its_counts_on_the_sheet(movement: str, cutter: str) -> None:
    passage = {"passage": {"from_s": 0, "to_s": 36.2}} if movement == "tarnlight-17" else {}
    settings = Settings.model_validate(passage)
    laid_out = lay_out(TUNE, shipped_movement(movement), shipped_cutter(cutter), settings)
    plan = plan_cuts(laid_out.disc, title=laid_out.title, fingerprint=laid_out.fingerprint, not_good=None)

    pdf = write_work_sheet(plan, laid_out, making_of(laid_out.disc, plan))

    count = laid_out.disc.projection_count
    cut = "hits" if cutter == "turn-press" else "slots" if movement == "tarnlight-17" else "slits"
    assert count > 100
    assert counts_told(pdf) == Counter((laid_out.disc.track_index + 1).tolist())
    assert f"{cut} {count}" in words_of(pdf)
    assert f"projections {count} " in words_of(pdf)
    assert f"{count} projections in all" in words_of(pdf)
    assert "Turning Day at Wickenbeck" in words_of(pdf)
    assert laid_out.fingerprint in words_of(pdf)
    assert f"{movement}, revision 1" in words_of(pdf)
    assert "Verdict good to cut" in words_of(pdf)
    assert "NOT GOOD" not in words_of(pdf)


def test_the_table_counts_every_track_of_a_large_comb() -> None:
    told = counts_told(sheet_of(MOST_TRACKS))

    assert told == {track: 4 if track % 3 else 8 for track in range(1, 201)}


def test_an_empty_disc_has_the_sheet_of_a_bare_blank() -> None:
    words = words_of(sheet_of(EMPTY_DISC))

    assert "None: a bare blank." in words
    assert "Nothing to form: a bare blank." in words
    assert "projections 0" in words
    assert "holes 4" in words  # three drive holes and the centre hole
    assert "Height" not in words
    assert "Webs to measure" not in words


def test_every_kind_of_finding_is_on_the_sheet_with_its_count() -> None:
    findings = findings_of(3 * len(Code))

    words = words_of(sheet_of(MOST_TRACKS, findings=findings))

    assert all(f" {code.value}" in words for code in Code)
    listed = sum(words.count(f"{level.value.upper()} ") for level in Level)
    assert f"and {len(findings) - listed} more, see layout.json" in words
    assert listed > 0


def test_sixty_tracks_and_forty_findings_fit() -> None:
    findings = findings_of(40)

    pages = pages_of(sheet_of(SIXTY_TRACKS, findings=findings))

    words = " ".join(pages[1].split())
    listed = sum(words.count(f" {level.value.upper()} ") for level in Level)
    assert len(pages) == 2
    assert all(f" {finding.code.value}" in words for finding in findings)
    assert listed >= 20
    assert listed == 40 or f"and {40 - listed} more, see layout.json" in words
    assert "Wound spring" in words


def test_errors_stand_before_warnings_and_advice() -> None:
    advice = without(NEAR_LIMIT, code=Code.LABEL_HIDDEN, level=Level.ADVICE)

    words = words_of(sheet_of(ONE_FOLD, findings=(advice, NEAR_LIMIT, THIN_WEB), not_good="trial"))

    places = [words.index(text) for text in ("ERROR web-too-thin", "WARNING margin-unsure", "ADVICE label-hidden")]
    assert places == sorted(places)
    assert "The web between two openings on tracks 4 and 5 is 0.31 mm; the cutter needs 0.5 mm." in words


def test_what_to_do_about_findings_is_told_where_there_is_room_for_all_of_them() -> None:
    remedy = "To do: Leave one of the two notes out, or let the arranger move it to another tooth."

    few, many = (words_of(sheet_of(ONE_FOLD, findings=(THIN_WEB,) * count)) for count in (2, 40))

    assert few.count(f"the cutter needs 0.5 mm. {remedy}") == 2
    assert "see layout.json" not in few
    assert "To do:" not in many
    assert "The web between two openings on tracks 4 and 5 is 0.31 mm; the cutter needs 0.5 mm." in many


def test_many_findings_of_one_kind_leave_room_for_the_others() -> None:
    crowd = tuple(without(THIN_WEB, message=f"Web {place} is thin.") for place in range(300))
    advice = without(NEAR_LIMIT, code=Code.LABEL_HIDDEN, level=Level.ADVICE, message="Let it run out once.")

    words = words_of(sheet_of(ONE_FOLD, findings=(*crowd, advice)))

    listed = words.count("ERROR web-too-thin")
    assert "Let it run out once." in words
    assert listed > 20
    assert f"and {300 - listed} more, see layout.json: errors web-too-thin × {300 - listed}." in words


def test_a_disc_with_an_error_says_on_both_pages_that_it_is_not_good_to_cut() -> None:
    kept_back = pages_of(sheet_of(ONE_FOLD, findings=(THIN_WEB,)))
    overruled = pages_of(sheet_of(ONE_FOLD, findings=(THIN_WEB,), not_good="a trial on scrap"))

    assert [page.count("NOT GOOD TO CUT") for page in kept_back + overruled] == [3] * 4  # across, band, title block
    assert all("1 error; cutting files kept back" in page for page in kept_back)
    assert all("1 error; cut all the same, because: a trial on scrap" in page for page in overruled)


def test_the_warning_runs_across_the_page_in_large_letters() -> None:
    pdf = sheet_of(ONE_FOLD, findings=(THIN_WEB,))
    boxes = np.array([box for page in (0, 1) for box in text_boxes_mm(pdf, page)])

    wide_mm, high_mm = (boxes[:, 2:] - boxes[:, :2]).T

    assert ((wide_mm > 100) & (high_mm > 150)).sum() == 2


def test_a_disc_with_warnings_alone_is_good_to_cut() -> None:
    words = words_of(sheet_of(ONE_FOLD, findings=(NEAR_LIMIT,)))

    assert "NOT GOOD" not in words
    assert "WARNING margin-unsure The tip clears the bend by 0.02 mm" in words


@pytest.mark.parametrize("disc", [ONE_FOLD, THREE_LANCES, THREE_SLOTS, WORDY, MOST_TRACKS])
def test_no_caution_is_lost_however_full_the_page_is(disc: Disc) -> None:
    words = words_of(sheet_of(disc, findings=findings_of(200)))

    for name, text in cautions_for(disc):
        assert f"{name} {text}" in words


def test_a_laser_sheet_warns_of_zinc_fume_and_a_press_sheet_of_the_press() -> None:
    laser, press = words_of(sheet_of(ONE_FOLD)), words_of(sheet_of(THREE_LANCES))

    # 29 CFR 1910.1000 Table Z-1: zinc oxide fume 5 mg/m³, mean of 8 h.
    assert "zinc oxide fume" in laser
    assert "5 mg/m³ over 8 h" in laser
    assert "No hand between punch and die" in press
    assert "zinc" not in press.lower()
    for words in (laser, press):
        assert "Never take out comb, brake or governor under a wound spring" in words
        assert "Local rules" in words


def test_a_disc_of_a_set_says_which_it_is() -> None:
    assert "Disc disc 2 of 3" in words_of(set_sheet_of(ONE_FOLD, 2, 3))
    assert "Disc disc 1 of 1" in words_of(sheet_of(ONE_FOLD))


def test_the_order_number_stands_in_the_title_block_and_room_is_left_where_there_is_none() -> None:
    ordered = replace(laid_out_of(ONE_FOLD), order_number="2026-117/B")

    assert "Order number 2026-117/B Verdict" in words_of(write_work_sheet(plan_of(ONE_FOLD), ordered, None))
    assert "Order number Verdict" in words_of(sheet_of(ONE_FOLD))


@pytest.mark.parametrize(
    ("title", "shown"),
    [
        ("Été à l'orée – “naïve”", "Été à l'orée – “naïve”"),
        ("Żółta łódź", "Zólta lódz"),  # only ó is in code page 1252
        ("Sáŋat ok Đorđe", "Sángat ok Dorde"),  # by their names: eng is like ng, a letter with stroke like it
        ("夜の歌", "(in letters this sheet cannot show: see layout.json)"),
        ("Waltz ♪ in 3", "Waltz ? in 3"),
        ("two\nlines\tand\x00more", "two lines and more"),
    ],
)
def test_a_title_is_shown_in_letters_the_font_has(title: str, shown: str) -> None:
    pdf = sheet_of(ONE_FOLD, title=title)

    assert f"Title {shown} Kind of document" in words_of(pdf)


def test_a_title_in_any_letters_stands_whole_in_the_file_s_own_title() -> None:
    details = pypdf.PdfReader(io.BytesIO(sheet_of(ONE_FOLD, title="夜の歌"))).metadata

    assert details is not None
    assert details.title == "Work sheet: 夜の歌"


def test_only_standard_fonts_with_their_own_letters_are_used() -> None:
    pages = pypdf.PdfReader(io.BytesIO(sheet_of(WORDY, findings=findings_of(40)))).pages

    fonts = {_base_font(font) for page in pages for font in _fonts(page)}

    assert fonts == {"/Helvetica", "/Helvetica-Bold"}


def _fonts(page: Any) -> list[Any]:
    return list(page["/Resources"]["/Font"].values())


def _base_font(reference: Any) -> str:
    return str(reference.get_object()["/BaseFont"])


def test_tarnlight_on_both_cutters_is_told_that_nothing_is_formed() -> None:
    for cutter in (LASER, PRESS):
        words = words_of(sheet_of(disc_of(TARNLIGHT, cutter, [(1, 10.0), (2, 40.0)])))
        assert "No forming: slots work as they are cut. Each is 2.2 × 1.3 mm" in words
        assert "then fold" not in words.lower()


def test_a_plan_marked_not_good_is_marked_whatever_the_findings_say() -> None:
    pdf = write_work_sheet(replace(plan_of(ONE_FOLD), not_good="asked for"), laid_out_of(ONE_FOLD), None)

    assert "cut all the same, because: asked for" in words_of(pdf)
