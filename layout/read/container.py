"""The chunks of a Standard MIDI File, and the one RIFF wrapper it may stand in.

Source: Standard MIDI Files 1.0 (RP-001). A file is a header chunk "MThd" and track chunks "MTrk";
each chunk is a type of four characters, a length of four bytes (most significant first) and that
many bytes. Programs skip chunks of a type they do not know, and header bytes after the sixth.
RIFF is the other way round: lengths stand least significant byte first, and a chunk of odd length
is followed by one byte of padding; the form "RMID" holds the MIDI file in its chunk "data".
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from layout.errors import MidiReadError
from layout.read.faults import DAMAGED, NOT_MIDI, shown
from layout.read.oddities import Oddities, Oddity

_CHUNK_HEAD = 8  # bytes: type and length
_HEADER_FIELDS = 6  # bytes: format, track count, division
_LAST_FORMAT = 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Chunk:
    """One chunk: its type, and where its bytes stand in the file."""

    kind: bytes
    at: int
    begin: int
    end: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Contents:
    """What the chunks of the file hold.

    Attributes:
        midi_format: 0, 1 or 2.
        division: The division field, 16 bits as they stand.
        header_at: Byte offset of the header chunk; the track count stands 10 bytes on, the
            division 12.
        tracks: The track chunks in file order, never empty and never more than the header counts.
    """

    midi_format: int
    division: int
    header_at: int
    tracks: tuple[Chunk, ...]


def read_contents(tune: bytes, oddities: Oddities) -> Contents:
    """Find the header and the track chunks.

    Args:
        tune: The whole file.
        oddities: Where what is odd but readable is noted.

    Returns:
        The header's fields and at least one track chunk.

    Raises:
        MidiReadError: The file is empty or no Standard MIDI File, the header is short or says
            something undefined, a chunk reaches past the end, or no track chunk follows.
    """
    begin, end = _unwrapped(tune, oddities)
    if tune[begin : begin + 4] != b"MThd":
        raise _no_header(tune, begin, end)
    header = _chunk_at(tune, begin, end, "big")
    midi_format, track_count, division = _header_fields(tune, header)
    tracks = _track_chunks(tune, header.end, end, track_count)
    if not tracks:
        raise MidiReadError(
            byte_offset=end,
            found="the end of the file",
            expected='a track chunk "MTrk"',
            remedy=f"the file holds no track at all; {DAMAGED}",
        )
    if len(tracks) < track_count:
        oddities.meet(Oddity.TRACKS_MISSING, at=end, count=track_count - len(tracks))
    after = tracks[-1].end if len(tracks) == track_count else end
    further = tune[after : after + 4] == b"MTrk"
    remark = ": they begin with a further track that the header does not count" if further else ""
    oddities.say_ignored(tune[after:end], at=after, after="the last track", remark=remark)
    return Contents(midi_format=midi_format, division=division, header_at=begin, tracks=tracks)


def _track_chunks(tune: bytes, begin: int, end: int, track_count: int) -> tuple[Chunk, ...]:
    """The track chunks from `begin` on: as many as the header counts, or all there are."""
    tracks: list[Chunk] = []
    for chunk in _chunks(tune, begin, end, "big"):
        if chunk.kind == b"MTrk":
            tracks.append(chunk)
            if len(tracks) == track_count:
                break
    return tuple(tracks)


def _header_fields(tune: bytes, header: Chunk) -> tuple[int, int, int]:
    """Format, track count and division, checked as far as they can be without the tracks."""
    if header.end - header.begin < _HEADER_FIELDS:
        raise MidiReadError(
            byte_offset=header.at + 4,
            found=f"a header of {header.end - header.begin} bytes",
            expected=f"at least {_HEADER_FIELDS} bytes",
            remedy=DAMAGED,
        )
    midi_format, track_count, division = (
        int.from_bytes(tune[header.begin + field : header.begin + field + 2], "big") for field in (0, 2, 4)
    )
    if midi_format > _LAST_FORMAT:
        raise MidiReadError(
            byte_offset=header.begin,
            found=f"format {midi_format}",
            expected="format 0, 1 or 2",
            remedy="export the tune as a Standard MIDI File of format 0 or 1",
        )
    if track_count == 0:
        raise MidiReadError(
            byte_offset=header.begin + 2,
            found="a track count of 0",
            expected="at least 1 track",
            remedy=f"the file holds no track at all; {DAMAGED}",
        )
    return midi_format, track_count, division


def _unwrapped(tune: bytes, oddities: Oddities) -> tuple[int, int]:
    """Where the MIDI file begins and ends in the bytes sent: all of them, or a wrapper's data."""
    if not tune.startswith(b"RIFF"):
        return 0, len(tune)
    wrapper = _chunk_at(tune, 0, len(tune), "little")
    form = tune[wrapper.begin : min(wrapper.begin + 4, wrapper.end)]
    if form != b"RMID":
        raise MidiReadError(
            byte_offset=wrapper.begin,
            found=f"a RIFF file of the form {shown(form)}",
            expected='the form "RMID", which holds a MIDI file',
            remedy=NOT_MIDI,
        )
    oddities.say_ignored(tune[wrapper.end :], at=wrapper.end, after="the RIFF wrapper")
    for chunk in _chunks(tune, wrapper.begin + 4, wrapper.end, "little"):
        nested = tune[chunk.begin : chunk.begin + 4] == b"RIFF"
        if chunk.kind == b"RIFF" or (chunk.kind == b"data" and nested):
            raise _wrapper_inside(chunk)
        if chunk.kind == b"data":
            return chunk.begin, chunk.end
    raise MidiReadError(
        byte_offset=wrapper.end,
        found="the end of the RIFF wrapper",
        expected='its chunk "data" with the MIDI file',
        remedy=NOT_MIDI,
    )


