"""A tune that is searched for longer than a second on any machine: thousands of notes, at random."""

import io
import random

import mido

NOTES, LENGTH_S, TICKS_PER_S = 2_500, 60, 960


def hard_tune() -> bytes:
    """The tune, as a MIDI file; the same every time."""
    chance = random.Random(1)
    events = []
    for _ in range(NOTES):
        at, pitch = round(chance.uniform(0, LENGTH_S) * TICKS_PER_S), chance.randint(36, 96)
        events += [(at, "note_on", pitch), (at + 400, "note_off", pitch)]
    track = mido.MidiTrack()
    before = 0
    for at, kind, pitch in sorted(events):
        track.append(mido.Message(kind, note=pitch, velocity=80 if kind == "note_on" else 0, time=at - before))
        before = at
    written = io.BytesIO()
    mido.MidiFile(tracks=[track], ticks_per_beat=480).save(file=written)
    return written.getvalue()
