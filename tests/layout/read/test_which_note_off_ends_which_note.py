from layout.read import Score, read_score
from tests.layout.read.hexdump import midi_file

# Files here have 96 ticks per quarter note and no tempo event: 96 ticks are 0.5 s, 24 ticks 0.125 s.


def spans_of(score: Score) -> list[tuple[int, float, float]]:
    """Pitch, onset and duration of every note."""
    columns = (score.pitch.tolist(), score.onset_s.tolist(), score.duration_s.tolist())
    return list(zip(*columns, strict=True))


def test_a_note_with_velocity_zero_ends_the_note() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        60 90 3C 00  # tick 96: velocity 0
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]
    assert score.warnings == ()


def test_running_status_goes_on_over_many_events() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        60 3C 00     # tick 96: ends it
        00 3E 41     # note on 62
        60 3E 00     # tick 192: ends it
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5), (62, 0.5, 0.5)]
    assert score.velocity.tolist() == [0x40, 0x41]


def test_other_channel_messages_are_skipped_and_take_running_status() -> None:
    tune = midi_file("""
        00 A0 3C 40  # polyphonic pressure, two data bytes
        00 B0 07 64  # control change, two
        00 C0 05     # programme change, one
        00 D0 40     # channel pressure, one
        00 41        # running status: channel pressure again
        00 E0 00 40  # pitch bend, two
        60 90 3C 40  # tick 96: note on 60
        60 80 3C 40  # tick 192: note off
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.5, 0.5)]


def test_a_note_on_of_a_sounding_pitch_keeps_both_and_note_offs_end_the_oldest_first() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        18 90 3C 50  # tick 24: again, while it sounds
        18 80 3C 40  # tick 48: ends the first
        30 80 3C 40  # tick 96: ends the second
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    # first 0 to tick 48 = 0.25 s; second tick 24 = 0.125 s to tick 96 = 0.5 s
    assert spans_of(score) == [(60, 0.0, 0.25), (60, 0.125, 0.375)]


def test_a_note_off_on_another_channel_ends_nothing() -> None:
    tune = midi_file("""
        00 90 3C 40  # channel 1, note on 60
        18 81 3C 40  # tick 24: channel 2, note off 60
        48 80 3C 40  # tick 96: channel 1, note off 60
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]


def test_a_note_off_of_another_pitch_ends_nothing() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        18 80 3D 40  # tick 24: note off 61
        48 80 3C 40  # tick 96: note off 60
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]


def test_a_note_that_is_never_ended_lasts_to_the_end_of_the_sequence_and_is_warned_about() -> None:
    tune = midi_file(
        """
        00 90 3C 40  # byte 23: note on 60, never ended; this track ends at once
        00 FF 2F 00  # end of track
        """,
        """
        60 FF 2F 00  # the other track ends at tick 96
        """,
        midi_format=1,
    )

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]
    assert score.warnings == (
        "1 note has no note-off (its note-on is at byte 23): it lasts to the end of the sequence.",
    )


def test_several_notes_never_ended_give_one_warning() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        00 90 40 40  # note on 64
        60 FF 2F 00  # tick 96: end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5), (64, 0.0, 0.5)]
    assert score.warnings == (
        "2 notes have no note-off (the first note-on is at byte 23): they last to the end of the sequence.",
    )


def test_a_note_ended_in_its_own_tick_counts_with_no_length() -> None:
    tune = midi_file("""
        60 90 3C 40  # tick 96: note on 60
        00 80 3C 40  # and off
        60 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.5, 0.0)]
    assert score.warnings == ()


def test_a_note_whose_note_off_stands_before_it_in_its_tick_counts_with_no_length() -> None:
    tune = midi_file("""
        60 80 3C 40  # tick 96: note off 60, nothing sounding
        00 90 3C 40  # note on 60 in the same tick
        60 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.5, 0.0)]
    assert score.warnings == ()


