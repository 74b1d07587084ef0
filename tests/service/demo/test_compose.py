import os
import struct
import subprocess
import sys
from collections import defaultdict
from itertools import combinations, pairwise
from pathlib import Path
from typing import Any

import pytest
import symusic

from service.demo import compose
from service.demo.compose import TITLE, TUNE_PATH, demo_tune, main

BAR_TICKS = 6 * 240  # six eighths of 240 ticks at 480 ticks a quarter


def read_tracks(unit: str) -> list[Any]:
    """The tracks as symusic reads them, which did not write the file; its stubs leave tracks untyped."""
    score: Any = symusic.Score.from_midi(TUNE_PATH.read_bytes(), ttype=unit)
    return list(score.tracks)


def read_in_ticks() -> dict[str, list[tuple[int, int, int, int]]]:
    """(start, end, pitch, velocity) of the notes of each voice, in order."""
    return {
        track.name: sorted((n.start, n.end, n.pitch, n.velocity) for n in track.notes) for track in read_tracks("tick")
    }


def as_written(notes: list[tuple[int, int, int, int]]) -> list[tuple[int, int, int]]:
    """(start, end, pitch) with the full length of the score, of which 7/8 sound."""
    return [(start, start + (end - start) * 8 // 7, pitch) for start, end, pitch, _ in notes]


def read_onsets_s() -> list[float]:
    return sorted(note.start for track in read_tracks("second") for note in track.notes)


def test_the_shipped_file_is_what_the_script_writes() -> None:
    assert demo_tune() == TUNE_PATH.read_bytes()


@pytest.mark.parametrize("hash_seed", ["0", "4711"])
def test_another_process_with_another_hash_seed_writes_the_same_bytes(hash_seed: str, tmp_path: Path) -> None:
    out = tmp_path / "again.mid"

    subprocess.run(
        [sys.executable, "-m", "service.demo.compose", str(out)],
        check=True,
        capture_output=True,
        cwd=Path(compose.__file__).parents[2],
        env={**os.environ, "PYTHONHASHSEED": hash_seed},
    )

    assert out.read_bytes() == TUNE_PATH.read_bytes()


def test_the_file_is_format_1_with_four_tracks_and_480_ticks_a_quarter() -> None:
    # Header chunk of the Standard MIDI File 1.0 specification: "MThd", length 6, format, tracks, division.
    assert demo_tune()[:14] == b"MThd" + struct.pack(">IHHH", 6, 1, 4, 480)


def test_each_voice_has_its_own_track_and_channel_and_none_is_percussion() -> None:
    tracks = read_tracks("tick")

    assert [track.name for track in tracks] == ["melody", "accompaniment", "inner voice"]
    assert not any(track.is_drum for track in tracks)
    # Status byte 0x9n is a note-on of channel n + 1; a program change 0xCn of program 10 starts each voice.
    for channel in range(3):
        assert demo_tune().count(bytes([0xC0 | channel, 10])) == 1


def test_title_and_six_eight_time_stand_in_the_first_track() -> None:
    first_track = demo_tune()[14 : demo_tune().index(b"MTrk", 18)]
    title = TITLE.encode("ascii")

    # Meta events of the specification: FF 03 length text; FF 58 04 numerator, power of two, 24 clocks, 8.
    assert b"\xff\x03" + bytes([len(title)]) + title in first_track
    assert b"\xff\x58\x04\x06\x03" in first_track


def test_the_last_onset_stands_where_the_tempi_put_it_within_58_and_61_seconds() -> None:
    last_s = read_onsets_s()[-1]

    # Bars of two dotted quarters: 16 at 84, 7 at 76, 1 at 70, 12 at 84, 72, 63, half at 54, half at 46.
    half_bars = [(32, 84), (14, 76), (2, 70), (24, 84), (2, 72), (2, 63), (1, 54), (1, 46)]
    assert last_s == pytest.approx(sum(count * 60 / tempo for count, tempo in half_bars), abs=0.0005)
    assert 58 < last_s < 61


def test_the_music_starts_at_once_and_has_250_to_400_notes() -> None:
    onsets_s = read_onsets_s()

    assert onsets_s[0] == 0
    assert 250 <= len(onsets_s) <= 400


def test_no_voice_crosses_or_meets_another() -> None:
    voices = read_in_ticks()
    low, middle, high = (as_written(voices[name]) for name in ("accompaniment", "inner voice", "melody"))

    for lower, upper in ((low, middle), (low, high), (middle, high)):
        together = [(a, b) for a in lower for b in upper if a[0] < b[1] and b[0] < a[1]]
        assert together
        assert all(a[2] < b[2] for a, b in together)


def test_no_note_is_struck_while_the_same_pitch_still_sounds() -> None:
    by_pitch = defaultdict(list)
    for notes in read_in_ticks().values():
        for start, end, pitch, _ in notes:
            by_pitch[pitch].append((start, end))

    for spans in by_pitch.values():
        assert all(before[1] <= after[0] for before, after in pairwise(sorted(spans)))


def test_the_melody_moves_mostly_by_step_and_never_leaps_past_a_fifth() -> None:
    pitches = [pitch for _, _, pitch, _ in read_in_ticks()["melody"]]

    moves = [abs(after - before) for before, after in pairwise(pitches) if after != before]

    assert sum(move <= 2 for move in moves) / len(moves) > 0.7
    assert max(moves) <= 7


# F5 is 77, A5 81, C6 84, F6 89; F4 in the bass is 65, C4 60.
@pytest.mark.parametrize(
    ("bar", "melody", "bass"), [(8, 81, 65), (16, 77, 65), (24, 84, 60), (32, 77, 65), (40, 89, 65)]
)
def test_phrases_close_on_the_tonic_and_the_middle_one_on_the_dominant(bar: int, melody: int, bass: int) -> None:
    downbeat = (bar - 1) * BAR_TICKS
    voices = read_in_ticks()

    assert [pitch for start, _, pitch, _ in voices["melody"] if start == downbeat] == [melody]
    assert min(pitch for start, _, pitch, _ in voices["accompaniment"] if start == downbeat) == bass


def test_the_voices_never_move_in_parallel_octaves_or_fifths_between_melody_and_inner_voice_or_bass() -> None:
    voices = {name: as_written(notes) for name, notes in read_in_ticks().items()}
    outline = []
    for tick in range(0, 40 * BAR_TICKS, 120):
        sounding = {name: [p for start, end, p in notes if start <= tick < end] for name, notes in voices.items()}
        outline.append((sounding["melody"], sounding["inner voice"], sounding["accompaniment"][:1]))

    for before, after in pairwise(outline):
        for one, other in combinations(range(3), 2):
            if not (before[one] and before[other] and after[one] and after[other]):
                continue
            first, second = before[one][0] - before[other][0], after[one][0] - after[other][0]
            same_way = (after[one][0] - before[one][0]) * (after[other][0] - before[other][0]) > 0
            assert not (same_way and first % 12 == second % 12 and first % 12 in (0, 7))


def test_one_pitch_is_struck_three_times_faster_than_two_of_the_fastest_teeth_can_follow() -> None:
    onsets_by_pitch = defaultdict(list)
    for track in read_tracks("second"):
        for note in track.notes:
            onsets_by_pitch[note.pitch].append(note.start)

    shortest_s = min(
        onsets[place + 2] - onsets[place]
        for onsets in map(sorted, onsets_by_pitch.values())
        for place in range(len(onsets) - 2)
    )

    # Two sixteenths at 84 dotted quarters a minute (3 eighths each): 60 / 84 / 3 = 0.238 s. The outermost
    # track of mossbrook-67 needs 3.5 mm / (2 pi * 210 mm) * 90 s = 0.2387 s between two plucks.
    assert shortest_s == pytest.approx(60 / 84 / 3, abs=0.0005)
    assert shortest_s < 3.5 / (2 * 3.14159265 * 210) * 90


def test_bars_begin_louder_than_their_unstressed_eighths_and_the_end_is_soft() -> None:
    melody = read_in_ticks()["melody"]
    by_place = defaultdict(list)
    for start, _, _, velocity in melody:
        by_place[start % BAR_TICKS].append(velocity)
    mean = {place: sum(values) / len(values) for place, values in by_place.items()}

    assert mean[0] > mean[3 * 240] > max(mean[240], mean[2 * 240], mean[4 * 240], mean[5 * 240])
    assert max(velocity for *_, velocity in melody) < 127
    assert melody[-1][3] < melody[0][3]


def test_the_command_writes_the_tune_where_it_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "dance.mid"

    code = main([str(out)])

    assert code == 0
    assert out.read_bytes() == demo_tune()
    assert capsys.readouterr().out == f"{out}: {TITLE}\n"


def test_the_command_names_a_place_it_cannot_write_to(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "no-such-directory" / "dance.mid"

    code = main([str(out)])

    assert code == 2
    message = capsys.readouterr().err
    assert message == (
        f"{out}: cannot be written (No such file or directory); name a file in a directory that exists\n"
    )
    assert not out.parent.exists()


def test_a_phrase_with_a_bar_too_long_is_refused() -> None:
    seven_eighths = "r/6 | C5/7 | r/6 | r/6 | r/6 | r/6 | r/6 | r/6"

    with pytest.raises(ValueError, match=r"^phrase X, bar 2: ends 13 eighths in, not 12$"):
        compose._parse_phrase(seven_eighths, "X")


def test_a_phrase_of_seven_bars_is_refused() -> None:
    with pytest.raises(ValueError, match=r"^phrase X: 8 bars wanted, 7 written$"):
        compose._parse_phrase(" | ".join(["r/6"] * 7), "X")
