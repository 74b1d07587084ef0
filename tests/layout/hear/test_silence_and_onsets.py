"""When teeth sound and when they are silent, found in the samples."""

import numpy as np
import pytest

from layout.documents import Movement
from layout.hear import Asked, hear
from layout.hear.body import body_taps
from layout.hear.defaults import DEFAULTS
from layout.mechanics.damping import damper_touch_s
from layout.mechanics.turning import turning_of
from tests.layout.examples import SHIPPED
from tests.layout.hear.sounds import (
    MUSIC_BEGINS_S,
    RATE_HZ,
    heard,
    hearing_of,
    levels_over_time,
    onsets_s,
    performance_of,
    quick_with,
    samples_of,
)

C5_HZ = 440 * 2 ** (3 / 12)
# Track 1 of the quick movement: 50 mm, 6 s a turn, 52.36 mm/s; its damper is touched over 1 mm, 19.1 ms.
SPEED_MM_PER_S = 2 * np.pi * 50 / 6


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_onsets_on_every_damped_track_are_heard_where_the_plucks_say(movement: Movement) -> None:
    # Without its drive the disc is at speed at once, so that the music begins when the rest sector has passed.
    at_speed = movement.model_copy(update={"drive": None, "tooth_quality": 20_000.0})
    begins_s = movement.before_music_deg / 360 * movement.revolution_s
    found = {}
    wanted = {}
    for track in (1, len(movement.tracks) // 2, len(movement.tracks)):
        moments = [0.0, 1.7, 3.1, 3.9]
        samples = heard(at_speed, [(track, moment) for moment in moments])
        found[track] = onsets_s(samples)
        wanted[track] = [begins_s + moment for moment in moments]

    assert {track: len(onsets) for track, onsets in found.items()} == {track: 4 for track in wanted}
    off_s = [abs(a - b) for track in wanted for a, b in zip(found[track], wanted[track], strict=True)]
    assert max(off_s) < 0.002


def test_a_damped_tooth_is_silent_from_the_touch_of_its_damper_to_the_pluck() -> None:
    movement = quick_with({"damper_arc_mm": 2.0, "tooth_quality": 20_000})
    samples = heard(movement, [(1, 0.0), (1, 1.0)])

    # 2 mm at 52.36 mm/s: 38.2 ms before the second pluck at 1.5 s the damper is touched; it takes 6 ms.
    assert float(damper_touch_s(movement, turning_of(movement))[0]) == pytest.approx(0.0382, abs=5e-5)
    touched = round((1.5 - 2.0 / SPEED_MM_PER_S) * RATE_HZ)
    silent = touched + round(DEFAULTS.damper_fade_s * RATE_HZ)
    assert np.abs(samples[touched - 100 : touched]).max() > 0.5
    assert not samples[silent : round(1.5 * RATE_HZ) + 1].any()


def test_an_undamped_tooth_rings_until_its_own_point_lifts_it() -> None:
    movement = quick_with({"teeth/0/damped": False, "teeth/0/lift_mm": 0.5, "tooth_quality": 20_000})
    samples = heard(movement, [(1, 0.0), (1, 1.0)])

    # Its damper arc of 1 mm does not count; 0.5 mm of lift at 52.36 mm/s are 9.55 ms; taken hold of, 2 ms.
    lifted = round((1.5 - 0.5 / SPEED_MM_PER_S) * RATE_HZ)
    assert np.abs(samples[lifted - 100 : lifted]).max() > 0.5
    assert not samples[lifted + round(0.002 * RATE_HZ) : round(1.5 * RATE_HZ) + 1].any()


def test_an_undamped_tooth_beside_a_damped_one_rings_on_past_its_neighbour_s_damper() -> None:
    teeth = [
        {"tooth": 1, "track": 1, "pitch": "C5"},
        {"tooth": 2, "track": 1, "pitch": "C5", "damped": False, "lift_mm": 0.1},
    ]
    [damped, undamped, *_] = hearing_of(quick_with({"teeth": teeth}), [(1, 0.0), (1, 1.0)]).rings

    # Damper 1 mm before the pluck at 1.5 s, 19.1 ms; lift 0.1 mm before it, but stilled in 2 ms by then.
    assert damped.held_s == pytest.approx(1.5 - 1.0 / SPEED_MM_PER_S)
    assert undamped.held_s == pytest.approx(1.5 - 0.002)


def test_an_undamped_tooth_of_unknown_lift_rings_until_the_pluck_itself() -> None:
    movement = quick_with({"teeth/0/damped": False, "tooth_quality": 20_000})
    samples = heard(movement, [(1, 0.0), (1, 1.0)])

    pluck = round(1.5 * RATE_HZ)
    assert np.abs(samples[pluck - 200 : pluck - 96]).max() > 0.5  # until 2 ms before it
    assert np.abs(samples[pluck - 4 : pluck + 1]).max() < 0.01


def test_an_undamped_tooth_rings_on_while_others_are_plucked() -> None:
    movement = quick_with({"teeth/0/damped": False, "tooth_quality": 20_000})
    samples = heard(movement, [(1, 0.0), (2, 1.0), (3, 2.0)])[int(MUSIC_BEGINS_S * RATE_HZ) + 2000 :][: 3 * RATE_HZ]

    levels = levels_over_time(samples, C5_HZ)

    # Q 20,000 at 523 Hz: 1/e in 12.17 s, so that after 2.9 s it still has 0.79 of its strength.
    assert levels[-1] / levels[0] == pytest.approx(np.exp(-(len(levels) - 1) * 1024 / RATE_HZ / 12.17), rel=0.02)


def test_a_tooth_plucked_again_before_it_was_free_rings_no_longer_than_it_takes_to_still_it() -> None:
    # 10 ms apart, and the damper is touched 19.1 ms before a pluck: it never came free.
    [first, _] = hearing_of(quick_with({"tooth_quality": 20_000}), [(1, 0.0), (1, 0.01)]).rings

    assert first.held_s == first.starts_s


def test_before_the_first_pluck_there_is_digital_silence() -> None:
    samples = heard(quick_with({}), [(1, 1.0)])

    assert not samples[: round(1.5 * RATE_HZ) + 1].any()


def test_after_all_has_died_there_is_digital_silence_until_the_turn_is_over() -> None:
    samples = heard(quick_with({"tooth_quality": 50}), [(1, 0.0)])

    # Q 50: 24 bits are below half a step after 24·ln 2 = 16.6 times 1/e in 30.4 ms, 0.506 s.
    assert len(samples) == 6 * RATE_HZ
    assert samples[round(0.9 * RATE_HZ) : round(0.95 * RATE_HZ)].any()
    assert not samples[round(1.02 * RATE_HZ) :].any()


def test_a_disc_without_projections_is_a_turn_of_digital_silence() -> None:
    samples = heard(quick_with({}), [])

    assert len(samples) == 6 * RATE_HZ
    assert not samples.any()


def test_what_rings_longest_is_faded_out_without_a_click() -> None:
    hearing = hearing_of(quick_with({"tooth_quality": 1e6}), [(1, 4.0)])
    samples = samples_of(hearing)

    # Q 10⁶ rings for minutes: it ends 8 s after the turn of 6 s, and its last second falls evenly.
    assert hearing.length_s == 6 + DEFAULTS.last_ring_s
    assert np.abs(samples[-10:]).max() < 1e-4
    half = samples[-RATE_HZ // 2 - 200 : -RATE_HZ // 2 + 200]
    assert np.abs(half).max() == pytest.approx(np.abs(samples[-RATE_HZ - 400 : -RATE_HZ]).max() / 2, rel=0.03)


def test_a_short_last_note_keeps_its_own_end() -> None:
    movement = quick_with({"tooth_quality": 100, "after_music_deg": 1})
    samples = heard(movement, [(1, 5.45)])[round(5.95 * RATE_HZ) :]

    # Q 100 at 523 Hz: 1/e in 60.8 ms, and no fade of a second on top.
    levels = levels_over_time(samples[256:12_000], C5_HZ, step=512)
    slope = np.polyfit(np.arange(len(levels)) * 512 / RATE_HZ, np.log(levels), 1)[0]
    assert -1 / slope == pytest.approx(0.0608, rel=0.02)


@pytest.mark.parametrize("of", ["disc", "written"])
def test_blocks_hold_the_same_samples_in_every_pass(of: str) -> None:
    movement = quick_with({})
    performance = performance_of(movement, [(1, 0.0), (2, 0.3)], [(72, 0.0), (61, 0.3)])
    hearing = hear(performance, movement, Asked(of="disc" if of == "disc" else "written"))

    first, second = (np.concatenate(list(hearing.blocks())) for _ in range(2))

    assert len(first) == hearing.sample_count
    assert np.array_equal(first, second)


def test_blocks_are_the_sum_of_their_partials_one_sine_at_a_time() -> None:
    movement = quick_with({"tooth_quality": 2000})
    hearing = hearing_of(movement, [(1, 0.0)])
    mixed = np.concatenate(list(hearing.blocks()))[int(MUSIC_BEGINS_S * RATE_HZ) :][:40_000]

    [voice] = hearing.voices
    at_s = np.arange(len(mixed)) / RATE_HZ
    direct = np.zeros(len(mixed))
    for hz, decay_s, level in zip(voice.frequency_hz, voice.decay_s, voice.level_ratio, strict=True):
        direct += level * np.exp(-at_s / decay_s) * np.sin(2 * np.pi * hz * at_s)
    direct = np.convolve(direct, body_taps(RATE_HZ))[: len(direct)]

    assert np.abs(mixed - direct).max() < 1e-5 * np.abs(direct).max()
