"""A disc of as many projections as asked for: a tune of our own, and mossbrook-67 grown until the tune goes on it.

The comb, the star wheels and the cutter stay; the tracks move outwards and the turn becomes longer, so that each track
is as full on every size as on the others.
"""

import io
import json
import random
from functools import cache

import mido

from layout.documents import Movement, read_movement, shipped_movement

BASE_COUNT = 500  # projections that the shipped disc holds easily
NOTES_PER_S = 6.0
TICKS_PER_BEAT = 480
BEAT_US = 500_000
GRID = 120  # ticks: a sixteenth, 0.125 s
FREE_SHARE = 334 / 360  # of a turn of mossbrook-67, from its 16 and 10 degrees without music
FASTEST_SHARE = 8 / 9  # of its turn
SPARE_S = 2.0
# Steps of the voices in the scale, from one of their notes to the next; a voice turns back at the end of its compass.
STEPS = (-2, -1, -1, 1, 1, 2, 4, -3)
SCALE = (0, 2, 4, 5, 7, 9, 11)
# (lowest and highest scale step above C2, sixteenths between its notes)
VOICES = ((26, 37, 2), (20, 29, 3), (12, 22, 4), (7, 14, 8))


@cache
def large_tune(count: int) -> bytes:
    """A Standard MIDI File of four voices with `count` notes in all, the same each time."""
    chance = random.Random(11)
    song = mido.MidiFile(type=1, ticks_per_beat=TICKS_PER_BEAT)
    conductor = mido.MidiTrack([mido.MetaMessage("track_name", name="a long walk")])
    conductor.append(mido.MetaMessage("set_tempo", tempo=BEAT_US))
    song.tracks.append(conductor)
    for channel, notes in enumerate(_voices(count, chance)):
        song.tracks.append(_track(notes, channel, chance))
    written = io.BytesIO()
    song.save(file=written)
    return written.getvalue()


def _voices(count: int, chance: random.Random) -> list[list[tuple[int, int, int]]]:
    """Onset, length and pitch of every note, voice by voice, until there are `count` of them."""
    place = [(low + high) // 2 for low, high, _ in VOICES]
    voices: list[list[tuple[int, int, int]]] = [[] for _ in VOICES]
    begin, made = 0, 0
    while made < count:
        for voice, (low, high, every) in enumerate(VOICES):
            if begin % (every * GRID) or made == count:
                continue
            step = chance.choice(STEPS)
            place[voice] += step if low <= place[voice] + step <= high else -step
            octave, degree = divmod(place[voice], len(SCALE))
            voices[voice].append((begin, every * GRID, 36 + 12 * octave + SCALE[degree]))
            made += 1
        begin += GRID
    return voices


def _track(notes: list[tuple[int, int, int]], channel: int, chance: random.Random) -> mido.MidiTrack:
    """One voice as a track: each note ends where the next begins."""
    track = mido.MidiTrack()
    now = 0
    for begin, length, pitch in notes:
        velocity = chance.randint(56, 104)
        track.append(mido.Message("note_on", note=pitch, velocity=velocity, channel=channel, time=begin - now))
        track.append(mido.Message("note_off", note=pitch, velocity=0, channel=channel, time=length))
        now = begin + length
    return track


@cache
def large_movement(count: int) -> Movement:
    """mossbrook-67 with a disc and a turn for `large_tune(count)`; its drive grows with its lever."""
    document = shipped_movement("mossbrook-67").model_dump(mode="json")
    first_mm, last_mm = document["tracks"][0]["radius_mm"], document["tracks"][-1]["radius_mm"]
    outwards_mm = first_mm * max(0.0, count / BASE_COUNT - 1)
    for track in document["tracks"]:
        track["radius_mm"] += outwards_mm
    document["disc"]["outer_diameter_mm"] += 2 * outwards_mm
    for feature in document["disc"]["features"]:
        feature["radius_mm"] += outwards_mm if feature["shape"] == "notch" else 0.0
    document["drive"]["torque_limit_nmm"] *= (last_mm + outwards_mm) / last_mm
    length_s = max(begin for voice in _voices(count, random.Random(11)) for begin, _, _ in voice[-1:])
    turn_s = (length_s / TICKS_PER_BEAT * BEAT_US / 1e6 + SPARE_S) / FREE_SHARE
    if turn_s > document["revolution_s"]:
        document["revolution_s"], document["fastest_revolution_s"] = turn_s, turn_s * FASTEST_SHARE
    return read_movement(json.dumps(document))
