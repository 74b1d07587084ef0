"""What the file says as a whole: a record is no cutting file, and a mark in the head is believed."""

import io

import ezdxf
import numpy as np
import pytest

from layout.check.finding import Code, Level
from layout.cut import plan_cuts
from layout.documents import Cutter
from layout.read_back import Reading, read_back
from layout.write import write_dxf
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with
from tests.layout.read_back.drawings import bytes_of, document_of, random_disc

RENAMED = cutter_with({"layers": {"TRACKS": {"name": "0", "colour": 9}, "FOLDS": {"name": "RIM-2", "colour": 2}}})


def written(cutter: Cutter = LASER, *, not_good: str | None = None) -> bytes:
    disc = random_disc(SHIPPED[0], cutter)
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=not_good)
    return write_dxf(plan.disc, cutter)


def read(dxf: bytes, cutter: Cutter = LASER) -> Reading:
    return read_back(dxf, SHIPPED[0], cutter)


@pytest.mark.parametrize(
    ("cutter", "held"),
    # Fernhollow has 31 tracks; a lanced projection has no fold line.
    [
        (LASER, "TRACKS (31), FOLDS (40), AFTER_FORMING (40)"),
        (PRESS, "TRACKS (31), AFTER_FORMING (40)"),
        (RENAMED, "0 (31), RIM-2 (40), AFTER_FORMING (40)"),
    ],
    ids=["laser", "press", "renamed layers"],
)
def test_a_record_reads_like_its_disc_and_is_never_good_to_cut(cutter: Cutter, held: str) -> None:
    disc = random_disc(SHIPPED[0], cutter)
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)

    reading = read_back(bytes_of(document_of(plan.record, cutter)), SHIPPED[0], cutter)

    [finding] = reading.findings
    assert finding.code is Code.NOT_A_CUTTING_FILE
    assert finding.level is Level.ERROR
    assert finding.message == f"the drawing is a record, for reading, never for cutting: it has entities on {held}"
    assert finding.remedy == "cut from disc.dxf, which holds only what is cut or marked"
    assert np.sort(reading.disc.edge_angle_rad) == pytest.approx(np.sort(disc.edge_angle_rad), abs=1e-9)


def test_a_cutting_file_with_one_track_left_in_it_is_no_cutting_file() -> None:
    document = ezdxf.read(io.StringIO(written().decode()))
    document.modelspace().add_circle((0, 0), 50, dxfattribs={"layer": "tracks"})

    assert [finding.code for finding in read(bytes_of(document)).findings] == [Code.NOT_A_CUTTING_FILE]


def test_layers_of_a_record_that_hold_nothing_do_no_harm() -> None:
    document = ezdxf.read(io.StringIO(written().decode()))
    document.layers.add("TRACKS")

    assert read(bytes_of(document)).findings == ()


LONG_REASON = (
    "trial piece for the new comb, " + "cut once more with the bass notes left out, " * 3 + "see the order book"
)


@pytest.mark.parametrize(
    "reason", ["a trial piece", "9", LONG_REASON, "x" * 170, "x" * 183], ids=["short", "digit", "long", "word", "full"]
)
@pytest.mark.parametrize("line_end", [b"\n", b"\r\n"], ids=["unix", "windows"])
def test_a_file_marked_not_good_is_an_error_with_its_reason(reason: str, line_end: bytes) -> None:
    dxf = written(not_good=reason).replace(b"\n", line_end)

    [finding] = read(dxf).findings

    assert finding.code is Code.MARKED_NOT_GOOD
    assert finding.level is Level.ERROR
    assert finding.message == f"the file itself says NOT GOOD TO CUT: {reason}"
    assert "notes left out" in finding.remedy


def test_a_reason_that_fills_two_lines_of_the_head_is_read_whole() -> None:
    reason = f"{LONG_REASON} {'and so on ' * 3}".strip()
    dxf = written(not_good=reason)
    assert dxf.count(b"999\n") == written(not_good="short").count(b"999\n") + 1  # broken at 200 characters

    [finding] = read(dxf).findings

    assert finding.message == f"the file itself says NOT GOOD TO CUT: {reason}"


@pytest.mark.parametrize(
    ("comment", "said"),
    [
        (b"not good to cut", "no reason stands there"),
        (b"NOT GOOD TO CUT:  ", "no reason stands there"),
        (b"Please note: Not Good To Cut: \xff\x1b[31m old", "??[31m old"),
        ("NOT GOOD TO CUT: für Müller".encode(), "für Müller"),
        (b"NOT GOOD TO CUT: " + b"y" * 500, "y" * 250),
    ],
)
def test_a_mark_by_another_hand_is_read_too(comment: bytes, said: str) -> None:
    [finding] = read(b"999\nanother program\n999\n" + comment + b"\n999\nend\n" + written()).findings

    assert finding.message.replace("\N{REPLACEMENT CHARACTER}", "?") == f"the file itself says NOT GOOD TO CUT: {said}"


def test_words_behind_the_head_are_no_mark() -> None:
    document = ezdxf.read(io.StringIO(written().decode()))
    document.modelspace().add_text("NOT GOOD TO CUT", dxfattribs={"layer": "MARKS"})

    assert read(bytes_of(document)).findings == ()
