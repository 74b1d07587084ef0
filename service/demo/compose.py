"""The demo tune "Turning Day at Wickenbeck", written as music, and the bytes it becomes.

The piece is our own: a 6/8 dance in F major for the made-up valley of the shipped movements. It grows from
two ideas heard in its first two bars: a wheel that turns round one note (A5 Bb5 A5 G5 A5 C6) and a hammer
that strikes one note three times (D6 D6 D6 C6).

Form, forty bars (dotted quarter = 84 unless said otherwise):

===== ====== ===================================================================================
bars  phrase keys and chords
===== ====== ===================================================================================
1-8   A      F | Bb F/A | Gm | C7 | Dm/F | Gm | F/C C7 | F, the third on top: a question
9-16  A'     the same way, with an inner voice; full close on F: the answer
17-24 B      76, D minor to C: Dm | A7 | Bb (for the Dm expected) | F | Am | Dm/F | G7 | C, C7
25-32 A''    the hammer in sixteenths, the peak on A6, D7 to Gm in bar 30; full close on F
33-40 coda   hammer over held F: F | Bb | C7 | F, a run to C7, then slower to a last full close
===== ====== ===================================================================================

What it asks of a movement, on purpose: notes repeated in eighths (0.24 s, more than one tooth can do on
most tracks) and in sixteenths (more than any pair can do), chords of up to five notes, runs, three
octaves of range, a slower middle and a slower end, and a few pitches that small combs do not have (C sharp,
D4). A disc of it loses some notes, and should say which.

How a phrase is written: bars are parted by ``|``; a note is a pitch name with an optional ``/length`` in
eighths (1 if left out, ``/.5`` a sixteenth); ``+`` joins the notes of a chord; ``r`` is a rest.
"""

import argparse
import io
import sys
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path

import mido

TITLE = "Turning Day at Wickenbeck"
TUNE_PATH = Path(__file__).with_name("tune.mid")

_PULSES_PER_QUARTER = 480
_TICKS_PER_EIGHTH = 240
_EIGHTHS_PER_BAR = 6
_TICKS_PER_BAR = _EIGHTHS_PER_BAR * _TICKS_PER_EIGHTH
_BARS_PER_PHRASE = 8
# General MIDI Level 1 sound set, program 11 "Music Box" (counted from 1); 10 on the wire.
_PROGRAM = 10
# Notes end a little before the next, so that repeats are heard as repeats. Our choice.
_SOUNDED_PART = Fraction(7, 8)
_SEMITONES = {"C": 0, "D": 2, "E": 4, "F": 5, "G": 7, "A": 9, "B": 11}
_ACCIDENTALS = {"": 0, "b": -1, "#": 1}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Phrase:
    """Eight bars of three voices, and how loud (MIDI velocity) they begin and end."""

    name: str
    melody: str
    accompaniment: str
    inner: str
    velocity_first: int
    velocity_last: int


@dataclass(frozen=True, slots=True, kw_only=True)
class _Voice:
    """One track of the file: its name, channel (0 to 15) and loudness against the melody."""

    name: str
    channel: int
    velocity_offset: int


@dataclass(frozen=True, slots=True, kw_only=True)
class _Note:
    """One note in ticks from the start of the tune; pitch and velocity are MIDI numbers."""

    start_tick: int
    length_ticks: int
    pitch: int
    velocity: int


