from fractions import Fraction

import pytest

from layout.read import read_score
from tests.layout.read.hexdump import midi_file

NOTE = "90 3C 40 00 80 3C 40"  # note on and off in one tick; a delta time stands before it
END = "00 FF 2F 00"


def test_without_a_tempo_event_a_quarter_note_lasts_half_a_second() -> None:
    tune = midi_file(f"60 {NOTE} {END}")

    score = read_score(tune)

    # 96 ticks at 500000 us per quarter note of 96 ticks (Standard MIDI Files 1.0: 120 a minute)
    assert score.onset_s.tolist() == [0.5]


def test_a_tempo_holds_from_its_tick_on() -> None:
    tune = midi_file(f"""
        00 {NOTE}           # tick 0
        60 FF 51 03 0927C0  # tick 96: 600000 us, 100 quarter notes a minute
        00 {NOTE}           # tick 96: still at 0.5 s
        60 {NOTE}           # tick 192: 0.6 s later
        {END}
    """)

    score = read_score(tune)

    assert score.onset_s.tolist() == [0.0, 0.5, 1.1]


def test_of_two_tempi_at_one_tick_of_a_track_the_later_in_the_track_holds() -> None:
    tune = midi_file(f"""
        00 FF 51 03 0927C0  # 600000 us
        00 FF 51 03 03D090  # 250000 us, same tick
        60 {NOTE}           # tick 96
        {END}
    """)

    score = read_score(tune)

    assert score.onset_s.tolist() == [0.25]


def test_tempi_of_all_tracks_are_merged_and_the_later_track_holds_at_one_tick() -> None:
    tune = midi_file(
        f"""
        60 FF 51 03 0927C0  # tick 96: 600000 us
        60 {NOTE}           # tick 192
        {END}
        """,
        f"""
        60 FF 51 03 0F4240  # tick 96: 1000000 us, in a later track
        {END}
        """,
        f"""
        00 FF 51 03 03D090  # tick 0: 250000 us, in the last track
        8140 {NOTE}         # tick 192
        {END}
        """,
        midi_format=1,
    )

    score = read_score(tune)

    # 96 ticks at 0.25 s a quarter note and 96 at 1 s, for the notes of both tracks
    assert score.onset_s.tolist() == [1.25, 1.25]


def test_tempi_are_merged_by_tick_whatever_track_they_stand_in() -> None:
    tune = midi_file(
        f"8140 FF 51 03 03D090 {END}  # tick 192: 250000 us",
        f"60 FF 51 03 0F4240 {END}    # tick 96: 1000000 us",
        f"8220 {NOTE} {END}           # tick 288",
        midi_format=1,
    )

    score = read_score(tune)

    # 0.5 s + 1.0 s + 0.25 s for 96 ticks each
    assert score.onset_s.tolist() == [1.75]


def test_a_note_over_a_tempo_change_lasts_as_long_as_both_parts() -> None:
    tune = midi_file(f"""
        00 90 3C 40         # note on 60
        60 FF 51 03 0F4240  # tick 96: 1000000 us
        60 80 3C 40         # tick 192: off
        {END}
    """)

    score = read_score(tune)

    # 0.5 s + 1.0 s
    assert score.duration_s.tolist() == [1.5]


# The code byte is the frame rate in two's complement, the other byte ticks per frame
# (Standard MIDI Files 1.0; E7 28 is its own example of millisecond ticks). The rate of code -29 is
# 30000/1001 frames a second (SMPTE ST 12-1).
FRAME_DIVISIONS = [
    (0xE804, Fraction(1, 24 * 4)),
    (0xE728, Fraction(1, 1000)),
    (0xE350, Fraction(1001, 30_000 * 80)),
    (0xE250, Fraction(1, 30 * 80)),
]


@pytest.mark.parametrize(("division", "tick_s"), FRAME_DIVISIONS, ids=["-24", "-25", "-29", "-30"])
def test_a_division_in_frames_gives_ticks_of_fixed_length(division: int, tick_s: Fraction) -> None:
    tune = midi_file(
        f"""
        00 FF 51 03 0927C0  # a tempo event, which changes nothing here
        8768 {NOTE}         # tick 1000
        {END}
        """,
        division=division,
    )

    score = read_score(tune)

    assert score.onset_s.tolist() == [float(1000 * tick_s)]


def test_an_hour_of_odd_ticks_does_not_drift() -> None:
    # Summed step by step in doubles, 20000 steps of 1/3 of 0.123457 s/7 part from the exact sum.
    step = f"01 {NOTE}"
    tune = midi_file(
        f"""
        00 FF 51 03 01E241  # 123457 us per quarter note
        {step * 20000}
        {END}
        """,
        division=21,
    )

    score = read_score(tune)

    exact = [float(Fraction(123_457 * tick, 21 * 1_000_000)) for tick in range(1, 20_001)]
    assert score.onset_s.tolist() == exact


def test_many_tempo_changes_do_not_drift() -> None:
    step = f"01 FF 51 03 01E241 06 {NOTE} 01 FF 51 03 01E240"
    tune = midi_file(f"00 FF 51 03 01E240 {step * 5000} {END}", division=480)

    score = read_score(tune)

    # a step: 1 tick at 123456 us, 6 and 1 at 123457 us; its note stands after the first 7
    step_us, note_us = 123_456 + 7 * 123_457, 123_456 + 6 * 123_457
    exact = [float(Fraction(number * step_us + note_us, 480 * 1_000_000)) for number in range(5000)]
    assert score.onset_s.tolist() == exact


def test_a_delta_time_of_sixteen_million_ticks_is_exact() -> None:
    tune = midi_file(
        f"""
        FFFFFF7F FF 01 00  # 268435455 ticks, then an empty text event
        01 {NOTE}          # one tick more
        {END}
        """,
        division=32_767,
    )

    score = read_score(tune)

    assert score.onset_s.tolist() == [float(Fraction(268_435_456, 2 * 32_767))]


def test_the_time_before_an_event_that_is_skipped_is_kept() -> None:
    tune = midi_file(f"""
        60 FF 7F 02 AAAA     # sequencer's own event
        60 FF 60 03 010203   # a meta event nobody defined
        60 F0 03 7E7FF7      # system exclusive
        60 F7 02 F3 01       # escaped bytes
        60 B0 07 40          # control change
        60 {NOTE}            # tick 6 * 96
        {END}
    """)

    score = read_score(tune)

    assert score.onset_s.tolist() == [3.0]


def test_a_never_ended_note_in_a_sequence_of_ages_has_a_finite_length() -> None:
    # 70000 delta times of 268435455 ticks at one tick per quarter note and 16777215 us: the exact
    # number of microseconds needs more than 64 bits.
    ages = "FFFFFF7F FF 01 00" * 70_000
    tune = midi_file(f"00 FF 51 03 FFFFFF 00 90 3C 40 {ages} {END}", division=1)

    score = read_score(tune)

    exact = Fraction(70_000 * 268_435_455 * 16_777_215, 1_000_000)
    assert score.duration_s.tolist() == [float(exact)]
