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
