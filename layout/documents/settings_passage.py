"""Which part of the tune the disc plays, and how fast."""

from typing import Annotated, Literal, Self

from pydantic import ConfigDict, Field, model_validator

from layout.documents.conditions import only_where
from layout.documents.reading import Positive, Time, TimeOrZero, Within
from layout.documents.settings_part import IS_WHOLE, SettingsPart

LEAST_FACTOR, MOST_FACTOR = 0.01, 100.0  # times as written; beyond, no tune is a tune
MOST_BAR = 100_000  # bars; a tune may have that many beats, so no bar of a tune is past it
MOST_BEAT = 256.0  # beats; the end of a bar of 255, the most a MIDI file can state

Factor = Annotated[Positive, Within(ge=LEAST_FACTOR, le=MOST_FACTOR)]
Bar = Annotated[int, Field(ge=1, le=MOST_BAR), IS_WHOLE]
Beat = Annotated[Positive, Within(ge=1, le=MOST_BEAT)]


class Passage(SettingsPart):
    """The part of the tune to use, up to but without its end; each end in seconds or by bar and beat.

    Seconds are the tune's own time as written, from the start of the file. Bars and beats count from 1.
    """

    from_s: TimeOrZero | None = None
    """Where the passage begins, in seconds (0 to 86,400); null: at the first note, or at from_bar."""

    to_s: Time | None = None
    """Where the passage ends, in seconds (above 0, to 86,400), this moment left out; null: with the tune, or
    at to_bar."""

    from_bar: Bar | None = None
    """The bar in which the passage begins, from 1; null: at the first note, or at from_s."""

    from_beat: Beat = 1.0
    """The beat of from_bar at which the passage begins, from 1; 2.5 is half a beat past the second."""

    to_bar: Bar | None = None
    """The bar in which the passage ends, from 1, its beat to_beat left out; null: with the tune, or at to_s."""

    to_beat: Beat = 1.0
    """The beat of to_bar at which the passage ends, from 1; one past the bar's last beat is the bar's end."""

    @model_validator(mode="after")
    def _one_measure_for_each_end(self) -> Self:
        for end in ("from", "to"):
            in_s, bar, beat = (getattr(self, f"{end}_{measure}") for measure in ("s", "bar", "beat"))
            if in_s is not None and bar is not None:
                raise ValueError(f"give {end}_s or {end}_bar, not both")
            if bar is None and beat > 1:
                raise ValueError(f"{end}_beat ({beat:g}) needs {end}_bar")
        return self

    @model_validator(mode="after")
    def _runs_forward(self) -> Self:
        if self.to_s is not None and self.to_s <= (self.from_s or 0.0):
            raise ValueError(f"to_s ({self.to_s:g}) must be after from_s ({self.from_s or 0.0:g})")
        begin, end = (self.from_bar or 1, self.from_beat), (self.to_bar, self.to_beat)
        if self.to_bar is not None and self.from_s is None and (self.to_bar, self.to_beat) <= begin:
            raise ValueError(
                f"bar {end[0]}, beat {end[1]:g}, where the passage ends, must be after "
                f"bar {begin[0]}, beat {begin[1]:g}, where it begins"
            )
        return self


class Speed(SettingsPart):
    """How fast the disc plays the tune."""

    model_config = ConfigDict(json_schema_extra={"allOf": [only_where("mode", "factor", "factor")]})

    mode: Literal["as-written", "fit", "factor", "best"] = "as-written"
    """as-written; fit: so that the tune fills the free part of the turn; factor: by the factor stated;
    best: whatever factor keeps the most weight, of equal ones the nearest to as written."""

    factor: Factor | None = None
    """How many times as fast as written, with mode "factor" only; above 1 is faster (0.01 to 100)."""

    least: Factor = 0.8
    """The smallest factor that "fit" and "best" may choose (0.01 to 100)."""

    most: Factor = 1.25
    """The largest factor that "fit" and "best" may choose (0.01 to 100)."""

    @model_validator(mode="after")
    def _fields_of_its_mode(self) -> Self:
        if (self.mode == "factor") != (self.factor is not None):
            raise ValueError('give factor with mode "factor", and only then')
        if self.least > self.most:
            raise ValueError(f"least ({self.least:g}) must not be above most ({self.most:g})")
        return self
