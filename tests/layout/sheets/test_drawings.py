"""Which drawings a job takes: those whose rims, leads and heads fit it and each other."""

import math

import pytest
import shapely

from layout.errors import DocumentError
from layout.sheet_walk import plan_sheets
from tests.layout.examples import movement_with
from tests.layout.sheets.drawn import LED_IN, RIM_MM, disc_dxf, entities_of, job_for, laser, sheet_files
from tests.layout.sheets.jobs import discs_of_plan, faults_of, job_of, sheet

GOOD, WITH_LEADS = disc_dxf(), disc_dxf(LED_IN)
COMPENSATED = disc_dxf(laser(kerf_compensated=True))
OTHER = disc_dxf(movement=movement_with({"disc/thickness_mm": 0.6}))
FROM_BELOW = disc_dxf(laser(drawn_from="star-side"))
TWO_MAKES = job_of([sheet(530, 260)], [(RIM_MM, 1), (RIM_MM, 1)])


def test_a_drawing_for_no_disc_of_the_job_is_refused() -> None:
    message = "sheet job: /discs: a drawing is given for 'other', which is none of the job's discs; they are d1"

    with pytest.raises(DocumentError, match=message):
        plan_sheets(job_for(), {"other": GOOD})


@pytest.mark.parametrize(("diameter_mm", "fits"), [(240.01, True), (239.99, True), (240.011, False), (237, False)])
def test_the_rim_drawn_is_the_rim_asked_for(diameter_mm: float, *, fits: bool) -> None:
    job = job_of([sheet(300, 300)], [(diameter_mm, 1)])

    if fits:
        assert plan_sheets(job, {"d1": GOOD}).complete
        return
    message = (
        "/discs/0/diameter_mm: the rim in the drawing of d1 is 240.000 mm in diameter, the job says "
        f"{diameter_mm:g}; allowed are 0.01 mm between them: correct the job, or give the drawing of this disc"
    )
    with pytest.raises(DocumentError, match=message):
        plan_sheets(job, {"d1": GOOD})


@pytest.mark.parametrize(
    ("other", "says"),
    [
        (
            OTHER,
            "one says 'blank: cold-rolled steel, 0.5 mm thick', the other 'blank: cold-rolled steel, 0.6 mm thick'",
        ),
        (FROM_BELOW, "one says 'drawn from the label side', the other 'drawn from the star side'"),
        (COMPENSATED, "one says 'outlines are finished edges; kerf is not added', the other 'outlines are the beam's"),
    ],
    ids=["blank", "side", "kerf"],
)
def test_drawings_that_are_not_cut_alike_lie_on_no_sheet_together(other: bytes, says: str) -> None:
    with pytest.raises(DocumentError) as refusal:
        plan_sheets(TWO_MAKES, {"d1": GOOD, "d2": other})

    assert "/discs: the drawings of d1 and d2 cannot lie on one sheet: " in str(refusal.value)
    assert says.replace("'outlines are the beam's", "\"outlines are the beam's") in str(refusal.value)
    assert "make a job for each" in str(refusal.value)


def test_a_compensated_disc_lies_beside_no_plain_circle() -> None:
    # the beam's way round a rim of 240 mm is a kerf of 0.12 mm wider
    job = job_of([sheet(530, 260)], [(240.12, 1), (100, 1)])

    with pytest.raises(DocumentError, match="the drawing of d1 is compensated for the kerf, and d2 has no drawing and"):
        plan_sheets(job, {"d1": COMPENSATED})
    assert plan_sheets(job_of([sheet(530, 260)], [(240.12, 2)]), {"d1": COMPENSATED}).complete


@pytest.mark.parametrize(
    ("rules", "message"),
    [
        (
            {"gap_mm": 3.9},
            "/gap_mm: leads in the drawings reach 2.000 mm out of the rim, and a gap of 3.9 mm does not hold two; make "
            "it at least 4.000",
        ),
        (
            {"margin_mm": 1.9},
            "/margin_mm: leads in the drawings reach 2.000 mm out of the rim, and a margin of 1.9 mm does not hold "
            "one; make it at least 2.000",
        ),
        ({"stock": [{"width_mm": 300, "height_mm": 300, "margin_mm": 0}]}, "/stock/0/margin_mm: leads in the drawings"),
    ],
)
def test_leads_need_a_gap_for_two_and_a_margin_for_one(rules: dict[str, object], message: str) -> None:
    job = job_for(**rules)  # type: ignore[arg-type]  # fields of a job

    with pytest.raises(DocumentError, match=message):
        plan_sheets(job, {"d1": WITH_LEADS})
    assert plan_sheets(job, {"d1": GOOD}).sheets  # without leads the same job stands


