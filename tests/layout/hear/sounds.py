"""Hearings of a few plucks, written as WAV and read back by the standard library, and what can be measured on them."""

import io
import json
import wave
from typing import Any

import numpy as np

from layout.documents import Movement, read_movement
from layout.hear import Asked, Performance, hear
from layout.hear.hearing import Hearing
from layout.mechanics.arrays import FloatArray, frozen_floats, frozen_ints
from layout.mechanics.damping import damper_touch_s
from layout.mechanics.turning import turning_of
from layout.play.plucks import Plucks
from layout.write.wav import Bits, write_wav
from tests.layout.examples import document_with

RATE_HZ = 48_000
# One turn in 6 s, so that its sound is short: music begins after 30°, 0.5 s.
QUICK: dict[str, Any] = document_with({"revolution_s": 6, "fastest_revolution_s": 6})
MUSIC_BEGINS_S = 0.5


def quick_with(changes: dict[str, Any]) -> Movement:
    return read_movement(json.dumps(document_with(changes, QUICK)))


def with_one_tooth(movement: Movement, tooth: int) -> Movement:
    """A movement of which one tooth alone can be used, and which turns in 6 s so that its sound is short."""
    document = movement.model_dump(mode="json", exclude_none=True)
    document |= {"revolution_s": 6, "fastest_revolution_s": 6}
    document.pop("drive", None)
    for one in document["teeth"]:
        one["usable"] = one["tooth"] == tooth
    return read_movement(json.dumps(document))


def performance_of(
    movement: Movement, plucks: list[tuple[int, float]], written: list[tuple[int, float]] | None = None
) -> Performance:
    """Plucks as (track number, sounds_s), notes as (key, moment)."""
    track_index = frozen_ints(track - 1 for track, _ in plucks)
    sounds_s = frozen_floats(moment for _, moment in plucks)
    touched_s = damper_touch_s(movement, turning_of(movement))
    return Performance(
        title="a tune",
        plucks=Plucks(
            track_index=track_index, sounds_s=sounds_s, silent_from_s=frozen_floats(sounds_s - touched_s[track_index])
        ),
        written_key=frozen_ints(key for key, _ in written or []),
        written_s=frozen_floats(moment for _, moment in written or []),
    )


def hearing_of(movement: Movement, plucks: list[tuple[int, float]], asked: Asked | None = None) -> Hearing:
    return hear(performance_of(movement, plucks), movement, asked or Asked())


def samples_of(hearing: Hearing, bits: Bits = 24) -> FloatArray:
    """The sound as it is written, full scale 1."""
    file = io.BytesIO()
    write_wav(hearing, file, bits=bits)
    file.seek(0)
    return read_wav(file)


def read_wav(file: io.BytesIO) -> FloatArray:
    with wave.open(file) as read:
        assert (read.getframerate(), read.getnchannels()) == (RATE_HZ, 1)
        width, frames = read.getsampwidth(), read.readframes(read.getnframes())
    if width == 2:
        return np.frombuffer(frames, "<i2") / 2**15
    packed = np.frombuffer(frames, np.uint8).reshape(-1, 3).astype(np.int64)
    whole = packed[:, 0] + (packed[:, 1] << 8) + (packed[:, 2] << 16)
    signed: FloatArray = np.where(whole >= 2**23, whole - 2**24, whole) / 2**23
    return signed


def heard(movement: Movement, plucks: list[tuple[int, float]]) -> FloatArray:
    return samples_of(hearing_of(movement, plucks))


def peak_hz(samples: FloatArray, near_hz: float, within_hz: float) -> float:
    """The frequency of the strongest component near one: the top of a long zero-padded transform, interpolated.

    A parabola through the logarithms of three bins, under a Hann window (common practice of spectral estimation).
    """
    windowed = samples * np.hanning(len(samples))
    size = 8 * 2 ** int(np.ceil(np.log2(len(samples))))
    spectrum = np.abs(np.fft.rfft(windowed, size))
    bin_hz = RATE_HZ / size
    low, high = int((near_hz - within_hz) / bin_hz), int((near_hz + within_hz) / bin_hz) + 1
    top = low + int(np.argmax(spectrum[low:high]))
    before, at, after = np.log(spectrum[top - 1 : top + 2])
    return float((top + (before - after) / (before - 2 * at + after) / 2) * bin_hz)


def levels_over_time(samples: FloatArray, frequency_hz: float, step: int = 1024) -> FloatArray:
    """How strong a component is in windows of twice the step, one step after the other."""
    moved = samples * np.exp(-2j * np.pi * frequency_hz / RATE_HZ * np.arange(len(samples)))
    window = np.hanning(2 * step)
    starts = range(0, len(moved) - 2 * step, step)
    return np.array([abs(np.sum(moved[start : start + 2 * step] * window)) for start in starts])


def onsets_s(samples: FloatArray, quiet_s: float = 0.02) -> list[float]:
    """Where sound begins after digital silence of at least so long."""
    sounding = np.flatnonzero(samples)
    begins = sounding[np.concatenate([[True], np.diff(sounding) > quiet_s * RATE_HZ])]
    return [place / RATE_HZ for place in begins.tolist()]