def test_a_note_off_of_an_earlier_tick_does_not_end_a_later_note() -> None:
    tune = midi_file("""
        00 80 3C 40  # tick 0: note off 60, nothing sounding
        60 90 3C 40  # tick 96: note on 60
        60 FF 2F 00  # tick 192: end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.5, 0.5)]
    assert len(score.warnings) == 1


def test_a_repeated_note_whose_note_off_and_note_on_share_a_tick_sounds_twice() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        60 80 3C 40  # tick 96: off
        00 90 3C 40  # and on again
        60 80 3C 40  # tick 192: off
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5), (60, 0.5, 0.5)]


def test_two_parts_on_one_channel_keep_their_own_note_offs() -> None:
    tune = midi_file(
        """
        00 90 3C 40  # part one: note on 60
        60 80 3C 40  # tick 96: off
        00 FF 2F 00  # end of track
        """,
        """
        18 90 3C 40  # part two, same channel: note on 60 at tick 24
        18 80 3C 40  # tick 48: off
        00 FF 2F 00  # end of track
        """,
        midi_format=1,
    )

    score = read_score(tune)

    # part one 0 to 0.5 s; part two tick 24 = 0.125 s to tick 48 = 0.25 s
    assert spans_of(score) == [(60, 0.0, 0.5), (60, 0.125, 0.125)]


def test_a_note_off_in_another_track_ends_the_note() -> None:
    # The tracks of a format 1 file are one stream of messages, so the channel decides, not the track.
    tune = midi_file(
        """
        60 80 3C 40  # tick 96: note off 60, its note-on is in the next track
        00 FF 2F 00  # end of track
        """,
        """
        00 90 3C 40  # note on 60
        8140 FF 2F 00  # tick 192: end of track
        """,
        midi_format=1,
    )

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]
    assert score.warnings == ()


def test_note_offs_in_another_track_end_the_oldest_note_first() -> None:
    tune = midi_file(
        """
        60 80 3C 40  # tick 96: note off 60
        60 80 3C 40  # tick 192: note off 60
        00 FF 2F 00  # end of track
        """,
        """
        18 90 3C 42  # tick 24: note on 60
        00 FF 2F 00  # end of track
        """,
        """
        00 90 3C 41  # tick 0: note on 60, the older one
        00 FF 2F 00  # end of track
        """,
        midi_format=1,
    )

    score = read_score(tune)

    # older: 0 to tick 96 = 0.5 s; younger: tick 24 = 0.125 s to tick 192 = 1.0 s
    assert spans_of(score) == [(60, 0.0, 0.5), (60, 0.125, 0.875)]
    assert score.velocity.tolist() == [0x41, 0x42]


def test_percussion_is_left_out_and_counted() -> None:
    tune = midi_file("""
        00 99 24 40  # channel 10: bass drum
        00 90 3C 40  # channel 1: note on 60
        60 99 24 00  # tick 96: drum off, velocity 0
        00 99 26 40  # a second drum
        00 89 26 40  # off
        00 80 3C 40  # channel 1: off
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]
    assert score.percussion_count == 2


def test_notes_are_sorted_by_onset_then_pitch_then_channel() -> None:
    tune = midi_file("""
        00 9F 3C 40  # channel 16: 60
        00 91 3C 40  # channel 2: 60
        00 92 30 40  # channel 3: 48
        60 90 24 40  # tick 96: channel 1: 36
        60 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert score.pitch.tolist() == [48, 60, 60, 36]
    assert score.channel.tolist() == [3, 2, 16, 1]


def test_a_file_without_notes_gives_an_empty_score() -> None:
    tune = midi_file("00 FF 2F 00")

    score = read_score(tune)

    assert score.note_count == 0
    assert (score.onset_s.shape, score.pitch.shape) == ((0,), (0,))
    assert score.warnings == ()


def test_the_arrays_of_a_score_are_read_only() -> None:
    tune = midi_file("00 90 3C 40  60 80 3C 40  00 FF 2F 00")

    score = read_score(tune)

    arrays = (score.onset_s, score.duration_s, score.pitch, score.velocity, score.channel)
    assert not any(array.flags.writeable for array in arrays)


def test_a_note_of_no_length_written_backwards_does_not_shift_the_note_offs_after_it() -> None:
    tune = midi_file("""
        00 80 3C 40  # tick 0: the grace note's note-off, sorted before its note-on
        00 90 3C 41  # the grace note
        60 90 3C 42  # tick 96: the note itself
        60 80 3C 40  # tick 192: off
        60 90 3C 43  # tick 288: another
        60 80 3C 40  # tick 384: off
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.0), (60, 0.5, 0.5), (60, 1.5, 0.5)]
    assert score.warnings == ()


def test_a_note_off_written_before_every_note_on_to_be_safe_changes_nothing() -> None:
    tune = midi_file("""
        00 80 3C 40  # tick 0: note off 60, nothing sounding
        00 90 3C 40  # note on
        60 80 3C 40  # tick 96: off
        60 80 3C 40  # tick 192: off again, nothing sounding
        00 90 3C 40  # note on
        60 80 3C 40  # tick 288: off
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5), (60, 1.0, 0.5)]
    assert score.warnings == ()


def test_a_note_never_ended_lasts_to_the_end_of_the_longest_track_wherever_it_stands() -> None:
    tune = midi_file("60 FF 2F 00", "00 90 3C 40 00 FF 2F 00", midi_format=1)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.5)]


def test_a_loose_note_off_of_an_earlier_tick_does_not_shorten_overlapping_notes() -> None:
    tune = midi_file("""
        00 80 3C 40  # tick 0: note off 60, nothing sounding
        18 90 3C 40  # tick 24: note on
        18 90 3C 40  # tick 48: again, while it sounds
        18 80 3C 40  # tick 72: ends the first
        18 80 3C 40  # tick 96: ends the second
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    # tick 24 = 0.125 s to tick 72 = 0.375 s; tick 48 = 0.25 s to tick 96 = 0.5 s
    assert spans_of(score) == [(60, 0.125, 0.25), (60, 0.25, 0.25)]


def test_one_note_off_written_backwards_gives_one_note_of_no_length() -> None:
    tune = midi_file("""
        00 80 3C 40  # tick 0: a note-off, nothing sounding
        00 90 3C 41  # the note it belongs to
        00 90 3C 42  # a second note in the same tick
        30 90 3C 43  # tick 48: a third, while the second sounds
        30 80 3C 40  # tick 96: ends the second
        60 80 3C 40  # tick 192: ends the third
        00 FF 2F 00  # end of track
    """)

    score = read_score(tune)

    assert spans_of(score) == [(60, 0.0, 0.0), (60, 0.0, 0.5), (60, 0.25, 0.75)]