_PHRASES = (
    _Phrase(
        name="A",
        melody="A5 Bb5 A5 G5 A5 C6 | D6 D6 D6 C6/3 | Bb5 C6 Bb5 A5 Bb5 D6 | E6 E6 E6 D6/2 C6 |"
        "F6/2 G6 F6 E6 D6 | D6/2 E6 D6 C6 Bb5 | A5/2 C6 Bb5/2 G5 | A5/3 r F5 G5",
        accompaniment="F4/2 C5 A4/3 | Bb4/2 F5 A4+C5/3 | G4/2 D5 Bb4/3 | C4/2 G4 Bb4/3 |"
        "F4/2 A4 D5/3 | G4/2 D5 Bb4/3 | C4/2 A4 G4 E5/2 | F4/2 C5 A4/3",
        inner="r/6 | r/6 | r/6 | r/6 | r/6 | r/6 | r/6 | r/6",
        velocity_first=66,
        velocity_last=70,
    ),
    _Phrase(
        name="A'",
        melody="A5 Bb5 A5 G5 A5 C6 | D6 D6 D6 C6/3 | Bb5 C6 Bb5 A5 Bb5 D6 | E6 E6 E6 G6/2 E6 |"
        "G6/2 F6 E6 F6 D6 | D6 C6 Bb5 A5 Bb5 D6 | C6 Bb5 A5 Bb5 A5 G5 | F5/3 A5 Bb5 C6",
        accompaniment="F4/3 A4+C5/3 | Bb4/3 A4+C5/3 | G4/3 Bb4+D5/3 | C4/2 G4 Bb4+E5/3 |"
        "F4/2 A4 D5/3 | G4/2 D5 Bb4/3 | C4/2 A4 G4 Bb4/2 | F4/2 A4 C5/3",
        inner="r/6 | F5/6 | r/6 | G5 G5 G5 r/3 | A5/3 r/3 | G5/3 F5/3 | F5/3 E5/3 | r/6",
        velocity_first=70,
        velocity_last=74,
    ),
    _Phrase(
        name="B",
        melody="D6/3 D6 E6 F6 | G6/2 F6 E6/3 | Bb5/3 Bb5 C6 D6 | E6/2 D6 C6/3 |"
        "C6/2 D6 E6/2 C6 | D6/2 E6 F6/2 D6 | G6 F6 E6 D6/2 B5 |"
        "C6/3 G5/.5 A5/.5 Bb5/.5 C6/.5 Bb5/.5 G5/.5",
        accompaniment="D4/3 F4+A4/3 | A4/3 C#5+E5/3 | Bb4/3 D5+F5/3 | F4/3 A4+C5/3 |"
        "A4/3 C5+E5/3 | F4/3 A4+D5/3 | G4/3 B4+F5/3 | C4+G4+E5/3 Bb4/3",
        inner="A5/3 r/3 | A5/6 | r/6 | A5/6 | A5/3 G5/3 | A5/6 | r/3 G5/3 | r/6",
        velocity_first=60,
        velocity_last=66,
    ),
    _Phrase(
        name="A''",
        melody="A5 Bb5 A5 G5 A5 C6 | D6/.5 D6/.5 D6/.5 D6/.5 D6 C6/3 | Bb5 C6 Bb5 A5 Bb5 D6 |"
        "E6/.5 E6/.5 E6/.5 E6/.5 E6 D6/2 C6 | F6/2 G6 A6 G6 F6 | A6 G6 F#6 G6/2 D6 |"
        "C6 A5 Bb5 G5/2 G5 | F5/3 G5 A5 Bb5",
        accompaniment="F4/2 A4 C5/2 F5 | Bb4/2 D5 A4/2 C5 | G4/2 Bb4 D5/2 F5 | C4/2 G4 Bb4/2 E5 |"
        "F4/2 A4 C5/2 F5 | C5/2 A4 Bb4/2 G4 | A4/3 C4+Bb4/3 | F4/3 A4+C5/3",
        inner="r/6 | F5/6 | r/6 | G5 G5 G5 G5/3 | A5/6 | D6/3 Bb5/3 | F5/3 E5/3 | r/6",
        velocity_first=76,
        velocity_last=80,
    ),
    _Phrase(
        name="coda",
        melody="C6 C6 C6 A5/3 | D6 D6 D6 Bb5/3 | E6 E6 E6 C6/3 |"
        "F5/.5 G5/.5 A5/.5 Bb5/.5 C6/.5 D6/.5 E6/.5 F6/.5 G6/.5 A6/.5 C7 | C7 A6 G6 F6 E6 D6 |"
        "C6/2 D6 Bb5/2 G5 | A5 Bb5 A5 G5 C6 E6 | F6/6",
        accompaniment="F4+A4/3 C5/3 | F4+Bb4/3 D5/3 | C4+G4/3 Bb4/3 | F4/3 A4+C5/3 |"
        "C5/2 A4 D5/2 Bb4 | C4/2 A4 G4/2 Bb4 | F4/2 C5 C4/2 Bb4 | F4+A4+C5/6",
        inner="F5/6 | F5/6 | G5 G5 G5 E5/3 | r/6 | F5/6 | F5/3 E5/3 | F5/3 E5/3 | A5/6",
        velocity_first=78,
        velocity_last=58,
    ),
)

_VOICES = (
    _Voice(name="melody", channel=0, velocity_offset=0),
    _Voice(name="accompaniment", channel=1, velocity_offset=-16),
    _Voice(name="inner voice", channel=2, velocity_offset=-20),
)

# (eighths from the start, dotted quarters a minute): a tempo at bars 25, slower from bar 37 on.
_TEMPI = (
    (0 * 6, 84),
    (16 * 6, 76),
    (23 * 6, 70),
    (24 * 6, 84),
    (36 * 6, 72),
    (37 * 6, 63),
    (38 * 6, 54),
    (38 * 6 + 3, 46),
)


def demo_tune() -> bytes:
    """Write the demo tune as a Standard MIDI File, format 1, 480 ticks a quarter.

    Track 0 holds title, time signature, key and tempi; tracks 1 to 3 hold melody, accompaniment and inner
    voice on channels 1 to 3.

    Returns:
        The whole file; the same bytes on every call.
    """
    tune = mido.MidiFile(type=1, ticks_per_beat=_PULSES_PER_QUARTER)
    tune.tracks.append(_conductor_track())
    tune.tracks.extend(_voice_track(voice) for voice in _VOICES)
    written = io.BytesIO()
    tune.save(file=written)
    return written.getvalue()


