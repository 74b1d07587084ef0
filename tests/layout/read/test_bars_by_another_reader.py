"""Bars and beats held against pretty_midi 0.2.11's get_beats and get_downbeats, and against exact sums.

pretty_midi has one rule for beats in common with us: in any metre whose numerator is a multiple of 3
above 3, three notes of the denominator; and every time signature begins a bar. Where it differs, by its own
code, and what is therefore not compared or not generated here:

- Its beats end before the end of the last event it keeps; ours end with the bar past the last onset. Compared
  is what both have, which must be at least all up to the last onset.
- It places bars wrongly where the last metre begins past its last beat; here a note stands at or past it.
- It sums beats in doubles, so they are near ours, not equal.
- It takes time signatures from the first track only, and before the first of them counts quarter notes in
  that first metre's beat; here a time signature stands at tick 0, in the first track.
- It takes a beat within about 1e-5 of a time signature's moment for the same (numpy's isclose), so metres
  that change within a beat are compared only where the beat and the change are well apart.
- A tempo change exactly on a beat is met one beat late if rounding puts the beat before the change, which moves
  later beats; tolerance is 1e-6 s, far above rounding and below any tick here.
"""

import io
from collections.abc import Iterator
from fractions import Fraction
from itertools import pairwise

import mido
import numpy as np
import pretty_midi
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.read import Score, read_score

Change = tuple[int, int, int]  # tick, and numerator and denominator, or 0 and a tempo in microseconds

DIVISION = 480


def written(changes: list[Change], onsets: list[int], division: int = DIVISION) -> bytes:
    """A file written by mido: changes in the first track, notes of one tick in the second."""
    conductor, notes = mido.MidiTrack(), mido.MidiTrack()
    at = 0
    for tick, numerator, value in sorted(changes, key=lambda change: change[0]):
        if numerator:
            conductor.append(mido.MetaMessage("time_signature", numerator=numerator, denominator=value, time=tick - at))
        else:
            conductor.append(mido.MetaMessage("set_tempo", tempo=value, time=tick - at))
        at = tick
    at = 0
    for tick in onsets:
        notes.append(mido.Message("note_on", note=60, velocity=64, time=tick - at))
        notes.append(mido.Message("note_off", note=60, time=1))
        at = tick + 1
    file = mido.MidiFile(type=1, ticks_per_beat=division, tracks=[conductor, notes])
    out = io.BytesIO()
    file.save(file=out)
    return out.getvalue()


def assert_as_pretty_midi(tune: bytes) -> Score:
    score, other = read_score(tune), pretty_midi.PrettyMIDI(io.BytesIO(tune))

    for ours, theirs in ((score.beat_s, other.get_beats()), (score.bar_s, other.get_downbeats())):
        common = min(len(ours), len(theirs))
        np.testing.assert_allclose(ours[:common], theirs[:common], rtol=0, atol=1e-6)
        # Both have all that the music reaches.
        assert common >= np.count_nonzero(ours <= score.onset_s.max())
    return score


@pytest.mark.parametrize(
    "changes",
    [
        [(0, 4, 4)],
        [(0, 3, 4), (0, 0, 600_000), (1000, 0, 400_000), (3333, 0, 1_000_000)],
        [(0, 6, 8), (2880, 9, 8), (2880 + 2160, 12, 8)],
        [(0, 4, 4), (1920, 3, 4), (1920 + 1440, 5, 8), (1920 + 1440 + 1200, 2, 2)],
        [(0, 4, 4), (700, 3, 4), (2500, 6, 8)],  # inside bars and inside beats
        [(0, 4, 4), (0, 0, 500_000), (960, 0, 300_000), (1920, 6, 8), (2100, 0, 700_000), (3360, 2, 4)],
    ],
    ids=["plain", "tempi", "compound", "metres", "inside bars", "both"],
)
def test_bars_and_beats_are_those_of_another_reader(changes: list[Change]) -> None:
    score = assert_as_pretty_midi(written(changes, [0, 1000, 9000]))

    assert len(score.bar_s) > 3


