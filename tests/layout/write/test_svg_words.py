import re
from xml.etree import ElementTree

import numpy as np
import pytest
import resvg_py
from hypothesis import given
from hypothesis import strategies as st

from layout.check.finding import Finding
from layout.place.disc import Disc
from layout.write.svg_style import TITLE_SIZE, VERDICT_SIZE
from tests.layout.write.examples import (
    EARLY_DAMPER,
    EMPTY_DISC,
    FERNHOLLOW,
    FINGERPRINT,
    NEAR_LIMIT,
    ONE_FOLD,
    THIN_WEB,
    THREE_FOLDS,
    THREE_LANCES,
    THREE_SLOTS,
    without,
)
from tests.layout.write.pictures import SVG, group_of, on_white, svg_of, texts_of

LEAST_READABLE = 0.022  # of the width: 8.8 px of 400


def test_screen_readers_get_a_name_and_a_description() -> None:
    root = ElementTree.fromstring(svg_of(ONE_FOLD, title="Evening tune", findings=(THIN_WEB, NEAR_LIMIT)))

    names = {element.get("id"): element for element in root}
    assert root.get("role") == "img"
    labels = [names[name] for name in root.get("aria-labelledby", "").split()]
    assert [label.tag for label in labels] == [f"{SVG}title", f"{SVG}desc"]
    assert labels[0].text == "Evening tune: tune disc for fernhollow-31"
    assert "NOT GOOD TO CUT. Findings: 1 error, 1 warning." in str(labels[1].text)
    assert "tune disc, seen from the label-side. units: mm." in str(labels[1].text)  # the drawing's comments


@pytest.mark.parametrize("title", ["a < b & \"c\" > 'd'", "one\ntwo\x00\x0b\x1bthree", "\ud800 half \uffff", "]]>"])
def test_text_of_a_person_cannot_break_the_picture(title: str) -> None:
    reason = f"because {title}"

    svg = svg_of(ONE_FOLD, title=title, findings=(without(THIN_WEB, message=title, remedy=title),), not_good=reason)

    shown = "\n".join(texts_of(svg))
    assert all(word in shown for word in re.findall(r"[a-z]{3,}", title))
    assert "NOT GOOD TO CUT" in shown


@given(title=st.text(max_size=60))
def test_any_title_gives_a_well_formed_picture(title: str) -> None:
    root = ElementTree.fromstring(svg_of(EMPTY_DISC, title=title))

    assert root.tag == f"{SVG}svg"


def test_a_disc_without_errors_is_called_good_to_cut() -> None:
    shown = texts_of(svg_of(ONE_FOLD, findings=(NEAR_LIMIT, EARLY_DAMPER)))

    assert "Good to cut, 1 warning, 1 piece of advice" in shown
    assert not any("NOT GOOD" in text for text in shown)


def test_a_disc_with_an_error_is_called_not_good_to_cut() -> None:
    shown = texts_of(svg_of(ONE_FOLD, findings=(THIN_WEB,)))

    assert "NOT GOOD TO CUT" in shown
    assert {"1 error", "cutting files kept back"} <= set(shown)
    assert not any(text.startswith("Good") for text in shown)


def test_the_reason_for_cutting_a_faulty_disc_is_shown() -> None:
    shown = texts_of(svg_of(ONE_FOLD, findings=(THIN_WEB,), not_good="trial piece"))

    assert "cutting files given because: trial piece" in shown


@pytest.mark.parametrize("findings", [(), (THIN_WEB,)], ids=["good", "not good"])
def test_title_and_verdict_can_be_read_at_400_pixels(findings: tuple[Finding, ...]) -> None:
    svg = svg_of(ONE_FOLD, findings=findings)

    width = float(ElementTree.fromstring(svg).get("viewBox", "").split()[2])
    sizes = [float(text.get("font-size", "0")) / width for text in group_of(svg, "header").iter(f"{SVG}text")]
    assert len(sizes) >= 3
    assert min(sizes) >= LEAST_READABLE
    assert (TITLE_SIZE / 100, VERDICT_SIZE / 100) > (LEAST_READABLE, LEAST_READABLE)


def test_the_facts_say_what_was_kept_and_why_the_rest_was_not() -> None:
    shown = " ".join(texts_of(svg_of(THREE_LANCES)))

    assert "3 of 4 asked for kept, on 3 projections" in shown
    assert "1 no such pitch" in shown
    assert "−3 semitones" in shown
    assert "1.25 × as written" in shown
    assert FINGERPRINT in shown
    assert "tool L11" in shown
    assert "the star side, mirrored, natural size" in shown
    assert "clockwise seen from the label side, 90 s a turn" in shown  # while the arrow shows it from the star side


def header_lines(title: str) -> list[tuple[str, float]]:
    """Text and size of the lines of the title."""
    texts = list(group_of(svg_of(ONE_FOLD, title=title), "header").iter(f"{SVG}text"))
    page_mm = 237 * 1.14
    found = [(str(text.text), 100 * float(text.get("font-size", "0")) / page_mm) for text in texts]
    return found[: [text for text, _ in found].index(FERNHOLLOW.title)]


def test_a_title_that_is_a_little_long_is_written_smaller() -> None:
    [(text, size)] = header_lines("The Ballad of the Miller and his Sons")

    assert text == "The Ballad of the Miller and his Sons"
    assert 3.0 <= size < TITLE_SIZE


def test_a_longer_title_takes_two_lines_and_a_very_long_one_is_cut() -> None:
    title = "The Ballad of the Miller and his Seven Sons who went Over the Hill in the Rain"

    two, cut = header_lines(title), header_lines("W" * 80)

    assert " ".join(text for text, _ in two) == title
    assert len(two) == len(cut) == 2
    assert two[0][1] > cut[0][1] == pytest.approx(3.0, abs=0.001)  # no smaller than it must be
    assert cut[0][0] == "W" * len(cut[0][0])
    assert cut[1][0].endswith("W…")


@pytest.mark.parametrize("title", ["W" * 80, "m" * 80, "W" * 20, "Mm Ww " * 5, "n" * 40, "OQOQ" * 7, "音" * 50])
def test_no_title_runs_off_the_page(title: str) -> None:
    svg = svg_of(ONE_FOLD, title=title, findings=(without(THIN_WEB, message=title * 3, remedy=title),))

    png = bytes(resvg_py.svg_to_bytes(svg_string=svg.decode(), width=800, dpi=96))
    picture = np.asarray(on_white(png).convert("L"))
    assert picture[:, -8:].min() == 255


@pytest.mark.parametrize(
    ("disc", "there", "not_there"),
    [
        (THREE_FOLDS, "working edge with fold line", "hit"),
        (THREE_SLOTS, "working edge", "working edge with fold line"),
        (THREE_LANCES, "hit", "working edge with fold line"),
    ],
    ids=["fold", "slot", "lance"],
)
def test_the_legend_names_what_is_to_be_seen(disc: Disc, there: str, not_there: str) -> None:
    titles = [str(text.text) for text in group_of(svg_of(disc), "legend").iter(f"{SVG}text")]

    assert there in titles
    assert not_there not in titles
    assert "fold line" not in titles


def test_a_hit_is_a_dot_in_the_legend_as_on_the_disc() -> None:
    svg = svg_of(THREE_LANCES)

    [dot] = group_of(svg, "legend").iter(f"{SVG}circle")
    assert dot.get("fill") == group_of(svg, "hits").get("stroke")
