"""How a tooth of a comb sounds: the bending of a bar clamped at one end, free at the other, with a mass at its tip.

Of a bar of mass m and stiffness E·I over its length L, with a mass µ·m at the tip, partial n has

    ω = x²·√(E·I/(m·L³))        1 + cosh x·cos x + µ·x·(cos x·sinh x − sin x·cosh x) = 0

The bar is held with its tip a lift q away by a force there, at rest, and let go. Tip force over tip
displacement at a frequency is D = (E·I/L³)·(x³·(1 + cos x·cosh x)/(sin x·cosh x − cos x·sinh x) − µ·x⁴), whose zeros
are the partials, and the step response of a system of modes gives the displacement of each

    dₙ/q = 12 / (x⁴·(1 + µ + 2·µ·x·sin x·sinh x/(sin x·cosh x − cos x·sinh x)))

which is 12/x⁴ for a plain bar; over all partials they make 1, since q is where the tip was. Frequency equation:
textbooks of vibration (Timoshenko; Rao); the levels are derived here from it, and held against a bar of many small
elements in the tests.
"""

import math

import numpy as np

from layout.mechanics.arrays import FloatArray, frozen_floats

_HALVINGS = 60  # of a bracket as wide as π: what is left is below the rounding of a double
A4_KEY, A4_HZ, OCTAVE_KEYS = 69, 440.0, 12  # ISO 16: A4 is 440 Hz
CENTS_IN_OCTAVE = 1200.0


def bar_roots(end_mass_ratio: float, partial_count: int) -> FloatArray:
    """The first roots x of the clamped-free bar with a mass at its tip, rising.

    Between (n − 1)·π and n·π the left side changes its sign once, whatever the mass; it is divided by cosh x, so that
    no high partial overflows.

    Args:
        end_mass_ratio: µ, mass at the tip over the bar's own; 0 for a plain bar.
        partial_count: How many; 0 gives none.
    """
    lower = np.arange(partial_count) * math.pi
    upper = lower + math.pi
    is_even = np.arange(partial_count) % 2 == 0  # there the left side falls from above 0
    for _ in range(_HALVINGS):
        middle = (lower + upper) / 2
        lies_below = (_left_side(middle, end_mass_ratio) > 0) == is_even
        lower, upper = np.where(lies_below, middle, lower), np.where(lies_below, upper, middle)
    return frozen_floats((lower + upper) / 2)


def partial_ratios(roots: FloatArray) -> FloatArray:
    """Frequencies of the partials over the first one's, (xₙ/x₁)²; none for no roots.

    Args:
        roots: Shape (n,). As bar_roots gives them.
    """
    return frozen_floats((roots / roots[:1]) ** 2)


def lift_shares(roots: FloatArray, end_mass_ratio: float) -> FloatArray:
    """How the lift of the tip is shared among the partials at the release: dₙ/q.

    Args:
        roots: Shape (n,). As bar_roots gives them for this mass.
        end_mass_ratio: µ.
    """
    tanh, sine, cosine = np.tanh(roots), np.sin(roots), np.cos(roots)
    moved = 2 * end_mass_ratio * roots * sine * tanh / (sine - cosine * tanh)
    return frozen_floats(12 / (roots**4 * (1 + end_mass_ratio + moved)))


def frequency_hz(key: int, cents: float) -> float:
    """The frequency of a tooth tuned to a MIDI key, so many cents away; 440 Hz for A4 (ISO 16)."""
    return float(A4_HZ * 2.0 ** ((key - A4_KEY) / OCTAVE_KEYS + cents / CENTS_IN_OCTAVE))


def decay_s(frequency_hz: float, quality: float) -> float:
    """Seconds in which a partial falls to 1/e: τ = Q/(π·f), the meaning of a quality factor Q.

    Args:
        frequency_hz: Of the partial, above 0.
        quality: Q: 2π times the energy stored over what is lost in a period.
    """
    return quality / (math.pi * frequency_hz)


def _left_side(x: FloatArray, end_mass_ratio: float) -> FloatArray:
    sech = 2 * np.exp(-x) / (1 + np.exp(-2 * x))
    left: FloatArray = sech + np.cos(x) + end_mass_ratio * x * (np.cos(x) * np.tanh(x) - np.sin(x))
    return left
