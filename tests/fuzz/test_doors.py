"""Every door on what is kept of long runs, and on a few changed inputs; `sh tests/run fuzz` tries more."""

import base64
import random
import subprocess
import sys
import time
from pathlib import Path

import pytest

from layout.errors import DocumentError, LayoutError, MidiReadError
from tests.fuzz import drawing_door
from tests.fuzz.again import judged_again
from tests.fuzz.door import LARGE, MOST_CPU_S, SLOW, Door, fault_of
from tests.fuzz.doors import DOORS
from tests.fuzz.mutated_tunes import mutated_tune
from tests.thorough import THOROUGH

KEPT = Path(__file__).parent / "kept"
TRIED = {"tune": 1500, "drawing": 40, "movement": 40, "cutter": 40, "settings": 60}  # a second or two each
MORE = 20 if THOROUGH else 1


def kept_of(name: str) -> list[bytes]:
    """What is kept of a door's long runs, one input a line in base64; words after a # say what it once did."""
    lines = (KEPT / f"{name}.txt").read_text().splitlines()
    return [base64.b64decode(line.partition("#")[0], validate=False) for line in lines]


@pytest.mark.parametrize("door", DOORS.values(), ids=DOORS)
def test_what_is_kept_of_long_runs_is_answered(door: Door) -> None:
    """Every fault that was found, and of all that was answered well the shortest input for each answer."""
    kept = kept_of(door.name)

    faults = {number: fault for number, data in enumerate(kept, start=1) if (fault := fault_of(door, data))}

    assert faults == {}
    assert len(set(kept)) == len(kept) > 10


@pytest.mark.parametrize("door", DOORS.values(), ids=DOORS)
def test_the_seeds_of_a_door_are_good_inputs(door: Door) -> None:
    for seed in door.seeds:
        door.answer(seed)  # raises nothing


@pytest.mark.parametrize("door", DOORS.values(), ids=DOORS)
def test_changed_inputs_are_answered(door: Door) -> None:
    answered = 0
    for number in range(TRIED[door.name] * MORE):
        dice = random.Random(number)
        data = door.mutate(dice.choice(door.seeds), dice)

        fault = fault_of(door, data)

        assert fault is None, f"input {number} of door {door.name}: {fault}"
        answered += not _is_refused(door, data) if number < 20 else 0
    assert answered, "every input was refused: the changes reach nothing behind the reader"


def test_the_drawings_to_begin_with_are_read_to_their_last_cut() -> None:
    checked = [drawing_door.answer(seed) for seed in drawing_door.SEEDS]

    # of three drawings for a machine the third is a record
    assert [one.good_to_cut for one in checked] == [True, True, False] * len(drawing_door.MACHINES)
    assert {one.disc.projection_count for one in checked} == {3}


def _is_refused(door: Door, data: bytes) -> bool:
    try:
        door.answer(data)
    except LayoutError:
        return True
    return False


def _raising(error: Exception) -> Door:
    def answer(_: bytes) -> object:
        raise error

    return Door(name="x", suffix="", seeds=(), answer=answer, mutate=mutated_tune, errors=(DocumentError,))


def test_an_error_that_is_none_of_the_doors_is_a_fault() -> None:
    wrong_door = MidiReadError(byte_offset=0, found="a", expected="b", remedy="c")

    assert [getattr(fault_of(_raising(error), b""), "kind", None) for error in (ValueError(), wrong_door)] == [
        "ValueError-outside",
        "MidiReadError-outside",
    ]


def test_an_error_that_says_nothing_is_a_fault_and_one_that_speaks_is_none() -> None:
    silent = DocumentError(document="", problems=())
    silent.args = ("",)

    assert getattr(fault_of(_raising(silent), b""), "kind", None) == "error-without-words"
    assert fault_of(_raising(DocumentError(document="cutter", problems=())), b"") is None


def test_an_answer_that_takes_too_long_or_too_much_is_a_fault() -> None:
    def long(_: bytes) -> None:
        begun_s = time.process_time()
        while time.process_time() < begun_s + MOST_CPU_S + 0.05:
            pass

    def large(_: bytes) -> None:
        bytearray(b"x") * 400_000_000

    doors = [
        Door(name="x", suffix="", seeds=(), answer=answer, mutate=mutated_tune, errors=()) for answer in (long, large)
    ]

    assert [getattr(fault_of(door, b""), "kind", None) for door in doors] == [SLOW, LARGE]


def test_an_input_is_judged_again_in_a_process_of_its_own_by_its_own_door() -> None:
    settings = DOORS["settings"].seeds[0]

    assert judged_again("settings", settings) is None
    assert getattr(judged_again("settings", settings, most_cpu_s=0.0), "kind", None) == SLOW
    with pytest.raises(subprocess.CalledProcessError):
        judged_again("no such door", settings)


def test_what_fuzzing_imports_first_leaves_the_doors_to_be_watched_by_atheris() -> None:
    program = (
        "import sys, tests.fuzz.again, tests.fuzz.door\n"
        "print([name for name in sys.modules if name.startswith('layout.') and name != 'layout.errors'])\n"
    )

    ended = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)

    assert ended.stdout == "[]\n"


@pytest.mark.parametrize("door", DOORS.values(), ids=DOORS)
def test_a_change_is_decided_by_its_die_alone(door: Door) -> None:
    once, again = ([door.mutate(seed, random.Random(7)) for seed in door.seeds] for _ in range(2))

    assert once == again
    assert list(door.seeds) != once
