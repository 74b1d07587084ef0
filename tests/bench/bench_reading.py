"""Reading a tune whole, beside the least that mido does with it: its tokens, and nothing done with them.

The floor is `for track in MidiFile(...).tracks: for message in track: pass`, without clock or notes. Ours gives the
notes with their ends at exact times, bars and beats, title and warnings, under its limits. First both must find the
same notes begun. Processor time, turn and turn about, medians.
"""

import gc
import io
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from statistics import median

import mido

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.read import read_score
from tests.bench.opponents.large_disc import large_tune
from tests.bench.opponents.table import say, say_table, told
from tests.outside.pieces import ALL_PIECE_NAMES, public_domain_piece

SIZES = (300, 2_000, 8_000)
RUNS = 9
MOST_RATIO = 1.3
PERCUSSION_CHANNEL = 9


def bare(tune: bytes) -> None:
    """mido's tokens, one after the other."""
    for track in mido.MidiFile(file=io.BytesIO(tune)).tracks:
        for _ in track:
            pass


def begun_by_mido(tune: bytes) -> int:
    """How many notes that are no drums mido sees begin."""
    messages = (message for track in mido.MidiFile(file=io.BytesIO(tune)).tracks for message in track)
    return sum(
        message.type == "note_on" and message.velocity > 0 and message.channel != PERCUSSION_CHANNEL
        for message in messages
    )


def took_ms(work: Callable[[bytes], object], tunes: Sequence[bytes]) -> float:
    """Milliseconds of the processor for all tunes."""
    begin_s = time.process_time()
    for tune in tunes:
        work(tune)
    return 1000 * (time.process_time() - begin_s)


def main() -> None:
    """Print a row for the corpus and each size, then the ratios beside the goal."""
    say(__doc__ or "")
    gc.freeze()  # for both sides, as the service does once all is imported
    given = {f"{len(ALL_PIECE_NAMES)} public-domain pieces": [public_domain_piece(name) for name in ALL_PIECE_NAMES]}
    given |= {f"a tune of {count} notes": [large_tune(count)] for count in SIZES}
    rows, ratios = [], {}
    for name, tunes in given.items():
        notes = [read_score(tune).note_count for tune in tunes]
        if notes != [begun_by_mido(tune) for tune in tunes]:
            sys.exit(f"{name}: the two do not find the same notes, and what they take is not compared")
        floors_ms, ours_ms = [], []
        for _ in range(RUNS):
            floors_ms.append(took_ms(bare, tunes))
            ours_ms.append(took_ms(read_score, tunes))
        floor_ms, our_ms = median(floors_ms), median(ours_ms)
        ratios[name] = our_ms / floor_ms
        rows.append([name, str(sum(notes)), f"{floor_ms:.2f}", f"{our_ms:.2f}", f"{ratios[name]:.2f}"])
    say_table(["read", "notes", "mido's tokens, ms", "ours, ms", "ratio"], rows)
    for name, ratio in ratios.items():
        told(f"reading {name}, beside mido's tokens", ratio, MOST_RATIO, most=True)


if __name__ == "__main__":
    main()
