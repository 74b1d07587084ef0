"""Notes and onsets against readers other than ours: symusic, pretty_midi, and mido's own decoding.

mido gives every message with its tick; from those the test works out, in its own words, the notes and
what each library is known to leave out. Nothing is loosened: a library must differ in exactly that.
"""

import io
import random
from collections import defaultdict
from typing import NamedTuple

import mido
import numpy as np
import pretty_midi
import pytest
import symusic

from layout.read import Score, read_score
from tests.outside.pieces import PIECE_NAMES, public_domain_piece

TOLERANCE_S = 0.5e-3


class Strike(NamedTuple):
    """A note-on with a velocity."""

    tick: int
    pitch: int


class Stream(NamedTuple):
    """The note-ons of one pitch and channel of one track, and what two libraries leave out of them."""

    strikes: list[Strike]
    without_note_off_in_turn: list[Strike]
    without_later_note_off: list[Strike]


def streams_of(midi: mido.MidiFile) -> list[Stream]:
    """Every pitch and channel of every track, percussion left out."""
    events: defaultdict[tuple[int, int, int], list[tuple[int, bool]]] = defaultdict(list)
    for number, track in enumerate(midi.tracks):
        tick = 0
        for message in track:
            tick += message.time
            if message.type in ("note_on", "note_off") and message.channel != 9:
                begins = message.type == "note_on" and message.velocity > 0
                events[number, message.channel, message.note].append((tick, begins))
    return [stream_of(pitch, found) for (_, _, pitch), found in events.items()]


def stream_of(pitch: int, events: list[tuple[int, bool]]) -> Stream:
    """The notes of one pitch, from (tick, begins) in file order."""
    strikes = [Strike(tick, pitch) for tick, begins in events if begins]
    in_turn: list[Strike] = []
    later: list[Strike] = []
    for tick, begins in events:
        if begins:
            in_turn.append(Strike(tick, pitch))
            later.append(Strike(tick, pitch))
        else:
            in_turn = in_turn[1:]
            later = [strike for strike in later if strike.tick == tick]
    return Stream(strikes, in_turn, later)


def seconds_of(midi: mido.MidiFile, ticks: list[int]) -> list[float]:
    """Ticks in seconds, by mido's tempo arithmetic over the tempo events of all tracks, step by step."""
    tempi = [
        (tick, message.tempo)
        for tick, message in absolute(mido.merge_tracks(midi.tracks))
        if message.type == "set_tempo"
    ]
    seconds = []
    for wanted in ticks:
        now, then_tick, tempo = 0.0, 0, 500_000
        for tick, next_tempo in tempi:
            if tick > wanted:
                break
            now += mido.tick2second(tick - then_tick, midi.ticks_per_beat, tempo)
            then_tick, tempo = tick, next_tempo
        seconds.append(now + mido.tick2second(wanted - then_tick, midi.ticks_per_beat, tempo))
    return seconds


def absolute(track: mido.MidiTrack) -> list[tuple[int, mido.Message]]:
    """The messages with their ticks from the start."""
    tick, messages = 0, []
    for message in track:
        tick += message.time
        messages.append((tick, message))
    return messages


def assert_same_onsets(found: list[tuple[int, float]], wanted: list[tuple[int, float]]) -> None:
    """The same (pitch, onset in seconds), each within half a millisecond."""
    found, wanted = sorted(found), sorted(wanted)
    assert [pitch for pitch, _ in found] == [pitch for pitch, _ in wanted]
    apart = np.abs(np.array([onset for _, onset in found]) - np.array([onset for _, onset in wanted]))
    assert not len(apart) or apart.max() <= TOLERANCE_S


def struck_in(midi: mido.MidiFile) -> list[tuple[int, float]]:
    """(pitch, onset) of every note of the file."""
    strikes = [strike for stream in streams_of(midi) for strike in stream.strikes]
    seconds = seconds_of(midi, [strike.tick for strike in strikes])
    return [(strike.pitch, onset) for strike, onset in zip(strikes, seconds, strict=True)]


def onsets_of(score: Score) -> list[tuple[int, float]]:
    """(pitch, onset) of every note of a score."""
    return list(zip(score.pitch.tolist(), score.onset_s.tolist(), strict=True))


