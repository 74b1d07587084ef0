"""Music as makers write it for discs: what they add to the notes of a tune, each off by default."""

from typing import Annotated, Literal

from pydantic import Field

from layout.documents.reading import Positive, Within
from layout.documents.settings_part import IS_WHOLE, SettingsPart, Share

# Seconds between plucks of a note that is plucked again: below, a star wheel of a shipped movement hardly
# follows on two tracks; above, the tooth has long faded.
LEAST_AGAIN_S, MOST_AGAIN_S = 0.1, 10.0


class Writing(SettingsPart):
    """Music as makers write it. Every field is off by default."""

    pluck_again_s: Annotated[Positive, Within(ge=LEAST_AGAIN_S, le=MOST_AGAIN_S)] | None = None
    """A note that lasts longer is plucked again every so many seconds (0.1 to 10) while it lasts, on
    alternate teeth where its pitch has several; null: every note is plucked once."""

    ornaments: Literal["as-any-note", "over-doubled-teeth"] = "as-any-note"
    """Notes of trills and grace notes. over-doubled-teeth: consecutive ones of one pitch go to different
    teeth, or are left out; as-any-note: they are notes like others."""

    chords: Literal["together", "bass-first"] = "together"
    """The notes of one moment. bass-first: spread from the lowest up, within largest_nudge_ms; together:
    not spread."""

    two_teeth_from_velocity: Annotated[int, Field(ge=1, le=127), IS_WHOLE] | None = None
    """Notes of at least this MIDI velocity (1 to 127) are plucked on two teeth where their pitch has two;
    null: on one."""

    ringing_tooth_cost: Share = 0.0
    """The share of its weight (0 to 1) that a pluck loses where its tooth still rings from the pluck before;
    above 0, teeth of one pitch take turns."""

    ringing_bass_cost: Share = 0.0
    """The share of its weight (0 to 1) that a pluck on a tooth without damper loses where it rings on under
    a harmony it is no part of."""
