"""The whole way of a shop: a tune is laid out, its disc laid on sheets, and each disc cut out of them plays."""

import io
import json
from pathlib import Path

import ezdxf
import numpy as np
import pytest
from ezdxf.entities.circle import Circle
from ezdxf.math import Vec3

from layout import walk
from layout.check.finding import stands
from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.sheet_walk import plan_sheets, sheet_files_of
from service.demo.compose import demo_tune
from tests.layout.sheets.jobs import job_of, sheet
from tests.outside.gdal_drawing import layers_of, plucks_from_cut_geometry

MOVEMENT, CUTTER = shipped_movement("fernhollow-31"), shipped_cutter("fibre-laser")
NOT_CUT = ("STOCK", "CLAMPS")


def cut_out(sheet_dxf: bytes, x_mm: float, y_mm: float, reach_mm: float) -> bytes:
    """What lies within reach of a place on a sheet, moved back to the origin by ezdxf alone."""
    document = ezdxf.read(io.StringIO(sheet_dxf.decode("ascii")))
    space = document.modelspace()
    for entity in list(space):
        at = entity.dxf.center if isinstance(entity, Circle) else Vec3(entity[0][:2])
        if entity.dxf.layer in NOT_CUT or np.hypot(at.x - x_mm, at.y - y_mm) > reach_mm:
            space.delete_entity(entity)
        else:
            entity.translate(-x_mm, -y_mm, 0)
    stream = io.StringIO()
    document.write(stream)
    return stream.getvalue().encode("utf-8")


def test_every_disc_cut_out_of_its_sheet_plays_the_tune_and_is_good_to_cut(tmp_path: Path) -> None:
    laid_out = walk.lay_out(demo_tune(), MOVEMENT, CUTTER, read_settings('{"speed": {"mode": "fit"}}'))
    assert laid_out.good_to_cut
    rim_mm = MOVEMENT.disc.outer_diameter_mm
    job = job_of([sheet(500, 250, quantity=2)], [(rim_mm, 3)], gap_mm=3, margin_mm=5)

    files = sheet_files_of(plan_sheets(job, {"d1": walk.files_of(laid_out)["disc.dxf"]}))

    promised = sorted(zip((laid_out.plucks.track_index + 1).tolist(), laid_out.plucks.sounds_s.tolist(), strict=True))
    discs = [
        cut_out(files[on["drawing"]], disc["x_mm"], disc["y_mm"], rim_mm / 2 + 1)
        for on in json.loads(files["sheets.json"])["sheets"]
        for disc in on["discs"]
    ]
    assert len(discs) == 3
    for dxf in discs:
        checked = walk.check_drawing(dxf, MOVEMENT, CUTTER)
        assert not stands(checked.findings)
        assert len(checked.plucks.sounds_s) == len(promised) > 300
        by_gdal = sorted(plucks_from_cut_geometry(layers_of(dxf, tmp_path), MOVEMENT, CUTTER))
        assert [track for track, _ in by_gdal] == [track for track, _ in promised]
        for (_, read_s), (_, promised_s) in zip(by_gdal, promised, strict=True):
            assert read_s == pytest.approx(promised_s, abs=0.001)
