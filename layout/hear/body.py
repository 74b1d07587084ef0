"""The case a comb is heard through: the tooth itself, and a little more where the case resonates.

Causal, and its first tap is the tooth's own sound at full: an onset stays where it is. It adds to a partial and moves
no frequency.
"""

import math
from functools import cache

import numpy as np

from layout.hear.defaults import DEFAULTS
from layout.mechanics.arrays import FloatArray, frozen_floats

_SMOOTHED_SHARE = 4  # the last quarter of the taps runs out along half a cosine


@cache
def body_taps(rate_hz: int) -> FloatArray:
    """The response of the case to a single sample, shape (DEFAULTS.body_taps_count,).

    A resonance that rings as e^(−k/τ)·sin ωk adds τ/2 in samples at its frequency: it is divided by that.

    Args:
        rate_hz: Samples a second.
    """
    count = DEFAULTS.body_taps_count
    k = np.arange(count)
    taps = np.zeros(count)
    for resonance in DEFAULTS.body:
        decay = resonance.quality_factor / (math.pi * resonance.frequency_hz) * rate_hz
        ringing = np.exp(-k / decay) * np.sin(2 * np.pi * resonance.frequency_hz / rate_hz * k)
        taps += resonance.gain_factor * 2 / decay * ringing
    smoothed = count // _SMOOTHED_SHARE
    taps[-smoothed:] *= (1 + np.cos(np.linspace(0, np.pi, smoothed))) / 2
    taps[0] = 1.0
    return frozen_floats(taps)
