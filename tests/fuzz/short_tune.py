"""A tune of a few notes that goes through every stage: a chord, a repeat, a run, two voices."""

from tests.layout.read.hexdump import midi_file

# C5 E5 G5 together, C5 again at once, then E5, G5, and D5, which small combs have not; 96 ticks are half a second.
SHORT_TUNE = midi_file(
    "00 90 48 40 00 4C 40 00 4F 40 10 48 00 08 48 50 60 4C 40 60 4F 40 60 4A 40 60 4A 00 00 4C 00 00 4F 00 00 48 00"
    "00 FF 2F 00"
)
