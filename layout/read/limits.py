"""Every limit of reading, in one table."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadLimits:
    """How large a tune may be.

    Attributes:
        file_bytes: Largest file, in bytes. 2 MiB is also the service's upload limit; 50,000 notes
            written in full (two events of four bytes each) take 0.4 MB.
        notes: Most notes outside the percussion channel, a count. One turn of the largest disc holds
            a few thousand; this leaves room to choose a passage.
        last_onset_s: Latest onset, in seconds: 4 h, far more than one turn plays, and a bound on
            what a few tempo or delta-time bytes can ask for.
        title_characters: Longest title kept, in characters: one line of the MARKS layer.
        quantity_bytes: Longest variable-length quantity, in bytes. Standard MIDI File 1.0: the
            largest number allowed is 0FFFFFFF, so that it fits four bytes.
    """

    file_bytes: int = 2_097_152
    notes: int = 50_000
    last_onset_s: int = 4 * 60 * 60
    title_characters: int = 80
    quantity_bytes: int = 4


LIMITS = ReadLimits()
