"""The read stage: MIDI bytes in, the notes at exact times out."""

import numpy as np

from layout.errors import MidiReadError
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.read.container import Chunk, Contents, read_contents
from layout.read.limits import LIMITS
from layout.read.messages import ChannelStatuses
from layout.read.metre import bars_and_beats
from layout.read.notes import NoteCollector
from layout.read.oddities import Oddities, Oddity
from layout.read.score import Score
from layout.read.tempo import TempoMap, tempo_map, tick_unit
from layout.read.track import SequenceWalk

_INDEPENDENT_SEQUENCES = 2  # the format whose tracks are sequences of their own


def read_score(tune: bytes, *, sequence: int = 1) -> Score:
    """Read a Standard MIDI File (formats 0, 1, 2; RP-001), bare or in one RIFF wrapper.

    Every note-on with a velocity is a note, also one of no length. Which note-off ends it is told in
    layout/read/notes.py. Notes of the percussion channel are counted and left out. Notes of one
    onset, pitch and channel keep their order in the file.

    Args:
        tune: The whole file.
        sequence: Which sequence of a format 2 file, from 1; formats 0 and 1 hold one.

    Returns:
        The notes sorted by (onset, pitch, channel); no notes is not an error.

    Raises:
        MidiReadError: The bytes are no such file, a limit is passed, or there is no such sequence.
    """
    if len(tune) > LIMITS.file_bytes:
        raise MidiReadError(
            byte_offset=LIMITS.file_bytes,
            found=f"a file of {len(tune)} bytes",
            expected=f"at most {LIMITS.file_bytes} bytes",
            remedy="leave out recorded sound and other data, or cut the tune to the passage wanted",
        )
    oddities = Oddities()
    contents = read_contents(tune, oddities)
    unit = tick_unit(contents.division, at=contents.header_at + 12)
    walk = SequenceWalk(ChannelStatuses(), oddities)
    for track in _chosen_tracks(contents, sequence, oddities):
        walk.walk(tune, track)
    walk.notes.end_sequence(walk.last_tick, oddities)
    times = tempo_map(unit, walk.tempi)
    _check_length(walk.notes, times)
    return _score(contents, sequence, walk, times, oddities)


def _chosen_tracks(contents: Contents, sequence: int, oddities: Oddities) -> tuple[Chunk, ...]:
    """The tracks of the sequence asked for: one of a format 2 file, all of any other."""
    count = _sequence_count(contents)
    if not 1 <= sequence <= count:
        raise MidiReadError(
            byte_offset=contents.header_at + 10,
            found=f"a format {contents.midi_format} file of {count} sequence{'s' if count > 1 else ''}",
            expected=f"sequence {sequence}, which was asked for",
            remedy=f"ask for a sequence from 1 to {count}",
        )
    if contents.midi_format == _INDEPENDENT_SEQUENCES:
        oddities.say(f"This is a format 2 file: sequence {sequence} of {count} was read.", at=contents.header_at + 8)
        return contents.tracks[sequence - 1 : sequence]
    if contents.midi_format == 0 and len(contents.tracks) > 1:
        oddities.meet(Oddity.FORMAT_0_WITH_TRACKS, at=contents.header_at + 8)
    return contents.tracks


def _sequence_count(contents: Contents) -> int:
    return len(contents.tracks) if contents.midi_format == _INDEPENDENT_SEQUENCES else 1


def _check_length(notes: NoteCollector, times: TempoMap) -> None:
    """Refuse a tune whose last onset is past the limit, compared exactly."""
    if not notes.onset_tick:
        return
    last = max(range(len(notes.onset_tick)), key=notes.onset_tick.__getitem__)
    [exact] = times.exact_times(np.array([notes.onset_tick[last]], dtype=np.int64))
    if exact > LIMITS.last_onset_s * times.denominator:
        raise MidiReadError(
            byte_offset=notes.byte_offset[last],
            found=f"a note that begins after {exact / times.denominator:.0f} s",
            expected=f"at most {LIMITS.last_onset_s} s (4 hours) to the last onset",
            remedy="cut the tune to the passage the disc is to play, and look for a tempo or a pause far too long",
        )


def _score(contents: Contents, sequence: int, walk: SequenceWalk, times: TempoMap, oddities: Oddities) -> Score:
    """Sort the notes and put the value together."""
    notes = walk.notes
    key = np.array(notes.key, dtype=np.int64)
    onset_tick = np.array(notes.onset_tick, dtype=np.int64)
    order = np.lexsort((key >> 7, key & 0x7F, onset_tick))
    begin = times.exact_times(onset_tick[order])
    last_onset_tick = int(onset_tick.max()) if len(onset_tick) else None
    bars = bars_and_beats(walk.signatures, times, last_onset_tick, oddities)
    end = times.exact_times(np.array(notes.end_tick, dtype=np.int64)[order])
    return Score(
        onset_s=frozen_floats(times.seconds(begin)),
        duration_s=frozen_floats(times.seconds(end - begin)),
        pitch=frozen_ints(key[order] & 0x7F),
        velocity=frozen_ints(np.array(notes.velocity, dtype=np.int64)[order]),
        channel=frozen_ints((key[order] >> 7) + 1),
        bar_s=bars.bar_s,
        beat_s=bars.beat_s,
        title=walk.title,
        midi_format=contents.midi_format,
        sequence=sequence,
        sequence_count=_sequence_count(contents),
        percussion_count=notes.percussion_count,
        warnings=oddities.sentences(),
    )
