"""The tune as written, on the comb of the movement."""

import math

import numpy as np
import pytest

from layout.hear import Asked, hear
from layout.hear.hearing import Hearing
from tests.layout.hear.sounds import (
    MUSIC_BEGINS_S,
    RATE_HZ,
    onsets_s,
    peak_hz,
    performance_of,
    quick_with,
    samples_of,
)

C5, CS5, E5, G5 = 72, 73, 76, 79
WRITTEN = Asked(of="written")


def written(notes: list[tuple[int, float]], changes: dict[str, object] | None = None) -> Hearing:
    movement = quick_with(changes or {})
    return hear(performance_of(movement, [], notes), movement, WRITTEN)


def test_every_note_sounds_at_its_own_moment_though_no_wheel_could_follow() -> None:
    # 40 ms apart on one track, whose wheel needs 61 ms for a step.
    hearing = written([(C5, 0.0), (C5, 0.04), (C5, 0.08)])

    assert [ring.starts_s - MUSIC_BEGINS_S for ring in hearing.rings] == pytest.approx([0, 0.04, 0.08])
    assert onsets_s(samples_of(hearing), quiet_s=0.0001)[0] == pytest.approx(MUSIC_BEGINS_S, abs=0.0001)


def test_a_pitch_the_comb_lacks_sounds_on_a_tooth_made_up_between_its_neighbours() -> None:
    # C#5 lies a quarter of the way from C5 to E5: Q 1000 + 1600/4.
    hearing = written([(CS5, 0.0)], {"teeth/0/quality": 1000, "teeth/1/quality": 2600})
    [voice], [ring] = hearing.voices, hearing.rings

    begin = round(MUSIC_BEGINS_S * RATE_HZ)
    found_hz = peak_hz(samples_of(hearing)[begin : begin + RATE_HZ], 554.365, 20)

    assert ring.track == 0
    assert 1200 * math.log2(found_hz / 554.365) == pytest.approx(0, abs=1)  # C#5, equal temperament: 554.365 Hz
    assert math.pi * voice.frequency_hz[0] * voice.decay_s[0] == pytest.approx(1400)


def test_a_pitch_past_the_comb_sounds_as_its_last_tooth_would() -> None:
    [voice] = written([(G5 + 12, 0.0)], {"teeth/2/quality": 500}).voices

    assert voice.frequency_hz[0] == pytest.approx(2 * 783.991, abs=0.01)  # G5 is 783.991 Hz
    assert math.pi * voice.frequency_hz[0] * voice.decay_s[0] == pytest.approx(500)


def test_an_unusable_tooth_is_as_one_the_comb_lacks() -> None:
    [ring] = written([(C5, 0.0)], {"teeth/0/usable": False}).rings

    assert ring.track == 0


def test_notes_of_one_pitch_and_moment_are_one() -> None:
    assert len(written([(C5, 0.5), (C5, 0.5), (E5, 0.5)]).rings) == 2


def test_notes_past_the_turn_are_heard_after_it() -> None:
    hearing = written([(C5, 0.0), (E5, 7.0)])

    assert hearing.rings[-1].starts_s == pytest.approx(7.0 + MUSIC_BEGINS_S)
    assert hearing.length_s > 7.5


def test_a_tune_without_notes_is_silence() -> None:
    hearing = written([])

    assert hearing.length_s == 6
    assert not np.concatenate(list(hearing.blocks())).any()
