"""WAV files, read back by the standard library's reader."""

import io
import struct
import tracemalloc
import wave

import numpy as np
import pytest

from layout.errors import DocumentError
from layout.hear.hearing import Hearing
from layout.write.wav import Bits, wav_bytes, write_wav
from tests.layout.hear.sounds import RATE_HZ, hearing_of, quick_with, samples_of

PLUCKS = [(1, 0.0), (2, 0.3), (3, 0.3), (1, 1.0)]


def plain() -> Hearing:
    return hearing_of(quick_with({}), PLUCKS)


@pytest.mark.parametrize("bits", [16, 24])
def test_the_greatest_sample_is_one_decibel_below_full_scale(bits: Bits) -> None:
    peak = np.abs(samples_of(plain(), bits)).max()

    # Within half a step of what 16 bits can say: 20·log10(1 ± 0.5/29205) is 0.00015 dB.
    assert 20 * np.log10(peak) == pytest.approx(-1.0, abs=0.0003)


def test_a_single_pluck_is_as_loud_as_many_so_that_nothing_clips() -> None:
    crowded = hearing_of(quick_with({"damper_arc_mm": 0}), [(1 + place % 3, 0.003 * place) for place in range(300)])

    assert np.abs(samples_of(crowded, 16)).max() == pytest.approx(10 ** (-1 / 20), abs=2e-5)


def test_sixteen_bits_say_the_same_as_twenty_four_to_half_a_step() -> None:
    coarse, fine = samples_of(plain(), 16), samples_of(plain(), 24)

    assert np.abs(coarse - fine).max() <= 0.5 / 2**15 + 1 / 2**23


@pytest.mark.parametrize("bits", [16, 24])
def test_the_head_says_what_follows(bits: Bits) -> None:
    hearing, file = plain(), io.BytesIO()
    write_wav(hearing, file, bits=bits)
    content = file.getvalue()

    assert len(content) == wav_bytes(hearing, bits)
    assert struct.unpack("<I", content[4:8])[0] == len(content) - 8
    with wave.open(io.BytesIO(content)) as read:
        told = (read.getnchannels(), read.getframerate(), read.getsampwidth(), read.getnframes())
    assert told == (1, RATE_HZ, bits // 8, hearing.sample_count)


def test_an_odd_number_of_bytes_is_filled_up_as_chunks_must_be() -> None:
    # 6.00001 s are 288,000.48 samples; of 6.00002 s 288,001, 864,003 bytes of 24 bits.
    movement = quick_with({"revolution_s": 6.00002, "fastest_revolution_s": 6})
    hearing, file = hearing_of(movement, []), io.BytesIO()
    write_wav(hearing, file, bits=24)

    assert hearing.sample_count == 288_001
    assert len(file.getvalue()) == 44 + 864_003 + 1


class OneWay:
    """A file that can only be written to, and keeps nothing."""

    def __init__(self) -> None:
        self.written = 0

    def write(self, content: bytes, /) -> int:
        self.written += len(content)
        return len(content)


def test_a_file_is_written_without_going_back() -> None:
    pipe = OneWay()
    write_wav(plain(), pipe, bits=16)

    assert pipe.written == wav_bytes(plain(), 16)


def test_a_sound_ten_times_as_long_takes_no_more_memory() -> None:
    def peak_bytes(revolution_s: float) -> int:
        movement = quick_with({"revolution_s": revolution_s, "fastest_revolution_s": 6})
        hearing = hearing_of(movement, [(1 + place % 3, 0.1 * place) for place in range(int(revolution_s * 8))])
        tracemalloc.start()
        write_wav(hearing, OneWay(), bits=24)
        _, peak = tracemalloc.get_traced_memory()
        tracemalloc.stop()
        return peak

    short, long = peak_bytes(6), peak_bytes(60)

    # 60 s of 24 bits are 8.6 MB; the plucks themselves, ten times as many, take some 100 bytes each.
    assert long < short + 300_000
    assert long < 3_000_000


def test_a_sound_longer_than_a_wav_can_be_is_refused_before_anything_is_mixed() -> None:
    # 24 h · 3600 s · 48,000 · 3 bytes is 12 GB, where a chunk's size has 32 bits.
    hearing, file = hearing_of(quick_with({"revolution_s": 86_400, "fastest_revolution_s": 6}), []), io.BytesIO()

    with pytest.raises(DocumentError, match="more than a WAV file holds"):
        write_wav(hearing, file, bits=24)

    assert file.getvalue() == b""