def generated_piece(seed: int, *, tempo_tracks: int) -> bytes:
    """A piece of three tracks with percussion, notes that touch and overlap, and many tempo changes.

    Tempo events stand in the first `tempo_tracks` tracks, no two at one tick.
    """
    rng = random.Random(seed)
    midi = mido.MidiFile(type=1, ticks_per_beat=rng.choice([96, 120, 480, 960]))
    tempo_ticks = rng.sample(range(12_000), 60)
    for number in range(3):
        events: list[tuple[int, mido.Message | mido.MetaMessage]] = []
        for tick in tempo_ticks[number::tempo_tracks] if number < tempo_tracks else []:
            events.append((tick, mido.MetaMessage("set_tempo", tempo=rng.randrange(200_000, 1_500_000))))
        for _ in range(200):
            begin, length = rng.randrange(12_000), rng.randrange(1, 400)
            named = {"channel": rng.choice([number, number, 9]), "note": rng.randrange(48, 84)}
            events.append((begin, mido.Message("note_on", velocity=rng.randrange(1, 128), **named)))
            events.append((begin + length, mido.Message(rng.choice(["note_on", "note_off"]), velocity=0, **named)))
        events.sort(key=lambda event: event[0])
        track, now = mido.MidiTrack(), 0
        for tick, message in events:
            track.append(message.copy(time=tick - now))
            now = tick
        midi.tracks.append(track)
    file = io.BytesIO()
    midi.save(file=file)
    return file.getvalue()


def piece_called(name: str) -> bytes:
    """A real piece, or a generated one where the name is "generated" and a seed."""
    kind, _, seed = name.partition(" ")
    return generated_piece(int(seed), tempo_tracks=1) if kind == "generated" else public_domain_piece(name)


NAMES = (*PIECE_NAMES, *(f"generated {seed}" for seed in range(4)))


@pytest.mark.parametrize("name", NAMES)
def test_every_note_mido_finds_is_read_at_its_onset(name: str) -> None:
    tune = piece_called(name)
    midi = mido.MidiFile(file=io.BytesIO(tune))

    score = read_score(tune)

    assert_same_onsets(onsets_of(score), struck_in(midi))


@pytest.mark.parametrize("name", NAMES)
def test_symusic_finds_our_notes_but_those_without_a_note_off_of_their_own(name: str) -> None:
    tune = piece_called(name)
    streams = streams_of(mido.MidiFile(file=io.BytesIO(tune)))
    read = symusic.Score.from_midi(tune, ttype="second")
    found = [(note.pitch, note.start) for track in read.tracks if not track.is_drum for note in track.notes]

    # symusic ends notes first in, first out and drops what is left over at the end of the track. A note
    # whose note-off is missing, or stands before it, is nevertheless struck: it is in our score.
    dropped = [stream.without_note_off_in_turn for stream in streams]
    score = read_score(tune)

    assert_same_onsets(found, left_over(score, dropped, tune))


@pytest.mark.parametrize("name", NAMES)
def test_pretty_midi_finds_our_notes_but_those_without_a_later_note_off(name: str) -> None:
    tune = piece_called(name)
    streams = streams_of(mido.MidiFile(file=io.BytesIO(tune)))
    read = pretty_midi.PrettyMIDI(io.BytesIO(tune))
    found = [(note.pitch, note.start) for part in read.instruments if not part.is_drum for note in part.notes]

    # A note-off ends every note of the pitch in pretty_midi but those begun in its own tick; what is left
    # over at the end of the track is dropped. Those notes are struck too: they are in our score.
    dropped = [stream.without_later_note_off for stream in streams]
    score = read_score(tune)

    assert_same_onsets(found, left_over(score, dropped, tune))


def left_over(score: Score, dropped: list[list[Strike]], tune: bytes) -> list[tuple[int, float]]:
    """Our notes without the nearest one to each of those dropped, which must be there."""
    strikes = [strike for group in dropped for strike in group]
    midi = mido.MidiFile(file=io.BytesIO(tune))
    onsets = onsets_of(score)
    for strike, onset_s in zip(strikes, seconds_of(midi, [strike.tick for strike in strikes]), strict=True):
        ours = min((note for note in onsets if note[0] == strike.pitch), key=lambda note: abs(note[1] - onset_s))
        assert abs(ours[1] - onset_s) <= TOLERANCE_S
        onsets.remove(ours)
    return onsets


@pytest.mark.parametrize("seed", range(4))
def test_tempo_events_in_several_tracks_are_merged_as_symusic_and_mido_merge_them(seed: int) -> None:
    # pretty_midi is left out: it reads tempo events of the first track only, and says so in a warning.
    tune = generated_piece(100 + seed, tempo_tracks=3)
    midi = mido.MidiFile(file=io.BytesIO(tune))
    read = symusic.Score.from_midi(tune, ttype="second")
    found = [(note.pitch, note.start) for track in read.tracks if not track.is_drum for note in track.notes]

    score = read_score(tune)

    assert_same_onsets(onsets_of(score), struck_in(midi))
    assert_same_onsets(found, onsets_of(score))


@pytest.mark.parametrize("seed", range(4))
def test_percussion_left_out_is_what_symusic_calls_drums(seed: int) -> None:
    tune = generated_piece(seed, tempo_tracks=1)
    read = symusic.Score.from_midi(tune, ttype="tick")
    drums = sum(len(track.notes) for track in read.tracks if track.is_drum)

    score = read_score(tune)

    assert score.percussion_count == drums > 0
