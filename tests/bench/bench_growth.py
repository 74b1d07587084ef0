"""How time and memory grow with the tune: the same music, the same notes a second, on a longer turn."""

import json
import resource
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path
from statistics import median

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.arrange import arrange
from layout.documents import shipped_movement
from layout.mechanics.arrays import FloatArray, frozen_floats, frozen_ints
from layout.mechanics.spacing import Spacing
from layout.read import Score
from tests.bench.opponents.corpus import CUTTER, movement_with, score_of, settings_with
from tests.bench.opponents.large_disc import FASTEST_SHARE, FREE_SHARE
from tests.bench.opponents.table import say, say_table
from tests.outside.posed import spacing_on

BLOCK = ("joplin rag", "haydn finale", "wieck polonaise 4", "verdi canzone", "bach prelude and fugue 846")
BLOCK_NOTES = 500  # so many from all of them together
SIZES = (500, 1_000, 2_000, 4_000)
RUNS = 3
PAUSE_S = 0.5  # between two pieces
NOTES_PER_S = 12.0  # about that of the rag and the quartet; every piece is played so fast
KB_PER_MB = 1024


def block() -> FloatArray:
    """The first notes of some real pieces end to end: a row each for onset, duration, pitch, velocity and channel."""
    parts, begin_s, each = [], 0.0, BLOCK_NOTES // len(BLOCK)
    for name in BLOCK:
        score = score_of(name)
        onset_s = score.onset_s[:each] - score.onset_s[0]
        factor = NOTES_PER_S * float(onset_s[-1]) / each
        notes = np.vstack([onset_s, score.duration_s[:each], score.pitch[:each], score.velocity[:each]])
        notes[:2] /= factor
        notes[0] += begin_s
        parts.append(np.vstack([notes, score.channel[:each]]))
        begin_s = float(notes[0, -1]) + PAUSE_S
    return np.hstack(parts)


def tune_of(count: int) -> Score:
    """The block over and over, so that every size is as hard as the others."""
    once = block()
    length_s = once[0, -1] + PAUSE_S
    shift_s = np.zeros_like(once)
    shift_s[0] = length_s
    columns = np.hstack([once + place * shift_s for place in range(count // BLOCK_NOTES)])
    onset_s, duration_s, pitch, velocity, channel = columns
    return Score(
        onset_s=frozen_floats(onset_s),
        duration_s=frozen_floats(duration_s),
        pitch=frozen_ints(pitch.astype(np.int64)),
        velocity=frozen_ints(velocity.astype(np.int64)),
        channel=frozen_ints(channel.astype(np.int64)),
        bar_s=frozen_floats([0.0]),
        beat_s=frozen_floats([0.0]),
        title="",
        midi_format=1,
        sequence=1,
        sequence_count=1,
        percussion_count=0,
        warnings=(),
    )


def with_longer_turn(spacing: Spacing, times: float) -> Spacing:
    """The same repeats in seconds on a turn so many times as long, as on a disc so much larger."""
    return Spacing(
        wheel_rad=frozen_floats(spacing.wheel_rad / times),
        damper_rad=frozen_floats(spacing.damper_rad / times),
        web_rad=frozen_floats(spacing.web_rad / times),
        between=tuple(
            replace(pair, from_rad=pair.from_rad / times, to_rad=pair.to_rad / times) for pair in spacing.between
        ),
    )


def measure(count: int) -> None:
    """In a process of its own: seconds of a turn, plucks, seconds taken, proof, memory before and at its peak."""
    score, shipped = tune_of(count), shipped_movement("mossbrook-67")
    turn_s = float(score.onset_s[-1]) / FREE_SHARE
    movement = movement_with("mossbrook-67", {"revolution_s": turn_s, "fastest_revolution_s": turn_s * FASTEST_SHARE})
    spacing = with_longer_turn(spacing_on(shipped, CUTTER), turn_s / shipped.revolution_s)
    # The drive of a larger disc would be another; what it carries is left aside.
    settings = settings_with(speed={"mode": "as-written"}, load_limit="ignore")
    before_kb = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    took_s = []
    for _ in range(RUNS):
        start_s = time.perf_counter()
        arrangement = arrange(score, movement, settings, spacing)
        took_s.append(time.perf_counter() - start_s)
    peak_kb = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    told = [turn_s, len(arrangement.notes), median(took_s), arrangement.worth.proved, before_kb, peak_kb]
    say(json.dumps(told))


def main() -> None:
    """Print a row for each size, and the exponent of the line through them in logarithms."""
    rows, times_s = [], []
    for count in SIZES:
        child = subprocess.run([sys.executable, __file__, str(count)], capture_output=True, text=True, check=True)
        turn_s, plucks, took_s, proved, before_kb, peak_kb = json.loads(child.stdout)
        times_s.append(took_s)
        rows.append(
            [
                str(count),
                f"{turn_s:.0f} s",
                str(plucks),
                "yes" if proved else "no",
                f"{took_s:.2f} s",
                f"{1000 * took_s / count:.2f} ms",
                f"{before_kb / KB_PER_MB:.0f} MB",
                f"{peak_kb / KB_PER_MB:.0f} MB",
            ]
        )
    say(f"real music at {NOTES_PER_S:g} notes a second, over and over, on mossbrook-67 with a turn as long as needed,")
    say(
        "repeats as long in seconds as on the shipped turn; best of 25 transpositions, octave moves none, loads ignored"
    )
    say_table(["notes", "turn", "plucks", "proved", "time", "per note", "memory before", "peak memory"], rows)
    slope, _ = np.polyfit(np.log(SIZES), np.log(times_s), 1)
    say(f"time grows as notes to the power {slope:.2f}")


if __name__ == "__main__":
    if len(sys.argv) > 1:
        measure(int(sys.argv[1]))
    else:
        main()
