"""hearing.mid, read back by readers that did not write it."""

import io
from typing import Any

import pretty_midi  # type: ignore[import-untyped]
import pytest
import symusic

from layout.hear import Asked
from layout.hear.hearing import Hearing
from layout.write.hearing_midi import TICKS_PER_S, write_hearing_midi
from tests.layout.hear.sounds import MUSIC_BEGINS_S, hearing_of, performance_of, quick_with


def read(hearing: Hearing) -> list[tuple[float, float, int]]:
    """(begin, end, key) of every note, in seconds."""
    score: Any = symusic.Score.from_midi(write_hearing_midi(hearing), ttype="second")
    notes = [(note.start, note.end, note.pitch) for track in score.tracks for note in track.notes]
    return sorted((float(start), float(end), pitch) for start, end, pitch in notes)


def test_a_tick_is_at_most_a_tenth_of_a_millisecond() -> None:
    assert 1 / TICKS_PER_S <= 0.0001


def test_notes_begin_where_teeth_are_let_go_and_end_where_they_are_silent() -> None:
    # Track 1: damper touched 1 mm before the pluck at 52.36 mm/s, 19.1 ms, and 6 ms to still it.
    hearing = hearing_of(quick_with({"tooth_quality": 20_000}), [(1, 0.12345), (1, 1.0)])

    first, second = read(hearing)

    assert first == pytest.approx((MUSIC_BEGINS_S + 0.12345, MUSIC_BEGINS_S + 1.0 - 0.0191 + 0.006, 72), abs=1e-4)
    assert second[0] == pytest.approx(MUSIC_BEGINS_S + 1.0, abs=1e-4)


def test_a_note_nothing_silences_ends_when_it_has_fallen_by_60_db() -> None:
    # Q 700 at 523.25 Hz: 6.908·700/(π·523.25) = 2.942 s.
    [note] = read(hearing_of(quick_with({"tooth_quality": 700}), [(1, 0.0)]))

    assert note[1] - note[0] == pytest.approx(2.942, abs=0.001)


def test_tracks_of_one_pitch_sound_beside_each_other_and_two_teeth_of_a_track_are_one_note() -> None:
    teeth = [
        {"tooth": 1, "track": 1, "pitch": "C5"},
        {"tooth": 2, "track": 2, "pitch": "C5"},
        {"tooth": 3, "track": 2, "pitch": "C5", "cents": 6},
    ]
    hearing = hearing_of(quick_with({"teeth": teeth, "tooth_quality": 20_000}), [(1, 0.0), (2, 0.5), (1, 1.0)])

    assert len(hearing.rings) == 4
    assert [round(begin - MUSIC_BEGINS_S, 4) for begin, _, _ in read(hearing)] == [0.0, 0.5, 1.0]
    assert read(hearing)[1][1] > MUSIC_BEGINS_S + 1.0  # not cut by the other track's end
    by_channel: Any = symusic.Score.from_midi(write_hearing_midi(hearing))
    assert sorted(track.note_num() for track in by_channel.tracks) == [1, 2]


def test_the_file_tells_title_length_and_voice() -> None:
    movement = quick_with({})
    hearing = hearing_of(movement, [(1, 0.0)])

    midi = pretty_midi.PrettyMIDI(io.BytesIO(write_hearing_midi(hearing)))

    assert [instrument.program for instrument in midi.instruments] == [10]  # General MIDI 11: music box
    assert performance_of(movement, []).title.encode() in write_hearing_midi(hearing)


def test_a_disc_without_projections_is_a_file_without_notes() -> None:
    assert read(hearing_of(quick_with({}), [])) == []


def test_waits_of_hours_fit() -> None:
    # 0x0FFFFFFF ticks of 0.05 ms are 3.7 hours.
    movement = quick_with({"revolution_s": 86_400, "fastest_revolution_s": 6})

    [note] = read(hearing_of(movement, [(1, 40_000.0)], Asked()))

    assert note[0] == pytest.approx(47_200.0, abs=0.01)  # 30° of the turn are 7,200 s
