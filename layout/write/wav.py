"""WAV: a hearing as PCM samples, 48 kHz, one channel, 16 or 24 bits.

RIFF with a plain `fmt ` chunk of WAVE_FORMAT_PCM ("Multimedia Programming Interface and Data Specifications 1.0",
IBM and Microsoft, 1991); samples are signed, least byte first.
"""

import struct
from typing import Literal, Protocol

import numpy as np

from layout.errors import DocumentError, Problem
from layout.hear.hearing import RATE_HZ, Hearing
from layout.mechanics.arrays import FloatArray

Bits = Literal[16, 24]


class Output(Protocol):
    """What bytes are written into, one piece after the other."""

    def write(self, content: bytes, /) -> object:
        """Write the next piece."""


PEAK_RATIO = 10 ** (-1 / 20)  # −1 dBFS: what a converter may overshoot between samples stays whole (common practice)
HEAD_BYTES = 44
MOST_BYTES = 2**32 - 1  # a chunk's size has 32 bits
_PCM, _CHANNELS, _BYTE_BITS = 1, 1, 8


def wav_bytes(hearing: Hearing, bits: Bits) -> int:
    """How long the file is."""
    data = hearing.sample_count * bits // _BYTE_BITS
    return HEAD_BYTES + data + data % 2


def write_wav(hearing: Hearing, file: Output, *, bits: Bits) -> None:
    """The hearing into a file, block by block; its greatest sample is 1 dB below full scale, silence is zeros.

    It is mixed twice: once for the greatest sample, once to be written. No dither: what is silent stays so.

    Args:
        hearing: The sound.
        file: Written from where it stands; it need not go back.
        bits: Of a sample.

    Raises:
        DocumentError: The sound is longer than a WAV file can be.
        OSError: The file cannot be written.
    """
    size = wav_bytes(hearing, bits)
    if size - _BYTE_BITS > MOST_BYTES:
        message = f"one turn sounds for {hearing.length_s:.0f} s, which is more than a WAV file holds; take 16 bits"
        raise DocumentError(document="movement", problems=(Problem(pointer="/revolution_s", message=message),))
    greatest = max((float(np.abs(block).max()) for block in hearing.blocks()), default=0.0)
    full_scale = 2 ** (bits - 1)
    gain = PEAK_RATIO * full_scale / greatest if greatest > 0 else 0.0
    frame_bytes = _CHANNELS * bits // _BYTE_BITS
    data_bytes = hearing.sample_count * frame_bytes
    form = struct.pack("<HHIIHH", _PCM, _CHANNELS, RATE_HZ, RATE_HZ * frame_bytes, frame_bytes, bits)
    file.write(b"RIFF" + struct.pack("<I", size - _BYTE_BITS) + b"WAVE")
    file.write(b"fmt " + struct.pack("<I", len(form)) + form)
    file.write(b"data" + struct.pack("<I", data_bytes))
    for block in hearing.blocks():
        file.write(_samples(block * gain, bits))
    file.write(bytes(data_bytes % 2))  # chunks end on even bytes


def _samples(scaled: FloatArray, bits: Bits) -> bytes:
    whole = np.rint(scaled).astype("<i4")
    if bits == 16:  # noqa: PLR2004 -- the format's own name
        return whole.astype("<i2").tobytes()
    return whole.view(np.uint8).reshape(-1, 4)[:, :3].tobytes()
