"""Every tooth's voice, found again in the WAV by estimators that know nothing of how it was made."""

import math

import numpy as np
import pytest

from layout.documents import Movement
from layout.hear.body import body_taps
from layout.hear.defaults import DEFAULTS, defaults_told
from tests.layout.examples import SHIPPED
from tests.layout.hear.sounds import (
    MUSIC_BEGINS_S,
    RATE_HZ,
    heard,
    hearing_of,
    levels_over_time,
    peak_hz,
    quick_with,
    samples_of,
    with_one_tooth,
)

BEGIN = int(MUSIC_BEGINS_S * RATE_HZ)
C5_HZ = 440 * 2 ** (3 / 12)  # C5 is three semitones above A4


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_every_tooth_of_a_shipped_movement_sounds_within_a_cent_of_its_pitch(movement: Movement) -> None:
    semitones = {"C": -9, "D": -7, "E": -5, "F": -4, "G": -2, "A": 0, "B": 2, "#": 1, "b": -1}
    off_cents = {}
    for tooth in movement.teeth:
        steps = sum(semitones[sign] for sign in tooth.pitch[:-1]) + 12 * (int(tooth.pitch[-1]) - 4)
        wanted_hz = 440 * 2 ** (steps / 12 + tooth.cents / 1200)
        alone = with_one_tooth(movement, tooth.tooth)
        begin = int(alone.before_music_deg / 360 * 6 * RATE_HZ)
        found_hz = peak_hz(heard(alone, [(tooth.track, 0.0)])[begin : begin + RATE_HZ], wanted_hz, wanted_hz / 12)
        off_cents[tooth.tooth] = 1200 * math.log2(found_hz / wanted_hz)

    assert len(off_cents) == len(movement.teeth)
    assert max(map(abs, off_cents.values())) < 1.0


