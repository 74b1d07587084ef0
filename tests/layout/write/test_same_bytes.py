"""The same inputs give the same bytes: on a second call, in another process, with other CPU features."""

import hashlib
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

TOP = Path(__file__).parents[3]
NAMES = ("disc.dxf", "record.dxf", "disc.svg", "hits.csv", "layout.json", "report.json")
PROGRAM = """
import hashlib, importlib.util, json, sys
from layout.cut import plan_cuts
from layout.write import write_dxf, write_hits, write_layout_json, write_report, write_svg

spec = importlib.util.spec_from_file_location("examples", sys.argv[1])
examples = importlib.util.module_from_spec(spec)
spec.loader.exec_module(examples)
for movement, cutter in ((examples.FERNHOLLOW, examples.LASER), (examples.MOSSBROOK, examples.PRESS)):
    disc = examples.full_disc(movement, cutter)
    plan = plan_cuts(disc, title="Same", fingerprint=examples.FINGERPRINT, not_good="trial")
    findings = (examples.THIN_WEB, examples.NEAR_LIMIT, examples.EARLY_DAMPER)
    laid_out = examples.laid_out_of(disc, title="Same", findings=findings)
    files = (
        write_dxf(plan.disc, cutter),
        write_dxf(plan.record, cutter),
        write_svg(plan, laid_out),
        write_hits(plan, disc),
        write_layout_json(laid_out, despite_findings=plan.not_good),
        write_report(laid_out),
    )
    print(json.dumps([hashlib.sha256(file).hexdigest() for file in files]))
"""


def sums_of_a_process(**environment: str) -> list[dict[str, str]]:
    """SHA-256 of every file of two dense discs, one made by laser, one by press, from a process of its own."""
    ran = subprocess.run(
        [sys.executable, "-W", "ignore", "-c", PROGRAM, str(Path(__file__).with_name("examples.py"))],
        env=os.environ | {"PYTHONPATH": str(TOP)} | environment,
        capture_output=True,
        check=True,
        text=True,
    )
    return [dict(zip(NAMES, json.loads(line), strict=True)) for line in ran.stdout.splitlines()]


@pytest.fixture(scope="module")
def first_sums() -> list[dict[str, str]]:
    return sums_of_a_process(PYTHONHASHSEED="1")


def test_another_process_with_another_hash_seed_and_time_zone_writes_the_same_bytes(
    first_sums: list[dict[str, str]],
) -> None:
    second_sums = sums_of_a_process(PYTHONHASHSEED="4", TZ="Pacific/Auckland", LC_ALL="C")

    assert second_sums == first_sums
    assert len(first_sums) == 2
    assert hashlib.sha256(b"").hexdigest() not in first_sums[0].values()


def test_a_cpu_that_rounds_the_last_bit_apart_draws_the_same_bytes(first_sums: list[dict[str, str]]) -> None:
    # With AVX-512 numpy takes other code for arcsin and arctan2; without it, the system's mathematics
    # library. On a machine without AVX-512 both runs are the same and this shows nothing.
    second_sums = sums_of_a_process(PYTHONHASHSEED="1", NPY_DISABLE_CPU_FEATURES="X86_V4")

    drawn = [name for name in NAMES if name != "layout.json"]  # whose numbers are promised unrounded
    assert [[sums[name] for name in drawn] for sums in second_sums] == [
        [sums[name] for name in drawn] for sums in first_sums
    ]