def _chunks(tune: bytes, begin: int, end: int, order: Literal["big", "little"]) -> Iterator[Chunk]:
    """The chunks from `begin` up to `end`, which must be where one of them ends."""
    at = begin
    while at < end:
        chunk = _chunk_at(tune, at, end, order)
        yield chunk
        padding = chunk.end % 2 if order == "little" else 0
        at = chunk.end + padding


def _chunk_at(tune: bytes, at: int, end: int, order: Literal["big", "little"]) -> Chunk:
    """The chunk whose type begins at `at`; it must end at or before `end`."""
    head = tune[at : min(at + _CHUNK_HEAD, end)]
    kind = head[:4]
    if len(head) < _CHUNK_HEAD:
        raise MidiReadError(
            byte_offset=at,
            found=f"only {shown(head)} before the end of the file",
            expected="a chunk type and a chunk length, four bytes each",
            remedy=DAMAGED,
        )
    if not (kind.isascii() and kind.decode("ascii").isprintable()):
        raise MidiReadError(
            byte_offset=at,
            found=shown(kind),
            expected='a chunk type of four characters, such as "MTrk"',
            remedy=f"the length of the chunk before it may be wrong; {DAMAGED}",
        )
    length = int.from_bytes(head[4:], order)
    begin = at + _CHUNK_HEAD
    if length > end - begin:
        raise MidiReadError(
            byte_offset=at + 4,
            found=f'a chunk "{kind.decode("ascii")}" of {length} bytes',
            expected=f"at most the {end - begin} bytes that are left",
            remedy=DAMAGED,
        )
    return Chunk(kind=kind, at=at, begin=begin, end=begin + length)


def _no_header(tune: bytes, begin: int, end: int) -> MidiReadError:
    return MidiReadError(
        byte_offset=begin,
        found="an empty file" if not tune else shown(tune[begin : min(begin + 4, end)]),
        expected='the header chunk "MThd" a MIDI file begins with',
        remedy=NOT_MIDI,
    )


def _wrapper_inside(chunk: Chunk) -> MidiReadError:
    return MidiReadError(
        byte_offset=chunk.at if chunk.kind == b"RIFF" else chunk.begin,
        found="a RIFF wrapper inside a RIFF wrapper",
        expected='the header chunk "MThd" of a MIDI file',
        remedy="unwrap the file once, or " + NOT_MIDI,
    )
