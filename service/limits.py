"""Every limit a user can run into, each with its unit and its reason: one table for the command and the service."""

from dataclasses import Field, dataclass, field, fields
from typing import Any

MIB = 1024 * 1024


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """A limit as it is shown to users."""

    name: str
    value: int
    unit: str
    reason: str


def _limit(value: int, unit: str, reason: str) -> Any:
    """A dataclass field that is a limit; typed Any as `dataclasses.field` is, so that it can be an int."""
    return field(default=value, metadata={"unit": unit, "reason": reason})


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """The limits of the command and the service; /v1/limits lists them under the names of the fields."""

    upload_bytes: int = _limit(
        2 * MIB, "bytes", "largest body of a request, in any form: tens of times the largest tune a disc can hold"
    )
    document_bytes: int = _limit(
        2 * MIB, "bytes", "largest movement, cutter or settings document: 50,000 rulings of up to 40 bytes fit"
    )
    form_parts: int = _limit(8, "parts", "most parts of a multipart body: four are known, a few more get a clear error")
    drawing_bytes: int = _limit(
        32 * MIB, "bytes", "largest drawing that is checked: many times a full disc of the largest movement"
    )
    reason_characters: int = _limit(
        200, "characters", "longest despite_findings reason: it is lettered on the disc and stands in every file"
    )
    shown_problems: int = _limit(
        20, "problems", "most faults of a document told in one answer, so that the answer stays readable"
    )
    shown_characters: int = _limit(
        500, "characters", "longest text told about one fault, since it may repeat what was sent"
    )
    cache_layouts: int = _limit(
        200, "layouts", "layouts kept for their links; the least recently used goes first, post the tune again then"
    )
    cache_bytes: int = _limit(
        256 * MIB, "bytes", "disk taken by kept layouts; packed, a full disc of the largest movement takes under 1 MiB"
    )
    abandoned_part_s: int = _limit(
        3600, "seconds", "age at which a file left half-written in the cache by a stopped worker is removed"
    )
    file_max_age_s: int = _limit(
        86_400, "seconds", "how long a client may keep a file without asking: a day, as its bytes never change"
    )
    drained_bytes: int = _limit(
        16 * MIB, "bytes", "how much of a refused body is still read, so that the sender gets to read the answer"
    )

    def told(self) -> tuple[Limit, ...]:
        """Every limit: those of reading a tune, then these, in the order of the fields."""
        return OF_READING + tuple(self._told(part) for part in fields(self))

    def _told(self, part: Field[Any]) -> Limit:
        about = part.metadata
        return Limit(name=part.name, value=getattr(self, part.name), unit=about["unit"], reason=about["reason"])


# The limits of layout.read.limits, in words for users. Only the walk may call a stage, so they stand here
# a second time; a test holds the two tables together.
OF_READING = (
    Limit(
        name="tune_file_bytes",
        value=2 * MIB,
        unit="bytes",
        reason="largest tune; 50,000 notes written in full take a fifth of it",
    ),
    Limit(
        name="tune_notes",
        value=50_000,
        unit="notes",
        reason="most notes outside the percussion channel; one turn holds a few thousand at most",
    ),
    Limit(
        name="tune_last_onset_s",
        value=4 * 60 * 60,
        unit="seconds",
        reason="latest onset; far later than one turn plays, so that a passage can be chosen",
    ),
    Limit(
        name="tune_title_characters",
        value=80,
        unit="characters",
        reason="longest title kept of a tune: one line of lettering on the disc",
    ),
    Limit(
        name="tune_quantity_bytes",
        value=4,
        unit="bytes",
        reason="longest variable-length quantity, as the Standard MIDI File specification says",
    ),
)
