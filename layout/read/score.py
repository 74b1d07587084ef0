"""What reading gives: the notes of a tune at exact times."""

from dataclasses import dataclass

from layout.mechanics.arrays import FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Score:
    """The notes of one sequence, sorted by (onset, pitch, channel), percussion left out.

    The place of a note in these arrays is its index everywhere else (layout.json, rulings).

    Attributes:
        onset_s: Shape (n,). Seconds from the start of the file, exact through the tempo map.
        duration_s: Shape (n,). Seconds until the note-off that ends it (or the end of the sequence).
        pitch: Shape (n,). MIDI key numbers, 0 to 127; 60 is C4.
        velocity: Shape (n,). 1 to 127.
        channel: Shape (n,). 1 to 16.
        bar_s: Shape (bars + 1,). Start of every bar, bar 1 at 0.0, up to and including the first past the
            last onset; [0.0] for no notes. Exact as the onsets are: a note on a bar line has its very number.
            4/4 at 120 where the file states nothing, or has a division in frames.
        beat_s: Shape (beats + 1,). Start of every beat, to the same end; each bar's first included. A beat
            is the note of the denominator; in compound metres (6/8, 9/8, 12/8) three of them.
        title: The sequence's own name (first track-name meta event), or "" where it has none.
        midi_format: 0, 1 or 2.
        sequence: Which sequence of a format 2 file was read, from 1; 1 for formats 0 and 1.
        sequence_count: How many sequences the file holds; 1 for formats 0 and 1.
        percussion_count: Notes of channel 10 that were left out.
        warnings: Sentences about what was odd but readable, in file order.
    """

    onset_s: FloatArray
    duration_s: FloatArray
    pitch: IntArray
    velocity: IntArray
    channel: IntArray
    bar_s: FloatArray
    beat_s: FloatArray
    title: str
    midi_format: int
    sequence: int
    sequence_count: int
    percussion_count: int
    warnings: tuple[str, ...]

    @property
    def note_count(self) -> int:
        """How many notes were read."""
        return len(self.onset_s)
