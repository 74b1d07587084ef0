"""The settings document: what the maker asks of one disc. Every field is optional."""

from typing import Annotated, Literal, Self

from pydantic import ConfigDict, Field, model_validator

from layout.documents.conditions import only_where
from layout.documents.reading import NotNegative, Time, Within, check_document, read_json
from layout.documents.settings_part import IS_WHOLE, Channel, SettingsPart, Share
from layout.documents.settings_passage import Passage, Speed
from layout.documents.settings_writing import Writing

MOST_RULINGS = 50_000  # rulings; one for every note a tune may hold
WIDEST_TRANSPOSITION = 48  # semitones; four octaves, more moves any tune off any comb
# Milliseconds. Players of an ensemble are apart by 30 to 50 ms unheard (Rasch 1979); beyond, a note is late.
MOST_NUDGE_MS = 50.0
MOST_DISCS = 24  # discs; a box of them, and an hour of music at two and a half minutes a turn

Nudge = Annotated[NotNegative, Within(le=MOST_NUDGE_MS)]


class Transpose(SettingsPart):
    """By how much the whole tune is transposed."""

    model_config = ConfigDict(json_schema_extra={"allOf": [only_where("mode", "fixed", "semitones")]})

    mode: Literal["best", "fixed"] = "best"
    """best: what keeps the most weight within range; fixed: by semitones."""

    semitones: Annotated[int, Field(ge=-WIDEST_TRANSPOSITION, le=WIDEST_TRANSPOSITION), IS_WHOLE] | None = None
    """Semitones up (below 0: down) to transpose by, −48 to 48, with mode "fixed" only."""

    range: Annotated[int, Field(ge=0, le=WIDEST_TRANSPOSITION), IS_WHOLE] = 12
    """The most semitones up or down that "best" tries, 0 to 48."""

    @model_validator(mode="after")
    def _fields_of_its_mode(self) -> Self:
        if (self.mode == "fixed") != (self.semitones is not None):
            raise ValueError('give semitones with mode "fixed", and only then')
        return self


class Channels(SettingsPart):
    """MIDI channels, 1 to 16: which are played, and which carries the melody."""

    leave_out: tuple[Channel, ...] = ()
    """Channels, 1 to 16, whose notes are left out."""

    keep_only: tuple[Channel, ...] = ()
    """The only channels, 1 to 16, whose notes are played; empty: all."""

    lead: Channel | None = None
    """The channel, 1 to 16, of the melody, whose notes weigh most; null: the highest voice is the melody."""

    @model_validator(mode="after")
    def _do_not_contradict(self) -> Self:
        both = sorted(set(self.leave_out) & set(self.keep_only))
        if both:
            raise ValueError(f"channel {both[0]} is in leave_out and in keep_only; drop it from one of them")
        if self.lead in self.leave_out:
            raise ValueError(f"the lead, channel {self.lead}, is in leave_out; drop it there, or state no lead")
        if self.lead is not None and self.keep_only and self.lead not in self.keep_only:
            raise ValueError(f"the lead, channel {self.lead}, is not in keep_only; add it there, or state no lead")
        return self


class Ruling(SettingsPart):
    """What the maker decides by hand for one note."""

    model_config = ConfigDict(json_schema_extra={"allOf": [only_where("do", "place", "track")]})

    note: Annotated[int, Field(ge=0), IS_WHOLE]
    """The note's index, from 0, as `notes` of layout.json counts them."""

    do: Literal["leave-out", "must-sound", "place"]
    """leave-out; must-sound: on any track that sounds it; place: on the track stated, in any octave of its pitch."""

    track: Annotated[int, Field(ge=1), IS_WHOLE] | None = None
    """The number of the track, from 1, with do "place" only."""

    @model_validator(mode="after")
    def _place_has_a_track(self) -> Self:
        if (self.do == "place") != (self.track is not None):
            raise ValueError('give track with do "place", and only then')
        return self


class Settings(SettingsPart):
    """What the maker asks for. The defaults: the whole tune as written, best transposition within ±12."""

    format: Literal["discwright-settings/1"] = "discwright-settings/1"
    """The name of this kind of document."""

    title: Annotated[str, Field(min_length=1, max_length=80)] | None = None
    """The title lettered on the disc, 1 to 80 characters; null: the tune's own name."""

    order: Annotated[str, Field(pattern=r"^[A-Za-z0-9][A-Za-z0-9 ./_-]{0,39}$")] | None = None
    """The shop's order number, lettered on the disc: 1 to 40 letters, digits, spaces and . / _ -; null: none."""

    passage: Passage = Passage()
    """The part of the tune to use; the default is the whole tune from its first note on."""

    speed: Speed = Speed()
    """How fast the disc plays the tune; the default is as written."""

    transpose: Transpose = Transpose()
    """By how much the whole tune is transposed; the default is what keeps the most weight within ±12 semitones."""

    octave_moves: Literal["none", "outer", "all"] = "none"
    """Which notes may be moved by an octave. outer: those that are the highest or the lowest at their onset.
    A ruling may move a note by octaves whatever stands here."""

    octave_fit: Annotated[Share, Within(gt=0)] = 0.6
    """The share of its weight (above 0, to 1) that a note keeps where it is moved by an octave."""

    largest_nudge_ms: Nudge = 20.0
    """The most milliseconds (0 to 50) by which an onset may be moved earlier or later."""

    largest_melody_nudge_ms: Nudge = 6.0
    """The same in milliseconds (0 to 50) for notes of the melody, where it is the lesser: 6 ms is just heard
    between quick notes."""

    channels: Channels = Channels()
    """Which MIDI channels are played, and which carries the melody."""

    rulings: Annotated[tuple[Ruling, ...], Field(max_length=MOST_RULINGS)] = ()
    """What the maker decides by hand, note by note; at most 50,000."""

    sequence: Annotated[int, Field(ge=1, le=65535), IS_WHOLE] = 1
    """Which sequence of a format 2 file to use, from 1; 1 for other files."""

    discs: Annotated[int, Field(ge=1, le=MOST_DISCS), IS_WHOLE] = 1
    """How many discs the tune is cut into, 1 to 24."""

    load_limit: Literal["keep", "ignore"] = "keep"
    """Whether the drive's torque limit of the movement, where it states one, is kept."""

    time_limit_s: Time | None = None
    """Seconds (0.001 to 86,400) after which the search for the best arrangement stops with the best it
    has; null: no such limit. A result that was stopped so need not be the same the next time."""

    writing: Writing = Writing()
    """Music as makers write it, off by default."""


def read_settings(text: str | bytes) -> Settings:
    """A settings document; `{}` gives the defaults.

    Raises:
        DocumentError: Not JSON, or not valid settings; names every fault found.
    """
    plain, _ = read_json(text, document="settings")
    return check_document(Settings, plain, document="settings")
