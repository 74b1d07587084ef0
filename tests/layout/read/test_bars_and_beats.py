from fractions import Fraction

import pytest

from layout.read import Score, read_score
from layout.read.limits import LIMITS
from tests.layout.read.hexdump import midi_file

NOTE = "90 3C 40 00 80 3C 40"  # note on and off in one tick; a delta time stands before it
END = "00 FF 2F 00"
# 96 ticks per quarter note (60 in hexadecimal), 0.5 s each: 384 ticks, 2 s, a bar of 4/4 (8300 as a quantity).


def metre(numerator: int, power: int) -> str:
    """A time signature: numerator, power of two of the denominator, 24 clocks a click, 8 32nds a quarter."""
    return f"FF 58 04 {numerator:02X}{power:02X} 18 08"


def read(*events: str, division: int = 96) -> Score:
    return read_score(midi_file(" ".join([*events, END]), division=division))


def test_without_a_time_signature_a_bar_has_four_quarter_notes() -> None:
    score = read(f"00 {NOTE}", f"8310 {NOTE}")  # ticks 0 and 400: 2.083 s, in bar 2

    assert score.bar_s.tolist() == [0.0, 2.0, 4.0]
    assert score.beat_s.tolist() == [0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0]
    assert score.warnings == ()


def test_a_last_onset_on_a_bar_line_has_its_bar_after_it() -> None:
    score = read(f"8300 {NOTE}")  # tick 384: 2.0 s

    assert score.onset_s.tolist() == [2.0]
    assert score.bar_s.tolist() == [0.0, 2.0, 4.0]


def test_no_notes_have_one_bar_line_and_one_beat() -> None:
    score = read("8300 FF 01 00")

    assert (score.bar_s.tolist(), score.beat_s.tolist()) == ([0.0], [0.0])


def test_percussion_makes_no_bars() -> None:
    score = read("8740 99 3C 40", f"00 {NOTE.replace('90', '99', 1)}")

    assert score.bar_s.tolist() == [0.0]


@pytest.mark.parametrize(
    ("numerator", "power", "bar_s", "beat_s"),
    [
        (3, 2, 1.5, 0.5),  # 3/4: three quarter notes of 0.5 s
        (2, 1, 2.0, 1.0),  # 2/2: two half notes
        (6, 3, 1.5, 0.75),  # 6/8: two beats of three eighths
        (9, 3, 2.25, 0.75),
        (12, 3, 3.0, 0.75),
        (3, 3, 0.75, 0.25),  # 3/8 is no compound metre: three beats of an eighth
        (6, 2, 3.0, 1.5),  # 6/4: two beats of three quarter notes
        (6, 4, 0.75, 0.375),  # 6/16
        (5, 3, 1.25, 0.25),  # 5/8
        (4, 0, 8.0, 2.0),  # 4/1
        (3, 7, 0.046875, 0.015625),  # 3/128: a note lasts 3 ticks of 96, 3 · 0.5/96 s
    ],
)
def test_a_beat_is_the_note_of_the_denominator_and_in_compound_metres_three(
    numerator: int, power: int, bar_s: float, beat_s: float
) -> None:
    score = read(f"00 {metre(numerator, power)}", f"00 {NOTE}")

    assert score.bar_s.tolist() == [0.0, bar_s]
    assert score.beat_s.tolist() == [beat_s * beat for beat in range(round(bar_s / beat_s) + 1)]


def test_a_time_signature_inside_a_bar_begins_a_bar_and_cuts_the_one_before_short() -> None:
    score = read(
        f"60 {NOTE}",  # tick 96
        f"30 {metre(3, 2)}",  # tick 144: half way through beat 2
        f"60 {NOTE}",  # tick 240
    )

    # 4/4: beats at 0 and 0.5 s; 3/4 from 144 ticks, 0.75 s, on.
    assert score.bar_s.tolist() == [0.0, 0.75, 2.25]
    assert score.beat_s.tolist() == [0.0, 0.5, 0.75, 1.25, 1.75, 2.25]


def test_a_time_signature_that_only_repeats_what_holds_begins_a_bar_too() -> None:
    # An upbeat of one quarter note, as many programs write it.
    score = read(f"00 {metre(4, 2)} 00 {NOTE}", f"60 {metre(4, 2)} 00 {NOTE}")

    assert score.bar_s.tolist() == [0.0, 0.5, 2.5]


def test_a_time_signature_past_the_last_onset_ends_the_last_bar() -> None:
    score = read(f"60 {NOTE}", f"60 {metre(3, 2)}")

    # Tick 96 sounds, tick 192 begins a bar: the first past the last onset.
    assert score.bar_s.tolist() == [0.0, 1.0]
    assert score.beat_s.tolist() == [0.0, 0.5, 1.0]


def test_a_time_signature_after_the_bar_that_ends_the_tune_changes_nothing() -> None:
    score = read(f"60 {NOTE}", f"8740 {metre(3, 2)}")

    assert score.bar_s.tolist() == [0.0, 2.0]


