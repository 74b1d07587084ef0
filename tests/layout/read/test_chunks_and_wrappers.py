import pytest

from layout.errors import MidiReadError
from layout.read import read_score
from tests.layout.read.hexdump import chunk, from_hexdump, midi_file, riff

NOTE_TRACK = """
    00 90 3C 40  # note on 60
    60 80 3C 40  # tick 96: off
    00 FF 2F 00  # end of track
"""
OTHER_TRACK = """
    00 90 40 40  # note on 64
    60 80 40 40  # tick 96: off
    00 FF 2F 00  # end of track
"""
TEMPO_TRACK = """
    00 FF 51 03 0F4240  # 1000000 us
    00 90 43 40         # note on 67
    60 80 43 40         # tick 96: off
    00 FF 2F 00         # end of track
"""


def test_the_tracks_of_a_format_1_file_sound_together() -> None:
    tune = midi_file(NOTE_TRACK, OTHER_TRACK, midi_format=1)

    score = read_score(tune)

    assert score.pitch.tolist() == [60, 64]
    assert (score.midi_format, score.sequence, score.sequence_count) == (1, 1, 1)


def test_the_first_sequence_of_a_format_2_file_is_read_by_default_and_said() -> None:
    tune = midi_file(NOTE_TRACK, TEMPO_TRACK, OTHER_TRACK, midi_format=2)

    score = read_score(tune)

    assert score.pitch.tolist() == [60]
    assert (score.midi_format, score.sequence, score.sequence_count) == (2, 1, 3)
    assert score.warnings == ("This is a format 2 file: sequence 1 of 3 was read.",)


def test_a_sequence_of_a_format_2_file_has_its_own_tempo_and_no_others() -> None:
    tune = midi_file(NOTE_TRACK, TEMPO_TRACK, OTHER_TRACK, midi_format=2)

    second = read_score(tune, sequence=2)
    third = read_score(tune, sequence=3)

    assert (second.pitch.tolist(), second.duration_s.tolist()) == ([67], [1.0])
    assert (third.pitch.tolist(), third.duration_s.tolist()) == ([64], [0.5])
    assert third.warnings == ("This is a format 2 file: sequence 3 of 3 was read.",)


@pytest.mark.parametrize("sequence", [0, -1, 4])
def test_a_sequence_out_of_range_is_an_error_that_says_the_range(sequence: int) -> None:
    tune = midi_file(NOTE_TRACK, TEMPO_TRACK, OTHER_TRACK, midi_format=2)

    with pytest.raises(MidiReadError, match=f"sequence {sequence}, .*; ask for a sequence from 1 to 3") as error:
        read_score(tune, sequence=sequence)

    assert error.value.byte_offset == 10  # the track count


def test_a_format_1_file_holds_one_sequence() -> None:
    tune = midi_file(NOTE_TRACK, OTHER_TRACK, midi_format=1)

    with pytest.raises(MidiReadError, match="a format 1 file of 1 sequence, expected sequence 2, which was asked for"):
        read_score(tune, sequence=2)


def test_a_format_0_file_that_counts_two_tracks_plays_both_and_warns() -> None:
    tune = midi_file(NOTE_TRACK, OTHER_TRACK, midi_format=0)

    score = read_score(tune)

    assert score.pitch.tolist() == [60, 64]
    assert score.warnings == (
        "The header says format 0, which has one track, but counts several: they are played together.",
    )


def test_header_bytes_after_the_sixth_are_skipped() -> None:
    header = chunk(b"MThd", from_hexdump("0000 0001 0060 AABBCC  # three bytes more than the fields"))
    tune = header + chunk(b"MTrk", from_hexdump(NOTE_TRACK))

    score = read_score(tune)

    assert score.pitch.tolist() == [60]
    assert score.warnings == ()


def test_chunks_of_an_unknown_type_are_skipped_by_their_length() -> None:
    # 4D54726B inside the alien chunk would be taken for a track by a reader that searches for it.
    alien = chunk(b"XFIH", from_hexdump("4D54726B 00000004 00FF2F00 01"))
    sound = midi_file(NOTE_TRACK, OTHER_TRACK, midi_format=1)
    first_track_end = 14 + 8 + len(from_hexdump(NOTE_TRACK))
    tune = sound[:14] + alien + sound[14:first_track_end] + alien + sound[first_track_end:]

    score = read_score(tune)

    assert score.pitch.tolist() == [60, 64]
    assert score.warnings == ()


def test_bytes_after_the_last_track_are_ignored_with_a_warning() -> None:
    tune = midi_file(NOTE_TRACK) + b"\xff\x00junk"

    score = read_score(tune)

    # 14 + 8 + 12 = 34 bytes of file before them
    assert score.pitch.tolist() == [60]
    assert score.warnings == ("6 bytes after the last track, from byte 34, ignored.",)


def test_a_track_the_header_does_not_count_is_ignored_and_named() -> None:
    tune = midi_file(NOTE_TRACK, OTHER_TRACK, midi_format=1, count=1)

    score = read_score(tune)

    assert score.pitch.tolist() == [60]
    assert score.warnings == (
        "20 bytes after the last track, from byte 34, ignored: "
        "they begin with a further track that the header does not count.",
    )


