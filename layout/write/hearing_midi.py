"""hearing.mid: what a hearing plays as a Standard MIDI File (RP-001), in ticks of a twentieth of a millisecond."""

import io
import math

from mido import Message, MetaMessage, MidiFile, MidiTrack

from layout.hear.hearing import Hearing, Ring

TICKS_PER_BEAT, BEAT_US = 10_000, 500_000
TICKS_PER_S = TICKS_PER_BEAT * 1_000_000 // BEAT_US  # 20,000: a tick is 0.05 ms
MOST_TICKS = 0x0FFFFFFF  # between two events: four bytes of seven bits
HEARD_DOWN_TO = math.log(1000)  # 60 dB: where nobody silences a tooth, its note ends there
_PROGRAM = 10  # 11 of the General MIDI sound set: music box
_VELOCITY = 80  # a pluck knows no louder and softer
_DRUMS, _CHANNELS = 9, 16  # channel 10 is percussion's in General MIDI


def write_hearing_midi(hearing: Hearing) -> bytes:
    """The hearing as a MIDI file: a note for each pluck of a track, from its release until it is silent.

    Time 0 is when the disc begins to move. Tracks of one pitch play on channels of their own, since a channel has
    one note of a key at a time; two teeth of a track are one note, and cents are not told. Where nothing silences
    a tooth, the note ends when its first partial has fallen by 60 dB, or with the sound.

    Args:
        hearing: The sound; one without rings gives a file without notes, as long as the turn.
    """
    track = MidiTrack()
    track.append(MetaMessage("track_name", name=hearing.title, time=0))
    track.append(MetaMessage("set_tempo", tempo=BEAT_US, time=0))
    notes = _notes(hearing)
    for channel in sorted({channel for _, _, channel, _ in notes}):
        track.append(Message("program_change", program=_PROGRAM, channel=channel, time=0))
    # Of one moment, ends come first: a note that ends as the next begins is not cut by its own end.
    events = sorted(
        [(ends, 0, key, channel) for _, ends, channel, key in notes]
        + [(begins, 1, key, channel) for begins, _, channel, key in notes]
    )
    now = 0
    for at, begins, key, channel in events:
        _wait(track, at - now)
        velocity = _VELOCITY if begins else 0
        kind = "note_on" if begins else "note_off"
        wait = (at - now) % MOST_TICKS
        track.append(Message(kind, note=key, velocity=velocity, channel=channel, time=wait))
        now = at
    rest = max(round(hearing.length_s * TICKS_PER_S) - now, 0)
    _wait(track, rest)
    track.append(MetaMessage("end_of_track", time=rest % MOST_TICKS))
    file = io.BytesIO()
    MidiFile(type=0, ticks_per_beat=TICKS_PER_BEAT, tracks=[track], charset="utf-8").save(file=file)
    return file.getvalue()


def _wait(track: MidiTrack, ticks: int) -> None:
    """Texts without words, where a wait is longer than one event can tell."""
    for _ in range(ticks // MOST_TICKS):
        track.append(MetaMessage("text", text="", time=MOST_TICKS))


def _notes(hearing: Hearing) -> list[tuple[int, int, int, int]]:
    """(begin, end, channel, key) of each note; in ticks."""
    channels = _channels(hearing.rings)
    found: dict[tuple[int, int, int], int] = {}
    for ring in hearing.rings:
        begins = round(ring.starts_s * TICKS_PER_S)
        ends = max(round(_silent_s(hearing, ring) * TICKS_PER_S), begins + 1)
        place = (begins, channels[ring.key, ring.track], ring.key)
        found[place] = max(found.get(place, 0), ends)
    return [(begins, ends, channel, key) for (begins, channel, key), ends in sorted(found.items())]


def _channels(rings: tuple[Ring, ...]) -> dict[tuple[int, int], int]:
    """A channel for each track of a pitch, the innermost on the first; the drums' is left out."""
    free = [channel for channel in range(_CHANNELS) if channel != _DRUMS]
    counts: dict[int, int] = {}
    channels: dict[tuple[int, int], int] = {}
    for key, track in sorted({(ring.key, ring.track) for ring in rings}):
        place = counts.get(key, 0)
        counts[key] = place + 1
        channels[key, track] = free[place % len(free)]
    return channels


def _silent_s(hearing: Hearing, ring: Ring) -> float:
    decay_s = float(hearing.voices[ring.voice].decay_s.max(initial=0.0))
    return min(ring.held_s + ring.fade_s, ring.starts_s + HEARD_DOWN_TO * decay_s, hearing.length_s)
