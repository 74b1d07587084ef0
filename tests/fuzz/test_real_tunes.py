"""Real music damaged: a few hundred inputs of two pieces; `python -m tests.fuzz.real_tunes` tries 20,000 of all."""

import pytest

from service.demo.compose import demo_tune
from tests.fuzz.mutated_tunes import CHANGES
from tests.fuzz.real_tunes import input_of, tally_of
from tests.outside.pieces import public_domain_piece

SEED, COUNT = 20, 500


@pytest.fixture(scope="module")
def pieces() -> tuple[bytes, ...]:
    return demo_tune(), public_domain_piece("acacia reel")


def test_damaged_music_is_read_or_refused_within_its_time_and_memory(pieces: tuple[bytes, ...]) -> None:
    tally = tally_of(pieces, SEED, range(COUNT))

    assert tally.faults == {}
    assert tally.counts.total() - tally.counts["laid out"] == COUNT
    assert min(tally.counts["read"], tally.counts["refused"]) > COUNT / 5, "the changes are too mild or too wild"
    assert tally.counts["laid out"] > 2


def test_a_seed_and_a_number_name_an_input(pieces: tuple[bytes, ...]) -> None:
    assert input_of(pieces, 1, 17) == input_of(pieces, 1, 17)
    assert len({input_of(pieces, 1, number) for number in range(40)}) > 35
    assert len(CHANGES) == len(set(CHANGES))
