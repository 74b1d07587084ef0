"""The settings document: what the maker asks of one disc. Every field is optional."""

from collections.abc import Callable
from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, model_validator

from layout.documents.reading import (
    NotNegative,
    Part,
    Positive,
    Time,
    TimeOrZero,
    check_document,
    read_json,
)

LEAST_FACTOR, MOST_FACTOR = 0.01, 100.0  # times as written; beyond, no tune is a tune
Factor = Annotated[Positive, Field(ge=LEAST_FACTOR, le=MOST_FACTOR)]
Channel = Annotated[int, Field(ge=1, le=16)]
MOST_RULINGS = 50_000  # rulings; one for every note a tune may hold
WIDEST_TRANSPOSITION = 48  # semitones; four octaves, more moves any tune off any comb


def _not_yet(what: str, only: object) -> Callable[[object], object]:
    def check(value: object) -> object:
        if value != only or isinstance(value, bool):
            raise ValueError(f"{what} are not offered yet; leave it out or at {only!r}, got {value!r}")
        return value

    return check


class Passage(Part):
    """The part of the tune to use, [from_s, to_s), in the tune's own time as written."""

    from_s: TimeOrZero | None = None
    to_s: Time | None = None

    @model_validator(mode="after")
    def _runs_forward(self) -> Self:
        if self.to_s is not None and self.to_s <= (self.from_s or 0.0):
            raise ValueError(f"to_s ({self.to_s:g}) must be after from_s ({self.from_s or 0.0:g})")
        return self


class Speed(Part):
    """How fast the disc plays the tune: as written, fitted to the free part of the turn, or a factor.

    A factor above 1 is faster. `least` and `most` bound the factor that `fit` may choose.
    """

    mode: Literal["as-written", "fit", "factor"] = "as-written"
    factor: Factor | None = None
    least: Factor = 0.8
    most: Factor = 1.25

    @model_validator(mode="after")
    def _fields_of_its_mode(self) -> Self:
        if (self.mode == "factor") != (self.factor is not None):
            raise ValueError('give factor with mode "factor", and only then')
        if self.least > self.most:
            raise ValueError(f"least ({self.least:g}) must not be above most ({self.most:g})")
        return self


class Transpose(Part):
    """The best transposition within ± range semitones, or a fixed one."""

    mode: Literal["best", "fixed"] = "best"
    semitones: Annotated[int, Field(ge=-WIDEST_TRANSPOSITION, le=WIDEST_TRANSPOSITION)] | None = None
    range: Annotated[int, Field(ge=0, le=WIDEST_TRANSPOSITION)] = 12

    @model_validator(mode="after")
    def _fields_of_its_mode(self) -> Self:
        if (self.mode == "fixed") != (self.semitones is not None):
            raise ValueError('give semitones with mode "fixed", and only then')
        return self


class Channels(Part):
    """MIDI channels, 1 to 16: which to leave out, and which carries the melody."""

    leave_out: tuple[Channel, ...] = ()
    lead: Channel | None = None


class Ruling(Part):
    """What the maker decides by hand for one note, by its index."""

    note: Annotated[int, Field(ge=0)]
    do: Literal["leave-out", "must-sound", "place"]
    track: Annotated[int, Field(ge=1)] | None = None

    @model_validator(mode="after")
    def _place_has_a_track(self) -> Self:
        if (self.do == "place") != (self.track is not None):
            raise ValueError('give track with do "place", and only then')
        return self


class Settings(Part):
    """What the maker asks for. The defaults: the whole tune as written, best transposition within ±12."""

    format: Literal["discwright-settings/1"] = "discwright-settings/1"
    title: Annotated[str, Field(min_length=1, max_length=80)] | None = None
    passage: Passage = Passage()
    speed: Speed = Speed()
    transpose: Transpose = Transpose()
    octave_moves: Annotated[Literal["none"], BeforeValidator(_not_yet("octave moves", "none"))] = "none"
    largest_nudge_ms: NotNegative = 20.0
    channels: Channels = Channels()
    rulings: Annotated[tuple[Ruling, ...], Field(max_length=MOST_RULINGS)] = ()
    sequence: Annotated[int, Field(ge=1, le=65535)] = 1
    discs: Annotated[Literal[1], BeforeValidator(_not_yet("several discs", 1))] = 1


def read_settings(text: str | bytes) -> Settings:
    """A settings document; `{}` gives the defaults.

    Raises:
        DocumentError: Not JSON, or not valid settings; names every fault found.
    """
    plain, _ = read_json(text, document="settings")
    return check_document(Settings, plain, document="settings")
