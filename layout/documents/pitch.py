"""Scientific pitch names and MIDI key numbers (C4 = 60 = middle C, A4 = 69 = 440 Hz in ISO 16)."""

import re

_STEPS = {"C": 0, "D": 2, "E": 4, "F": 5, "G": 7, "A": 9, "B": 11}
_ALTERS = {"": 0, "#": 1, "b": -1}
_NAMES = ("C", "C#", "D", "Eb", "E", "F", "F#", "G", "G#", "A", "Bb", "B")
_PATTERN = re.compile(r"([A-G])([#b]?)(-1|[0-9])")
# The same as the code below, for JSON Schemas: C-1 to G9 by every name they have.
PITCH_PATTERN = "^([A-G][#b]?[0-8]|[C-F][#b]?9|Gb?9|C#?-1|[ABD-G][#b]?-1)$"
KEY_COUNT = 128  # keys, MIDI 1.0: seven data bits


def key_of(pitch: str) -> int:
    """The MIDI key number of a scientific pitch name.

    Args:
        pitch: Letter, optional `#` or `b`, octave: "C4", "F#5", "Bb3".

    Raises:
        ValueError: Not such a name, or outside the 128 MIDI keys.
    """
    match = _PATTERN.fullmatch(pitch)
    if match is None:
        raise ValueError(f"{pitch!r} is not a pitch name such as C4, F#5 or Bb3")
    letter, alter, octave = match.groups()
    key = 12 * (int(octave) + 1) + _STEPS[letter] + _ALTERS[alter]
    if not 0 <= key < KEY_COUNT:
        raise ValueError(f"{pitch!r} lies outside the MIDI keys 0 (C-1) to 127 (G9)")
    return key


def pitch_of(key: int) -> str:
    """The scientific pitch name of a MIDI key number, 60 -> "C4"; sharps but for Eb and Bb."""
    return f"{_NAMES[key % 12]}{key // 12 - 1}"