def _conductor_track() -> mido.MidiTrack:
    track = mido.MidiTrack()
    track.append(mido.MetaMessage("track_name", name=TITLE, time=0))
    track.append(mido.MetaMessage("time_signature", numerator=6, denominator=8, time=0))
    track.append(mido.MetaMessage("key_signature", key="F", time=0))
    previous_eighth = 0
    for eighth, dotted_quarters_per_minute in _TEMPI:
        # A dotted quarter is 3/2 of a quarter: 60,000,000 us / (3/2) = 40,000,000 us.
        microseconds = round(40_000_000 / dotted_quarters_per_minute)
        delta_ticks = (eighth - previous_eighth) * _TICKS_PER_EIGHTH
        track.append(mido.MetaMessage("set_tempo", tempo=microseconds, time=delta_ticks))
        previous_eighth = eighth
    return track


def _voice_track(voice: _Voice) -> mido.MidiTrack:
    track = mido.MidiTrack()
    track.append(mido.MetaMessage("track_name", name=voice.name, time=0))
    track.append(mido.Message("program_change", channel=voice.channel, program=_PROGRAM, time=0))
    # At one tick notes end before notes begin, so that a repeated pitch is never cut short.
    events: list[tuple[int, int, int, int]] = []
    for note in _notes(voice):
        events.append((note.start_tick, 1, note.pitch, note.velocity))
        events.append((note.start_tick + note.length_ticks, 0, note.pitch, 0))
    previous_tick = 0
    for tick, begins, pitch, velocity in sorted(events):
        kind = "note_on" if begins else "note_off"
        delta_ticks = tick - previous_tick
        message = mido.Message(kind, channel=voice.channel, note=pitch, velocity=velocity, time=delta_ticks)
        track.append(message)
        previous_tick = tick
    return track


def _notes(voice: _Voice) -> list[_Note]:
    notes: list[_Note] = []
    for place, phrase in enumerate(_PHRASES):
        written = {
            "melody": phrase.melody,
            "accompaniment": phrase.accompaniment,
            "inner voice": phrase.inner,
        }
        first_eighth = place * _BARS_PER_PHRASE * _EIGHTHS_PER_BAR
        for start, length, pitches in _parse_phrase(written[voice.name], phrase.name):
            velocity = _velocity(phrase, start) + voice.velocity_offset
            start_tick = int((first_eighth + start) * _TICKS_PER_EIGHTH)
            length_ticks = int(length * _TICKS_PER_EIGHTH * _SOUNDED_PART)
            notes.extend(
                _Note(start_tick=start_tick, length_ticks=length_ticks, pitch=pitch, velocity=velocity)
                for pitch in pitches
            )
    return notes


def _velocity(phrase: _Phrase, start_eighth: Fraction) -> int:
    """Loudness of a place in a phrase: a slope, an arch over eight bars, and the two stresses of 6/8."""
    part = start_eighth / (_BARS_PER_PHRASE * _EIGHTHS_PER_BAR)
    slope = phrase.velocity_first + (phrase.velocity_last - phrase.velocity_first) * part
    arch = 40 * part * (1 - part)
    in_bar = start_eighth % _EIGHTHS_PER_BAR
    stress = {0: 10, 3: 5}.get(int(in_bar), 0) if in_bar.denominator == 1 else -3
    return round(slope + arch + stress)


def _parse_phrase(written: str, name: str) -> list[tuple[Fraction, Fraction, tuple[int, ...]]]:
    """Read a phrase as (start, length, pitches), both times in eighths from the start of the phrase."""
    read: list[tuple[Fraction, Fraction, tuple[int, ...]]] = []
    start = Fraction(0)
    bars = written.split("|")
    if len(bars) != _BARS_PER_PHRASE:
        raise ValueError(f"phrase {name}: {_BARS_PER_PHRASE} bars wanted, {len(bars)} written")
    for number, bar in enumerate(bars, start=1):
        for token in bar.split():
            names, _, length_written = token.partition("/")
            length = Fraction(length_written or "1")
            if names != "r":
                read.append((start, length, tuple(_pitch_number(one) for one in names.split("+"))))
            start += length
        if start != number * _EIGHTHS_PER_BAR:
            raise ValueError(f"phrase {name}, bar {number}: ends {start} eighths in, not {number * _EIGHTHS_PER_BAR}")
    return read


def _pitch_number(name: str) -> int:
    """MIDI number of a scientific pitch name; C4 is 60, the middle C of the MIDI 1.0 specification."""
    letter, accidental, octave = name[0], name[1:-1], int(name[-1])
    return 12 * (octave + 1) + _SEMITONES[letter] + _ACCIDENTALS[accidental]


def main(arguments: list[str] | None = None) -> int:
    """Write the tune to OUT, by default to the file that ships beside this module.

    Args:
        arguments: Command words after the program name; those of the process if None.

    Returns:
        0 when written, 2 when the file could not be written.
    """
    parser = argparse.ArgumentParser(prog="python -m service.demo.compose", description=f"Write {TITLE!r} as MIDI.")
    parser.add_argument("out", nargs="?", type=Path, default=TUNE_PATH, help="file to write (default: %(default)s)")
    out: Path = parser.parse_args(arguments).out
    try:
        out.write_bytes(demo_tune())
    except OSError as error:
        sys.stderr.write(f"{out}: cannot be written ({error.strerror}); name a file in a directory that exists\n")
        return 2
    sys.stdout.write(f"{out}: {TITLE}\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