@pytest.mark.parametrize(("partial", "ratio"), [(2, 6.267), (3, 17.547)])
def test_partials_stand_where_those_of_a_clamped_bar_do(partial: int, ratio: float) -> None:
    # Published ratios of the clamped-free bar: 6.267 and 17.547 (textbooks of acoustics; squares of its roots).
    samples = heard(quick_with({"tooth_quality": 3000}), [(1, 0.0)])[BEGIN : BEGIN + RATE_HZ // 2]
    first_hz = peak_hz(samples, C5_HZ, 20)

    found_hz = peak_hz(samples, ratio * C5_HZ, 60)

    assert found_hz / first_hz == pytest.approx(ratio, abs=0.001)


def test_a_mass_at_the_tip_leaves_the_pitch_and_moves_the_second_partial() -> None:
    # µ 1: roots 1.247917 and 4.031139 (1 + cosh x cos x + x (cos x sinh x − sin x cosh x) = 0); squares 10.4349 apart.
    movement = quick_with({"tooth_quality": 3000, "teeth/0/end_mass_ratio": 1.0})
    samples = heard(movement, [(1, 0.0)])[BEGIN : BEGIN + RATE_HZ // 2]

    assert peak_hz(samples, C5_HZ, 20) == pytest.approx(C5_HZ, rel=2e-4)
    assert peak_hz(samples, 10.435 * C5_HZ, 100) / C5_HZ == pytest.approx((4.031139 / 1.247917) ** 2, abs=0.003)


@pytest.mark.parametrize(("quality", "partial"), [(2000, 1), (2000, 2), (700, 1)])
def test_a_partial_decays_as_its_quality_says(quality: float, partial: int) -> None:
    # τ = Q/(π·f): 1.217 s at 523.25 Hz and Q 2000, 0.194 s at 3279.2 Hz, 0.426 s at Q 700.
    frequency_hz = C5_HZ * (1.0, 6.26689)[partial - 1]
    samples = heard(quick_with({"tooth_quality": quality}), [(1, 0.0)])[BEGIN + 1024 : BEGIN + 24_000]

    levels = levels_over_time(samples, frequency_hz)
    slope = np.polyfit(np.arange(len(levels)) * 1024 / RATE_HZ, np.log(levels), 1)[0]

    assert -1 / slope == pytest.approx(quality / (math.pi * frequency_hz), rel=0.01)


def test_a_tooth_s_own_quality_wins_over_the_movement_s_and_that_over_the_default() -> None:
    def quality(changes: dict[str, float]) -> float:
        [voice] = hearing_of(quick_with(changes), [(1, 0.0)]).voices
        return float(math.pi * voice.frequency_hz[0] * voice.decay_s[0])

    assert quality({}) == pytest.approx(DEFAULTS.quality_factor)
    assert quality({"tooth_quality": 900}) == pytest.approx(900)
    assert quality({"tooth_quality": 900, "teeth/0/quality": 300}) == pytest.approx(300)


def test_partials_are_as_loud_as_the_speed_of_the_tip() -> None:
    # Displacements fall as 1/x⁴ and frequencies rise as x²: speeds as 1/6.26689 and 1/17.54748.
    [voice] = hearing_of(quick_with({}), [(1, 0.0)]).voices

    assert voice.level_ratio[:3] / voice.level_ratio[0] == pytest.approx([1, 1 / 6.26689, 1 / 17.54748], rel=1e-5)


def test_a_tooth_lifted_twice_as_far_is_twice_as_loud_and_a_stiffer_one_by_the_root() -> None:
    lifts = {"teeth/0/lift_mm": 0.8, "teeth/1/lift_mm": 0.4, "teeth/1/stiffness_n_per_mm": 4.0}
    voices = hearing_of(quick_with(lifts), [(1, 0.0), (2, 0.5), (3, 1.0)]).voices

    # The third states neither: 0.4 mm and 1 N/mm.
    assert [voice.level_ratio[0] / voices[2].level_ratio[0] for voice in voices] == pytest.approx([2, 2, 1])


def test_two_teeth_of_a_track_beat_as_often_as_their_cents_say() -> None:
    # 30 cents at C5: 523.25·(2^(30/1200) − 1) = 9.146 beats a second.
    second = {"tooth": 4, "track": 1, "pitch": "C5", "cents": 30}
    teeth = [*quick_with({}).model_dump(mode="json", exclude_none=True)["teeth"], second]
    movement = quick_with({"tooth_quality": 20_000, "teeth": teeth})
    samples = heard(movement, [(1, 0.0)])[BEGIN : BEGIN + 2 * RATE_HZ]

    levels = levels_over_time(samples, C5_HZ * 2 ** (15 / 1200), step=128)
    rectified = levels - np.polyval(np.polyfit(np.arange(len(levels)), levels, 2), np.arange(len(levels)))
    spectrum = np.abs(np.fft.rfft(rectified * np.hanning(len(rectified)), 2**16))
    rates_hz = np.fft.rfftfreq(2**16, 128 / RATE_HZ)

    assert rates_hz[3 + int(np.argmax(spectrum[3:]))] == pytest.approx(9.146, abs=0.05)


def test_a_tooth_that_is_not_usable_is_not_heard() -> None:
    assert not heard(quick_with({"teeth/0/usable": False}), [(1, 0.0)]).any()


def test_a_tooth_above_hearing_is_silent() -> None:
    # G9 is 12,544 Hz; 1200 cents above it 25,088 Hz, past half the sample rate.
    movement = quick_with({"teeth/0/pitch": "G9", "teeth/0/cents": 1200})

    assert not heard(movement, [(1, 0.0)]).any()


def test_the_case_adds_a_little_and_moves_nothing() -> None:
    taps = body_taps(RATE_HZ)

    response_db = 20 * np.log10(np.abs(np.fft.rfft(taps, 2**16)))

    assert taps[0] == 1
    assert 0.3 < np.abs(response_db).max() < 1.5


def test_every_default_tells_its_unit_and_what_it_rests_on() -> None:
    told = {default.name: default for default in defaults_told()}

    assert told["quality_factor"].value == 700.0
    assert "from memory" in told["quality_factor"].rests_on
    assert all(default.rests_on for default in told.values())


def test_the_first_sample_of_a_pluck_is_that_of_its_release() -> None:
    samples = samples_of(hearing_of(quick_with({}), [(1, 0.25)]))

    # A sine begins at nothing: the sample at the release is 0, the next is not.
    assert np.flatnonzero(samples)[0] == BEGIN + RATE_HZ // 4 + 1
