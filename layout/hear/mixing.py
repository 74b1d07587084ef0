"""Samples of many decaying partials at once, by blocks, without a sine for each sample.

A partial is c·zᵏ at sample k, with z = e^((iω − 1/τ)/rate). A block of ROW × ROW samples is z^(ROW·a)·z^b for row a and
column b: all partials that ring through it are one product of two small matrices. A ring that begins or is
silenced inside a block is made by itself. What is kept at a time is a block, and tables of 2·ROW numbers a partial.
"""

from collections.abc import Iterator, Sequence
from functools import cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from layout.hear.body import body_taps
from layout.mechanics.arrays import FloatArray

RATE_HZ = 48_000  # samples a second
ROW = 64
BLOCK = ROW * ROW  # samples; 85 ms
ComplexArray = NDArray[np.complexfloating[Any, Any]]
Played = tuple[int, int, int, int]  # first sample, sample of the hold, samples of the fade, voice


class Tone:
    """A voice made ready: heard through the body, from sample 0 on."""

    def __init__(
        self, frequency_hz: FloatArray, decay_s: FloatArray, level_ratio: FloatArray, still_level: float
    ) -> None:
        """Make it ready.

        Args:
            frequency_hz: Shape (n,). Of its partials, rising.
            decay_s: Shape (n,). In which each falls to 1/e.
            level_ratio: Shape (n,). Of each.
            still_level: Below it a partial is over.
        """
        taps = body_taps(RATE_HZ)
        self.logs: ComplexArray = (2j * np.pi * frequency_hz - 1 / decay_s) / RATE_HZ
        bare = -1j * level_ratio  # the real part of −i·zᵏ is a decaying sine
        powers = np.exp(-self.logs[:, None] * np.arange(len(taps)))
        self.weights: ComplexArray = bare * (powers @ taps)  # exact once all taps are filled
        begin = np.real(bare @ np.exp(self.logs[:, None] * np.arange(len(taps))))
        self.begin: FloatArray = np.convolve(begin, taps)[: len(taps)]
        with np.errstate(divide="ignore"):
            lasts_s = decay_s * np.log(level_ratio / still_level)
        self.lasts = np.maximum(np.rint(lasts_s * RATE_HZ), 0).astype(np.int64)
        self.sample_count = int(self.lasts.max(initial=0))


class Mixer:
    """Mixes rings of tones into blocks."""

    def __init__(self, tones: Sequence[Tone]) -> None:
        """Make the tables of all tones' partials, one behind the other."""
        self._tones = tones
        counts = [len(tone.logs) for tone in tones]
        self._first = np.concatenate([[0], np.cumsum(counts)])
        self._logs: ComplexArray = np.concatenate([tone.logs for tone in tones] or [np.zeros(0, complex)])
        self._weights: ComplexArray = np.concatenate([tone.weights for tone in tones] or [np.zeros(0, complex)])
        self._lasts = np.concatenate([tone.lasts for tone in tones] or [np.zeros(0, np.int64)])
        columns = np.exp(self._logs[:, None] * np.arange(ROW))
        self._rows: ComplexArray = np.exp(self._logs[:, None] * (ROW * np.arange(ROW)))
        self._real, self._imag = np.ascontiguousarray(columns.real), np.ascontiguousarray(columns.imag)

    def blocks(self, played: Sequence[Played], sample_count: int) -> Iterator[FloatArray]:
        """Blocks of samples, BLOCK each but for the last.

        Args:
            played: What rings, in the order of first samples.
            sample_count: How many samples all blocks have together.
        """
        waiting = 0
        live: list[Played] = []
        for begin in range(0, sample_count, BLOCK):
            end = min(begin + BLOCK, sample_count)
            while waiting < len(played) and played[waiting][0] < end:
                live.append(played[waiting])
                waiting += 1
            live = [one for one in live if self._over(one) > begin]
            block = np.zeros(BLOCK)
            through: list[Played] = []
            for one in live:
                if one[0] + len(self._tones[one[3]].begin) <= begin and begin + BLOCK <= one[1]:
                    through.append(one)
                else:
                    self._add_alone(block, one, begin)
            if through:
                self._add_through(block, through, begin)
            yield block[: end - begin]

    def _over(self, one: Played) -> int:
        first, hold, fade, voice = one
        return min(hold + fade, first + self._tones[voice].sample_count)

    def _add_through(self, block: FloatArray, rings: Sequence[Played], begin: int) -> None:
        partials: list[int] = []
        ages: list[int] = []
        for first, _, _, voice in rings:
            age = begin - first
            low = int(self._first[voice])
            count = int(np.count_nonzero(self._tones[voice].lasts > age))
            partials.extend(range(low, low + count))
            ages.extend([age] * count)
        self._add(block, np.array(partials, dtype=np.int64), np.array(ages, dtype=np.int64))

    def _add(self, block: FloatArray, partials: NDArray[np.int64], ages: NDArray[np.int64]) -> None:
        """Add these partials, each from its age on, all over the block or the whole rows it is long."""
        rows = -(-len(block) // ROW)
        states = self._weights[partials] * np.exp(self._logs[partials] * ages)
        left = self._rows[partials, :rows] * states[:, None]
        made = left.real.T @ self._real[partials] - left.imag.T @ self._imag[partials]
        block += made.ravel()[: len(block)]

    def _add_alone(self, block: FloatArray, one: Played, begin: int) -> None:
        """Add a ring that begins or ends in a block, with its begin and its fade."""
        first, hold, fade, voice = one
        tone = self._tones[voice]
        low, high = max(first, begin), min(self._over(one), begin + BLOCK)
        if high <= low:
            return
        made = np.zeros(high - low)
        age = low - first
        fresh = tone.begin[age : age + len(made)]
        made[: len(fresh)] = fresh
        if len(fresh) < len(made):
            later = age + len(fresh)
            partials = int(self._first[voice]) + np.flatnonzero(tone.lasts > later)
            self._add(made[len(fresh) :], partials, np.full(len(partials), later))
        if hold < high:
            made *= _fade(fade)[np.clip(np.arange(low, high) - hold, 0, fade)]
        block[low - begin : high - begin] += made


@cache
def _fade(sample_count: int) -> FloatArray:
    """From 1 to 0 in so many samples, along half a cosine; both ends stand in it."""
    ramp: FloatArray = (1 + np.cos(np.linspace(0, np.pi, sample_count + 1))) / 2
    ramp.setflags(write=False)
    return ramp