@pytest.mark.parametrize(
    ("count", "sentence"),
    [
        (3, "The header counts 1 track more than the file holds: notes may be missing."),
        (65_535, "The header counts 65533 tracks more than the file holds: notes may be missing."),
    ],
)
def test_fewer_tracks_than_the_header_counts_is_a_warning(count: int, sentence: str) -> None:
    tune = midi_file(NOTE_TRACK, OTHER_TRACK, midi_format=1, count=count)

    score = read_score(tune)

    assert score.pitch.tolist() == [60, 64]
    assert score.warnings == (sentence,)


def test_an_unknown_chunk_where_a_track_is_missing_is_skipped_like_any_other() -> None:
    tune = midi_file(NOTE_TRACK, midi_format=1, count=2) + chunk(b"XFIH", b"abcd")

    score = read_score(tune)

    assert score.warnings == ("The header counts 1 track more than the file holds: notes may be missing.",)


def test_a_track_without_an_end_of_track_event_keeps_its_notes_and_warns() -> None:
    tune = midi_file("""
        00 90 3C 40  # note on 60
        60 80 3C 40  # tick 96: off, and nothing more
    """)

    score = read_score(tune)

    assert score.duration_s.tolist() == [0.5]
    assert score.warnings == ("1 track stops at byte 30 without an end-of-track event; its notes are kept.",)


def test_several_tracks_without_an_end_of_track_event_give_one_warning() -> None:
    tune = midi_file("00 90 3C 40 60 80 3C 40", "", "", midi_format=1)

    score = read_score(tune)

    assert score.warnings == (
        "3 tracks stop without an end-of-track event, the first at byte 30; their notes are kept.",
    )


def test_bytes_after_the_end_of_track_event_are_ignored_with_a_warning() -> None:
    tune = midi_file(f"{NOTE_TRACK} \n 00 90 40 40")

    score = read_score(tune)

    assert score.pitch.tolist() == [60]
    assert score.warnings == ("1 track has bytes after its end-of-track event, from byte 34: they were ignored.",)


def test_a_tempo_event_longer_than_three_bytes_gives_its_first_three_and_a_warning() -> None:
    # A known meta event may be longer than expected: what is past the known part is ignored
    # (Standard MIDI Files 1.0, from memory).
    tune = midi_file("""
        00 FF 51 04 0F4240 AA  # 1000000 us and a byte more
        60 90 3C 40            # tick 96
        00 80 3C 40            # off
        00 FF 2F 00            # end of track
    """)

    score = read_score(tune)

    assert score.onset_s.tolist() == [1.0]
    assert score.warnings == ("The tempo event at byte 26 is longer than 3 bytes: what follows the third was ignored.",)


def test_several_long_tempo_events_give_one_warning() -> None:
    tune = midi_file("00 FF 51 04 0F4240 AA 00 FF 51 04 0F4240 AA 00 FF 2F 00")

    score = read_score(tune)

    assert score.warnings == (
        "2 tempo events are longer than 3 bytes, the first at byte 26: what follows the third was ignored.",
    )


def test_warnings_stand_in_file_order() -> None:
    tune = midi_file("00 90 3C 40", "", midi_format=2, count=2) + b"\0"

    score = read_score(tune)

    assert [warning.split()[0] for warning in score.warnings] == ["This", "1", "1", "1"]
    assert "sequence 1 of 2" in score.warnings[0]
    assert "no note-off" in score.warnings[1]
    assert "end-of-track" in score.warnings[2]
    assert "after the last track" in score.warnings[3]


def test_a_riff_wrapper_is_opened() -> None:
    # RIFF lengths stand least significant byte first; a chunk of odd length is padded to even.
    info = chunk(b"LIST", b"INFO!", byteorder="little") + b"\0"
    tune = riff(info, chunk(b"data", midi_file(NOTE_TRACK), byteorder="little"), info)

    score = read_score(tune)

    assert score.pitch.tolist() == [60]
    assert score.warnings == ()


def test_a_chunk_before_the_data_is_skipped_whatever_it_holds() -> None:
    text = chunk(b"note", b"RIFF", byteorder="little")
    tune = riff(text, chunk(b"data", midi_file(NOTE_TRACK), byteorder="little"))

    score = read_score(tune)

    assert score.pitch.tolist() == [60]


def test_bytes_after_the_riff_wrapper_are_ignored_with_a_warning() -> None:
    tune = riff(chunk(b"data", midi_file(NOTE_TRACK), byteorder="little")) + b"\0"

    score = read_score(tune)

    # 12 bytes of wrapper, 8 of the data chunk's head, 34 of file
    assert score.warnings == ("1 byte after the RIFF wrapper, from byte 54, ignored.",)


def test_an_error_inside_a_riff_wrapper_names_the_byte_of_the_whole_file() -> None:
    tune = riff(chunk(b"data", midi_file(NOTE_TRACK, division=0), byteorder="little"))

    with pytest.raises(MidiReadError, match="a division of 0") as error:
        read_score(tune)

    assert error.value.byte_offset == 20 + 12