def test_time_signatures_of_all_tracks_are_merged_and_the_later_track_holds_at_one_tick() -> None:
    tune = midi_file(
        f"00 {metre(3, 2)} 8220 {metre(2, 2)} {END}",  # 3/4 at tick 0, 2/4 at tick 288
        f"00 {metre(5, 3)} 8330 {NOTE} {END}",  # 5/8 at tick 0; a note at tick 432
        midi_format=1,
    )

    score = read_score(tune)

    # 5/8 holds from 0: 1.25 s a bar, the second cut at 288 ticks, 1.5 s; then 1 s a bar.
    assert score.bar_s.tolist() == [0.0, 1.25, 1.5, 2.5]


def test_bars_keep_to_every_tempo() -> None:
    score = read(
        f"60 FF 51 03 0F4240 00 {NOTE}",  # tick 96: 1 s a quarter note
        f"30 FF 51 03 03D090 30 {NOTE}",  # tick 144: 0.25 s; a note at tick 192
        f"8140 {NOTE}",  # tick 384: the second bar
    )

    # 0.5 s, then half a quarter note at 1 s and half at 0.25 s, then 0.25 s each
    assert score.beat_s[:5].tolist() == [0.0, 0.5, 1.125, 1.375, 1.625]
    assert score.bar_s.tolist() == [0.0, 1.625, 2.625]


def test_a_beat_may_lie_between_ticks() -> None:
    # 5 ticks per quarter note, 600 ms: an eighth lasts two and a half ticks, 0.3 s.
    score = read("00 FF 51 03 0927C0", f"00 {metre(3, 3)}", f"00 {NOTE}", division=5)

    assert score.beat_s.tolist() == [0.0, 0.3, 0.6, 0.9]


def test_a_note_on_a_bar_line_has_its_very_number() -> None:
    # 123457 us a quarter note, 21 ticks: no time is a round number.
    bars = f"54 {NOTE}" * 500  # a note every 84 ticks, a bar of 4/4
    score = read("00 FF 51 03 01E241", bars, division=21)

    assert score.bar_s.tolist() == [0.0, *score.onset_s.tolist(), float(Fraction(501 * 84 * 123_457, 21 * 1_000_000))]


def test_with_a_division_in_frames_bars_are_counted_as_4_4_at_120() -> None:
    # 25 frames of 40 ticks, so a tick is 1 ms; 2500 ticks (9344 as a quantity) reach into bar 2.
    score = read(f"00 {metre(3, 2)}", f"9344 {NOTE}", division=0xE728)

    assert score.onset_s.tolist() == [2.5]
    assert score.bar_s.tolist() == [0.0, 2.0, 4.0]
    assert score.beat_s.tolist() == [0.5 * beat for beat in range(9)]
    assert score.warnings == ()


@pytest.mark.parametrize("event", ["FF 58 01 03", "FF 58 00", "FF 58 04 0002 18 08", "FF 58 04 0308 18 08"])
def test_a_time_signature_that_cannot_be_followed_is_told_and_ignored(event: str) -> None:
    score = read(f"00 {event}", f"00 {NOTE}")

    # The track's first byte stands at 22, the event's payload four bytes on.
    [warning] = score.warnings
    assert warning == (
        "The time signature at byte 26 is cut short, or has a numerator of 0 or a denominator above 128: "
        "it was ignored."
    )
    assert score.bar_s.tolist() == [0.0, 2.0]


def test_several_time_signatures_that_cannot_be_followed_are_told_once() -> None:
    score = read("00 FF 58 00", "00 FF 58 00", f"00 {NOTE}")

    [warning] = score.warnings
    assert warning.startswith("2 time signatures, the first at byte 26, are cut short, or have")


def test_a_time_signature_of_two_bytes_says_enough() -> None:
    score = read("00 FF 58 02 0302", f"00 {NOTE}")

    assert score.bar_s.tolist() == [0.0, 1.5]
    assert score.warnings == ()


def test_beats_beyond_any_music_are_told_and_counted_as_4_4_at_120() -> None:
    # A quarter note of 1 us at 1 tick: the note at tick 2097151 stands at 2.097151 s.
    score = read("00 FF 51 03 000001", f"FFFF7F {NOTE}", division=1)

    # To the end of its bar there are 2097152 beats.
    assert score.warnings == (
        "The file counts 2097152 beats to its last note, more than music has: "
        "its bars are counted as 4/4 at 120 beats a minute.",
    )
    assert score.bar_s.tolist() == [0.0, 2.0, 4.0]
    assert score.onset_s.tolist() == [2.097151]


@pytest.mark.parametrize(("bars", "told"), [(25_000, False), (25_001, True)])
def test_as_many_beats_as_the_limit_are_counted(bars: int, *, told: bool) -> None:
    # A note in the last bar of 4/4, at one tick a quarter note: 4 beats a bar, 100,000 in 25,000 bars.
    tick = 4 * bars - 1
    delta = bytes([0x80 | tick >> 14, 0x80 | tick >> 7 & 0x7F, tick & 0x7F]).hex()
    score = read("00 FF 51 03 01E241", f"{delta} {NOTE}", division=1)

    assert LIMITS.beats == 100_000
    assert (len(score.warnings) == 1) is told
    assert (len(score.beat_s) == 100_001) is not told
