"""Laws of reading, on files that nobody wrote by hand."""

import io
from typing import NamedTuple

import mido
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.errors import MidiReadError
from layout.read import Score, read_score
from tests.layout.read.hexdump import midi_file, riff
from tests.layout.read.test_specification_examples import EXAMPLE_FORMAT_0, EXAMPLE_FORMAT_1
from tests.thorough import tried


class Written(NamedTuple):
    """A note as it is written: ticks of 1 ms (480 per quarter note of 480 ms)."""

    onset_tick: int
    pitch: int
    channel: int
    velocity: int
    length_ticks: int


@st.composite
def written_notes(draw: st.DrawFn) -> list[Written]:
    """Up to thirty notes that do not overlap on one pitch and channel, in any order, percussion left out."""
    notes = draw(
        st.lists(
            st.builds(
                Written,
                st.integers(0, 20_000),
                st.integers(0, 127),
                st.integers(1, 16).filter(lambda channel: channel != 10),
                st.integers(1, 127),
                st.integers(0, 2000),
            ),
            max_size=30,
        )
    )
    kept: list[Written] = []
    for note in notes:
        others = (other for other in kept if (other.pitch, other.channel) == (note.pitch, note.channel))
        if all(end_of(other) < note.onset_tick or end_of(note) < other.onset_tick for other in others):
            kept.append(note)
    return kept


def end_of(note: Written) -> int:
    """The tick of its note-off."""
    return note.onset_tick + note.length_ticks


def written_file(notes: list[Written], *, tracks: int, midi_format: int) -> bytes:
    """The notes, dealt out over tracks, written by mido."""
    midi = mido.MidiFile(type=midi_format, ticks_per_beat=480)
    for number in range(tracks):
        events = [mido.MetaMessage("set_tempo", tempo=480_000, time=0)] if number == 0 else []
        for note in notes[number::tracks]:
            named = {"channel": note.channel - 1, "note": note.pitch}
            events.append(mido.Message("note_on", velocity=note.velocity, time=note.onset_tick, **named))
            events.append(mido.Message("note_off", time=end_of(note), **named))
        # Stable: a note of no length keeps its note-on before its note-off.
        events.sort(key=lambda event: event.time)
        track = mido.MidiTrack()
        now = 0
        for event in events:
            track.append(event.copy(time=event.time - now))
            now = event.time
        midi.tracks.append(track)
    file = io.BytesIO()
    midi.save(file=file)
    return file.getvalue()


def read_back(score: Score) -> list[Written]:
    """The notes of a score in ticks of 1 ms."""
    onset_tick, length_ticks = np.rint(score.onset_s * 1000), np.rint(score.duration_s * 1000)
    columns = (onset_tick.astype(int), score.pitch, score.channel, score.velocity, length_ticks.astype(int))
    return [Written(*map(int, row)) for row in zip(*columns, strict=True)]


@given(notes=written_notes(), tracks=st.integers(1, 4))
@settings(deadline=None)
def test_notes_written_by_mido_are_read_as_they_were_written(notes: list[Written], tracks: int) -> None:
    tune = written_file(notes, tracks=tracks, midi_format=int(tracks > 1))

    score = read_score(tune)

    assert read_back(score) == sorted(notes)
    assert score.warnings == ()


@given(notes=written_notes())
@settings(deadline=None)
def test_the_format_and_the_wrapper_do_not_change_the_notes(notes: list[Written]) -> None:
    one = written_file(notes, tracks=1, midi_format=0)
    several = written_file(notes, tracks=3, midi_format=1)
    length = len(several).to_bytes(4, "little")
    wrapped = riff(b"data" + length + several + b"\0" * (len(several) % 2))

    scores = [read_score(tune) for tune in (one, several, wrapped)]

    assert read_back(scores[0]) == read_back(scores[1]) == read_back(scores[2])


def score_or_error(tune: bytes) -> Score | MidiReadError:
    """Read; a MidiReadError is an answer too, anything else is not."""
    try:
        return read_score(tune)
    except MidiReadError as error:
        return error


def assert_score_or_error(tune: bytes) -> None:
    """Read, and check what a Score and an error promise."""
    score = score_or_error(tune)
    if isinstance(score, MidiReadError):
        assert 0 <= score.byte_offset <= len(tune)
        return
    order = list(zip(score.onset_s.tolist(), score.pitch.tolist(), score.channel.tolist(), strict=True))
    assert order == sorted(order)
    assert np.all(score.duration_s >= 0)
    assert np.all((score.velocity >= 1) & (score.velocity <= 127))
    assert np.all((score.pitch >= 0) & (score.pitch <= 127))
    assert not np.any(score.channel == 10)


@given(tune=st.binary(max_size=200))
def test_any_bytes_give_a_score_or_an_error(tune: bytes) -> None:
    assert_score_or_error(tune)


@given(
    track=st.binary(max_size=200),
    midi_format=st.integers(0, 3),
    division=st.integers(0, 0xFFFF),
    count=st.sampled_from([0, 1, 2]),
)
def test_any_bytes_in_a_track_give_a_score_or_an_error(
    track: bytes, midi_format: int, division: int, count: int
) -> None:
    tune = midi_file(track, midi_format=midi_format, division=division, count=count)

    assert_score_or_error(tune)


SOUND_FILES = [
    EXAMPLE_FORMAT_0,
    EXAMPLE_FORMAT_1,
    midi_file("00 FF 03 02 4142 00 F0 02 7E F7 60 90 3C 40 60 3C 00 00 FF 2F 00", midi_format=2, division=0xE728),
    riff(b"data" + (len(EXAMPLE_FORMAT_1)).to_bytes(4, "little") + EXAMPLE_FORMAT_1),
]


@given(data=st.data(), sound=st.sampled_from(SOUND_FILES))
@settings(max_examples=tried(400))
def test_a_sound_file_with_bytes_changed_gives_a_score_or_an_error(data: st.DataObject, sound: bytes) -> None:
    tune = bytearray(sound)
    places = data.draw(st.lists(st.integers(0, len(tune) - 1), min_size=1, max_size=4))
    for place in places:
        tune[place] = data.draw(st.integers(0, 255))

    assert_score_or_error(bytes(tune))


@given(data=st.data(), sound=st.sampled_from(SOUND_FILES))
def test_a_sound_file_with_bytes_put_in_or_taken_out_gives_a_score_or_an_error(
    data: st.DataObject, sound: bytes
) -> None:
    begin = data.draw(st.integers(0, len(sound)))
    end = data.draw(st.integers(begin, len(sound)))
    tune = sound[:begin] + data.draw(st.binary(max_size=8)) + sound[end:]

    assert_score_or_error(tune)


@pytest.mark.parametrize("sound", SOUND_FILES, ids=["format 0", "format 1", "format 2 in frames", "wrapped"])
def test_every_byte_of_a_sound_file_set_to_every_bound_gives_a_score_or_an_error(sound: bytes) -> None:
    for place in range(len(sound)):
        for value in (0x00, 0x7F, 0x80, 0xF7, 0xFF):
            assert_score_or_error(sound[:place] + bytes([value]) + sound[place + 1 :])
