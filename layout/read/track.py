"""Walking the events of one track chunk.

Source: Standard MIDI Files 1.0 (RP-001). A track is a row of delta time and event. An event is a
channel message (its status byte may be left out where it repeats: running status), a system
exclusive event F0 or F7 with its length, or a meta event FF with type and length. The last two
cancel running status. Other status bytes belong to live MIDI and cannot stand in a file.
"""

from layout.errors import MidiReadError
from layout.read.container import Chunk
from layout.read.faults import DAMAGED, WRITER, shown
from layout.read.messages import ChannelStatuses
from layout.read.metre import TimeSignature, time_signature
from layout.read.notes import NoteCollector
from layout.read.oddities import Oddities, Oddity
from layout.read.quantity import read_quantity
from layout.read.title import title_of

_FIRST_SYSTEM_STATUS = 0xF0
_SYSTEM_EXCLUSIVE = (0xF0, 0xF7)
_META = 0xFF

_TRACK_NAME = 0x03
_END_OF_TRACK = 0x2F
_SET_TEMPO = 0x51
_TEMPO_BYTES = 3
_TIME_SIGNATURE = 0x58


class SequenceWalk:
    """The walk over the tracks of one sequence: what a disc needs is kept, the rest is skipped by length.

    Attributes:
        notes: The notes met so far.
        tempi: Tempo events as (tick, byte offset, microseconds per quarter note), in file order.
        signatures: Time signatures as (tick, byte offset, metre), in file order.
        title: The first name with something to print in the first track walked, which is where the
            specification puts the name of a sequence; later tracks hold the names of parts.
        last_tick: Where the longest track walked so far ends.
    """

    def __init__(self, statuses: ChannelStatuses, oddities: Oddities) -> None:
        self.notes = NoteCollector()
        self.tempi: list[tuple[int, int, int]] = []
        self.signatures: list[tuple[int, int, TimeSignature]] = []
        self.title = ""
        self.last_tick = 0
        self._statuses = statuses
        self._oddities = oddities
        self._in_first_track = True
        self._body = b""
        self._base = 0
        self._ended = False

    def walk(self, tune: bytes, track: Chunk) -> None:
        """Walk one track chunk of the sequence.

        Raises:
            MidiReadError: An event is cut short, undefined, or past a limit.
        """
        self._body, self._base, self._ended = tune[track.begin : track.end], track.begin, False
        tick = self._walk_events()
        self.last_tick = max(self.last_tick, tick)
        self.notes.end_track()
        self._in_first_track = False
        if not self._ended:
            self._oddities.meet(Oddity.NO_END_OF_TRACK, at=track.end)

    def _walk_events(self) -> int:
        """Walk to the end of the track and return its last tick. This loop is the cost of reading."""
        body, base, end = self._body, self._base, len(self._body)
        statuses, take = self._statuses, self.notes.take
        at = tick = running = 0
        while at < end:
            # A delta time of one byte, nearly every one, is spared the call.
            delta, at = read_quantity(body, at, base=base) if body[at] & 0x80 else (body[at], at + 1)
            tick += delta
            if at == end:
                raise self._cut_short("an event after the delta time")
            status = body[at]
            if status & 0x80:
                event_at, at = at, at + 1
            elif running:
                event_at, status = at, running
            else:
                raise self._no_status(at)
            if status >= _FIRST_SYSTEM_STATUS:
                running = 0
                at = self._system_event(status, at, tick)
                continue
            running = status
            _, data_bytes, key_bytes, notes = statuses[status]
            data = body[at : at + data_bytes]
            if len(data) < data_bytes or not data.isascii():
                raise self._bad_data(status, at)
            at += data_bytes
            if notes is not None:
                take(notes[data[:key_bytes]], tick=tick, byte_offset=base + event_at)
        return tick

    def _system_event(self, status: int, at: int, tick: int) -> int:
        """Read the event after a status byte F0 to FF; the place after it is returned."""
        if status == _META:
            return self._meta_event(at, tick)
        if status in _SYSTEM_EXCLUSIVE:
            return self._after_payload(at)[1]
        raise MidiReadError(
            byte_offset=self._base + at - 1,
            found=f"status byte {status:02X}, a system message of live MIDI",
            expected="a channel message 80 to EF, system exclusive F0 or F7, or a meta event FF",
            remedy=WRITER,
        )

    def _meta_event(self, at: int, tick: int) -> int:
        """Read the meta event whose type stands at `at`; the place after it is returned."""
        if at == len(self._body):
            raise self._cut_short("the type of the meta event")
        kind = self._body[at]
        if kind & 0x80:
            raise MidiReadError(
                byte_offset=self._base + at,
                found=f"meta event type {kind:02X}",
                expected="a type from 00 to 7F",
                remedy=DAMAGED,
            )
        begin, after = self._after_payload(at + 1)
        if kind == _SET_TEMPO:
            self._set_tempo(self._body[begin:after], begin, tick)
        elif kind == _TIME_SIGNATURE:
            self._set_metre(self._body[begin:after], self._base + begin, tick)
        elif kind == _TRACK_NAME and self._in_first_track and not self.title:
            self.title = title_of(self._body[begin:after])
        elif kind == _END_OF_TRACK:
            self._ended = True
            if after < len(self._body):
                self._oddities.meet(Oddity.AFTER_END_OF_TRACK, at=self._base + after)
            return len(self._body)
        return after

    def _after_payload(self, at: int) -> tuple[int, int]:
        """Where the payload of the length that stands at `at` begins and ends in the track."""
        body = self._body
        # A length of one byte, nearly every one, is spared the call.
        is_short = at < len(body) and not body[at] & 0x80
        length, begin = (body[at], at + 1) if is_short else read_quantity(body, at, base=self._base)
        if length > len(self._body) - begin:
            raise MidiReadError(
                byte_offset=self._base + at,
                found=f"an event of {length} bytes",
                expected=f"at most the {len(self._body) - begin} bytes left in the track",
                remedy=DAMAGED,
            )
        return begin, begin + length

    def _set_tempo(self, payload: bytes, begin: int, tick: int) -> None:
        """Take a tempo event.

        A recognised meta event may be longer than expected; what is past the known part is ignored
        (Standard MIDI Files 1.0, on meta events; from memory).
        """
        offset = self._base + begin
        if len(payload) < _TEMPO_BYTES:
            raise MidiReadError(
                byte_offset=offset - 1,
                found=f"a tempo event of {len(payload)} bytes",
                expected=f"{_TEMPO_BYTES} bytes, microseconds per quarter note",
                remedy=WRITER,
            )
        if len(payload) > _TEMPO_BYTES:
            self._oddities.meet(Oddity.LONG_TEMPO, at=offset)
        tempo_us = int.from_bytes(payload[:_TEMPO_BYTES], "big")
        if tempo_us == 0:
            raise MidiReadError(
                byte_offset=offset,
                found="a tempo of 0 microseconds per quarter note",
                expected="at least 1",
                remedy=WRITER,
            )
        self.tempi.append((tick, offset, tempo_us))

    def _set_metre(self, payload: bytes, offset: int, tick: int) -> None:
        """Take a time signature; one that cannot be followed moves no note, so it is only told."""
        metre = time_signature(payload)
        if metre is None:
            self._oddities.meet(Oddity.BAD_METRE, at=offset)
        else:
            self.signatures.append((tick, offset, metre))

    def _cut_short(self, expected: str) -> MidiReadError:
        return MidiReadError(
            byte_offset=self._base + len(self._body),
            found="the end of the track",
            expected=expected,
            remedy=DAMAGED,
        )

    def _no_status(self, at: int) -> MidiReadError:
        return MidiReadError(
            byte_offset=self._base + at,
            found=f"data byte {self._body[at]:02X} with no status in force",
            expected="a status byte, 80 or above (system exclusive and meta events end running status)",
            remedy=DAMAGED,
        )

    def _bad_data(self, status: int, at: int) -> MidiReadError:
        kind, data_bytes, *_ = self._statuses[status]
        data = self._body[at : at + data_bytes]
        high = next((place for place, byte in enumerate(data) if byte & 0x80), None)
        if high is None:
            return self._cut_short(f"{data_bytes} data bytes of {kind} at byte {self._base + at}")
        return MidiReadError(
            byte_offset=self._base + at + high,
            found=shown(data[high : high + 1]),
            expected=f"data byte {high + 1} of {data_bytes} of {kind} (status {status:02X}), 00 to 7F",
            remedy=DAMAGED,
        )