def test_leads_keep_out_of_clamp_zones() -> None:
    clamp = {
        "x_mm": 250,
        "y_mm": 0,
        "width_mm": 10,
        "height_mm": 250,
    }  # right beside the only place, a lead's width off
    fits = job_for(1, stock=[{"width_mm": 260, "height_mm": 250, "clamps": [clamp]}])
    tight = job_for(1, stock=[{"width_mm": 260, "height_mm": 250, "clamps": [clamp | {"x_mm": 246}]}])

    assert plan_sheets(tight, {"d1": GOOD}).complete
    assert not plan_sheets(tight, {"d1": WITH_LEADS}).complete
    drawing = entities_of(sheet_files(fits, d1=WITH_LEADS)["sheet-1.dxf"])
    leads = [shapely.LineString([at[:2] for at in each[2]]) for each in drawing if each[0] == "LEADS"]
    assert len(leads) >= 3
    assert all(not lead.intersects(shapely.box(250, 0, 260, 250)) for lead in leads)


def test_a_drawing_that_cannot_be_read_is_told_with_its_disc() -> None:
    with pytest.raises(DocumentError, match=r"^drawing of d1: \(whole document\): the file is empty; give a DXF file$"):
        plan_sheets(job_for(), {"d1": b""})


def test_more_drawings_than_are_read_in_a_minute_are_refused() -> None:
    with pytest.raises(DocumentError, match=r"the drawings are 4\.5 MiB, 4 are allowed; make several jobs of it"):
        plan_sheets(job_for(), {"d1": b"0" * (9 * 2**19)})


def test_more_vertices_than_are_written_in_a_minute_are_refused() -> None:
    vertices = sum(len(places) for *_, places in entities_of(GOOD))
    most = math.floor(500_000 / vertices)

    assert most < 2000
    message = f"the drawings of all discs have {vertices * (most + 1)} vertices together, 500000 are allowed; make"
    with pytest.raises(DocumentError, match=message):
        plan_sheets(job_for(most + 1), {"d1": GOOD})


def test_a_job_with_other_drawings_has_another_fingerprint() -> None:
    plain, drawn, other = (
        plan_sheets(job_for(1), drawings).fingerprint
        for drawings in (None, {"d1": GOOD}, {"d1": disc_dxf(title="Autumn dance")})
    )

    assert len({plain, drawn, other}) == 3
    assert plan_sheets(job_for(1), {}).fingerprint == plain


@pytest.mark.parametrize("diameter_mm", [240, 240.009, 240.12, 240.111])
def test_a_compensated_disc_is_asked_for_as_finished_or_as_drawn_and_takes_up_what_is_cut(diameter_mm: float) -> None:
    # 240 mm finished, and half a kerf of 0.12 mm more on either side: two with a gap of 1 mm take up 481.24 mm
    rules = {"gap_mm": 1, "margin_mm": 0}
    fits, tight = (job_of([sheet(wide, 240.1201)], [(diameter_mm, 2)], **rules) for wide in (481.241, 481.239))

    plan = plan_sheets(fits, {"d1": COMPENSATED})

    assert plan.complete
    assert faults_of([(x, y, 120.06) for x, y, _ in discs_of_plan(plan, 1)], fits.stock[0], fits) == []
    assert [kind.missing_count for kind in plan_sheets(tight, {"d1": COMPENSATED}).kinds] == [1]


@pytest.mark.parametrize("diameter_mm", [239.98, 240.06, 240.14])
def test_a_compensated_rim_that_is_neither_is_told_with_both(diameter_mm: float) -> None:
    with pytest.raises(
        DocumentError, match=r"is 240\.120 mm in diameter \(compensated, 240\.000 nominal\), the job says"
    ):
        plan_sheets(job_of([sheet(300, 300)], [(diameter_mm, 1)]), {"d1": COMPENSATED})


def test_a_rim_a_little_larger_than_asked_for_takes_up_what_is_drawn() -> None:
    # 239.991 mm are asked for and 240 drawn, within the 0.01 mm allowed: what is cut needs 480 mm
    job = job_of([sheet(479.99, 240)], [(239.991, 2)])

    assert [kind.placed_count for kind in plan_sheets(job, {"d1": GOOD}).kinds] == [1]
    assert plan_sheets(job).complete
