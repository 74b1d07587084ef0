"""A tune is laid out to the same bytes on processors with fewer instructions, by other code of the libraries below.

numpy, OpenBLAS and the C library each choose their code by what the processor can do, and it rounds the last bit
apart. Each can be told to take the code of an older one, so what another machine would do is tried on this one. On a
processor that is old itself less is tried.
"""

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from tests.layout.sums_of_files import CUTTER_IDS, sums_of_files

TOP = Path(__file__).parents[2]
CHOSEN: list[str] = np.show_config(mode="dicts")["SIMD Extensions"].get("found", [])  # sets of instructions numpy uses
WIDEST = [name for name in CHOSEN if "512" in name or name == "X86_V4"]
ELSEWHERE = {
    "a processor without AVX-512": {
        "OPENBLAS_CORETYPE": "Haswell",
        "NPY_DISABLE_CPU_FEATURES": " ".join(WIDEST),
        "GLIBC_TUNABLES": "glibc.cpu.hwcaps=-AVX512F",
    },
    "a processor without AVX, which multiplies and adds in two steps": {
        "OPENBLAS_CORETYPE": "Prescott",
        "NPY_DISABLE_CPU_FEATURES": " ".join(CHOSEN),
        "GLIBC_TUNABLES": "glibc.cpu.hwcaps=-AVX,-AVX2,-FMA,-FMA4,-AVX512F",
    },
}


# Arcsines of numpy's own, sines of the C library's, products of OpenBLAS's.
ROUNDED_APART = """
import hashlib, math, sys
import numpy as np

sines = np.linspace(-1, 1, 100_001)
square = sines[:90_000].reshape(300, 300)
for values in (np.arcsin(sines), np.array([math.sin(6 * sine) for sine in sines.tolist()]), square @ square.T):
    print(hashlib.sha256(values.tobytes()).hexdigest())
"""


def said_in(environment: dict[str, str], *program: str) -> str:
    """What a program says on standard output, in a process with these variables set."""
    ran = subprocess.run(
        [sys.executable, "-W", "ignore", *program],
        cwd=TOP,
        env=os.environ | environment,
        capture_output=True,
        check=True,
        text=True,
    )
    return ran.stdout


@pytest.fixture(scope="module")
def sums_here() -> dict[str, str]:
    return sums_of_files()


@pytest.mark.parametrize("environment", ELSEWHERE.values(), ids=ELSEWHERE)
def test_every_file_of_a_layout_is_the_same_on_another_processor(
    sums_here: dict[str, str], environment: dict[str, str]
) -> None:
    sums_there = json.loads(said_in(environment, "-m", "tests.layout.sums_of_files"))

    assert sums_there == sums_here
    assert len(sums_here) == 8 + 9  # by laser, and by press with its program
    assert {name.split(":")[0] for name in sums_here} == set(CUTTER_IDS)


@pytest.mark.skipif(not WIDEST, reason="a processor without AVX-512 has less to leave out")
def test_what_is_tried_here_does_round_apart() -> None:
    here = said_in({}, "-c", ROUNDED_APART).split()
    there = said_in(ELSEWHERE["a processor without AVX, which multiplies and adds in two steps"], "-c", ROUNDED_APART)

    assert len(here) == 3
    assert not set(here) & set(there.split())
