"""Every limit of reading, in one table."""

from dataclasses import dataclass

from layout.limits import limit


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadLimits:
    """How large a tune may be."""

    file_bytes: int = limit(
        2 * 1024 * 1024, "bytes", "largest tune; 50,000 notes written in full, eight bytes each, take a fifth of it"
    )
    notes: int = limit(
        50_000, "notes", "most notes outside the percussion channel; one turn holds a few thousand at most"
    )
    last_onset_s: int = limit(
        4 * 60 * 60, "seconds", "latest onset; far later than one turn plays, so that a passage can be chosen"
    )
    title_characters: int = limit(80, "characters", "longest title kept of a tune: one line of lettering on the disc")
    beats: int = limit(
        100_000, "beats", "most beats of a tune; 4 hours at 416 a minute have as many. Past it, bars are not the file's"
    )
    denominator_power: int = limit(
        7, "power of two", "largest denominator of a time signature: 128th notes are the shortest commonly written"
    )
    quantity_bytes: int = limit(
        4, "bytes", "longest variable-length quantity: Standard MIDI File 1.0 allows no number above 0FFFFFFF"
    )


LIMITS = ReadLimits()