METRES = st.sampled_from([(2, 4), (3, 4), (4, 4), (5, 4), (6, 8), (9, 8), (12, 8), (3, 8), (7, 8), (2, 2), (6, 4)])


@st.composite
def tempo_and_metre_maps(draw: st.DrawFn) -> list[Change]:
    """Metres that change at bar lines, and tempi anywhere."""
    tick, changes = 0, []
    for numerator, denominator in draw(st.lists(METRES, min_size=1, max_size=5)):
        changes.append((tick, numerator, denominator))
        tick += draw(st.integers(1, 4)) * 4 * DIVISION * numerator // denominator
    tempi = draw(st.lists(st.tuples(st.integers(0, 20_000), st.integers(200_000, 1_200_000)), max_size=6))
    return changes + [(at, 0, tempo_us) for at, tempo_us in tempi]


@given(tempo_and_metre_maps(), st.integers(0, 20_000))
def test_another_reader_agrees_on_random_tempi_and_metres(changes: list[Change], more_ticks: int) -> None:
    last_metre_tick = max(tick for tick, numerator, _ in changes if numerator)

    assert_as_pretty_midi(written(changes, [last_metre_tick + more_ticks]))


def exact_s(tick: Fraction, changes: list[Change], division: int) -> Fraction:
    """The time of a place in ticks, by walking the tempi one by one in fractions."""
    tempi = {0: 500_000, **{at: value for at, numerator, value in changes if not numerator}}
    begins = [*sorted(tempi), None]
    total = Fraction(0)
    for begin, end in pairwise(begins):
        assert begin is not None
        upto = tick if end is None else min(tick, Fraction(end))
        if upto > begin:
            total += (upto - begin) * tempi[begin] / division
    return total / 1_000_000


def marks(changes: list[Change], last_tick: int, division: int) -> Iterator[tuple[Fraction, bool]]:
    """Every beat and whether it begins a bar, by stepping from one to the next."""
    metres = {0: (4, 4), **{at: (numerator, value) for at, numerator, value in changes if numerator}}
    place, number = Fraction(0), 0
    bar_at = 0
    while True:
        yield place, number == 0
        if number == 0 and place > last_tick:
            return
        numerator, denominator = metres[bar_at]
        parts = 3 if numerator > 3 and numerator % 3 == 0 else 1
        place += Fraction(4 * division * parts, denominator)
        number = (number + 1) % (numerator // parts)
        following = [at for at in metres if bar_at < at <= place]
        if following:
            place, number, bar_at = Fraction(min(following)), 0, min(following)


ANY_METRE = st.tuples(st.integers(0, 200), st.integers(1, 13), st.sampled_from([1, 2, 4, 8, 16, 32, 64, 128]))
ANY_TEMPO = st.tuples(st.integers(0, 200), st.just(0), st.integers(1, 0xFFFFFF))


@given(
    st.lists(ANY_METRE, max_size=5, unique_by=lambda change: change[0]),
    st.lists(ANY_TEMPO, max_size=5, unique_by=lambda change: change[0]),
    st.lists(st.integers(0, 80), min_size=1, max_size=3),
    st.sampled_from([4, 7, 96, 480]),
)
def test_every_bar_and_beat_is_the_double_nearest_to_the_exact_moment(
    metres: list[Change], tempi: list[Change], gaps: list[int], division: int
) -> None:
    onsets = [sum(gaps[: place + 1]) + 2 * place for place in range(len(gaps))]

    score = read_score(written(metres + tempi, onsets, division))

    stepped = [(float(exact_s(place, tempi, division)), first) for place, first in marks(metres, onsets[-1], division)]
    assert score.beat_s.tolist() == [second for second, _ in stepped]
    assert score.bar_s.tolist() == [second for second, first in stepped if first]
    assert score.bar_s[-1] > score.onset_s.max() >= score.bar_s[:-1].max(initial=0.0)
