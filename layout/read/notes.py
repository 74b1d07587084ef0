"""Which note-off ends which note.

The specification gives tracks of one sequence to one stream of messages: a note-off ends a note of
its channel and pitch, whatever track it stands in. Parts on one channel are nevertheless written a
track each, with their note-offs beside their note-ons. Both are honoured:

1. Within a track, a note-off ends the oldest note of its channel and pitch still sounding. A second
   note-on of a sounding pitch leaves the first one sounding.
2. Some programs sort a tick's note-offs before its note-ons, and so write a note of no length (a
   grace note) backwards. Such a note-off, which ends nothing, is the note's own if another note-on
   of the pitch comes before any other note-off; else every later note of the pitch would be ended
   by the note-off of the next.
3. A note-off that found none in its own track ends the oldest note of its channel and pitch that
   no track has ended and that begins in its tick or before. So a note-off in another track ends its
   note, and a last note written backwards has no length.
4. What is left lasts to the end of the sequence.
"""

from collections import defaultdict, deque

from layout.errors import MidiReadError
from layout.read.limits import LIMITS
from layout.read.messages import NoteMessage
from layout.read.oddities import Oddities, Oddity

PERCUSSION_CHANNEL = 10  # General MIDI 1 (RP-003): channel 10 of 1 to 16 is percussion
_PERCUSSION = PERCUSSION_CHANNEL - 1  # as status bytes count channels

_SOUNDING = -1


class NoteCollector:
    """The notes of one sequence in file order, as the tracks are walked.

    Attributes:
        onset_tick: Tick of each note-on.
        end_tick: Tick of the note-off, -1 while the note is sounding.
        key: channel * 128 + pitch, channel from 0.
        velocity: 1 to 127.
        byte_offset: Where each note-on stands in the file.
        percussion_count: Note-ons of the percussion channel, which are left out.
    """

    def __init__(self) -> None:
        self.onset_tick: list[int] = []
        self.end_tick: list[int] = []
        self.key: list[int] = []
        self.velocity: list[int] = []
        self.byte_offset: list[int] = []
        self.percussion_count = 0
        self._sounding: defaultdict[int, deque[int]] = defaultdict(deque)
        self._left_sounding: defaultdict[int, list[int]] = defaultdict(list)
        self._loose_offs: defaultdict[int, list[int]] = defaultdict(list)

    def take(self, message: NoteMessage, *, tick: int, byte_offset: int) -> None:
        """Take the next note message of the track.

        Raises:
            MidiReadError: It begins one note more than the limit.
        """
        key, velocity = message
        if key >> 7 == _PERCUSSION:
            self.percussion_count += velocity > 0
        elif velocity:
            if self._sounding[key]:
                self._end_backward_note(key)
            self._sounding[key].append(len(self.key))
            self.onset_tick.append(tick)
            self.end_tick.append(_SOUNDING)
            self.key.append(key)
            self.velocity.append(velocity)
            self.byte_offset.append(byte_offset)
            if len(self.key) > LIMITS.notes:
                raise _too_many_notes(byte_offset)
        elif self._sounding[key]:
            self.end_tick[self._sounding[key].popleft()] = tick
        else:
            self._loose_offs[key].append(tick)

    def _end_backward_note(self, key: int) -> None:
        """End the oldest sounding note of a key, if it was written backwards (rule 2)."""
        sounding, loose_offs = self._sounding[key], self._loose_offs[key]
        # A note-off is loose only where nothing sounded, so the oldest note alone can have begun on it.
        if loose_offs and loose_offs[-1] == self.onset_tick[sounding[0]]:
            self.end_tick[sounding.popleft()] = loose_offs.pop()

    def end_track(self) -> None:
        """Close the track: what it leaves sounding waits for the note-offs of the other tracks."""
        for key, notes in self._sounding.items():
            if notes:
                self._left_sounding[key].extend(notes)
        self._sounding.clear()

    def end_sequence(self, last_tick: int, oddities: Oddities) -> None:
        """End every note that still sounds, by rules 3 and 4 above.

        Args:
            last_tick: Where the longest track of the sequence ends.
            oddities: Told of the notes without a note-off.
        """
        never_ended: list[int] = []
        for key, left in self._left_sounding.items():
            waiting = deque(sorted(left, key=self.onset_tick.__getitem__))
            for tick in sorted(self._loose_offs[key]):
                if waiting and self.onset_tick[waiting[0]] <= tick:
                    self.end_tick[waiting.popleft()] = tick
            never_ended.extend(waiting)
        for note in never_ended:
            self.end_tick[note] = last_tick
        if never_ended:
            first_at = self.byte_offset[min(never_ended)]
            oddities.meet(Oddity.NEVER_ENDED, at=first_at, count=len(never_ended))


def _too_many_notes(byte_offset: int) -> MidiReadError:
    return MidiReadError(
        byte_offset=byte_offset,
        found=f"note {LIMITS.notes + 1}",
        expected=f"at most {LIMITS.notes} notes outside the percussion channel",
        remedy="cut the tune to the passage the disc is to play",
    )
