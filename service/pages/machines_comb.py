"""A movement's comb as a chart: pitches along, teeth of one pitch stacked, what the scale lacks left hollow."""

from collections import defaultdict
from dataclasses import dataclass

from layout.documents import Movement
from layout.documents.pitch import key_of, pitch_of
from layout.documents.tooth import Tooth
from service.pages.texts import text_of

STEP, BOX = 24, 20  # units of the picture, about pixels: from pitch to pitch, and the side of a tooth
LEFT, TOP, FOOT = 8, 8, 40
SEMITONES = 12


@dataclass(frozen=True, slots=True, kw_only=True)
class ToothShown:
    """A tooth of the chart: its corner, the track in it, how it is drawn, and what it is in words."""

    x: int
    y: int
    track: str
    look: str
    words: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PitchShown:
    """A place along the foot: its middle, its name, and whether the comb has it."""

    x: int
    name: str
    octave: str
    has_tooth: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class CombChart:
    """A comb, ready to draw.

    Attributes:
        width: Of the picture.
        height: Of the picture.
        foot: Where the teeth stand.
        box: The side of a tooth.
        teeth: Every tooth.
        pitches: Every pitch of the chromatic scale from the lowest tooth to the highest.
        words: What it shows, in sentences.
    """

    width: int
    height: int
    foot: int
    box: int
    teeth: tuple[ToothShown, ...]
    pitches: tuple[PitchShown, ...]
    words: tuple[str, ...]


def comb_chart(movement: Movement) -> CombChart:
    """The chart of a movement's comb."""
    by_key: dict[int, list[Tooth]] = defaultdict(list)
    for tooth in movement.teeth:
        by_key[key_of(tooth.pitch)].append(tooth)
    keys = range(min(by_key), max(by_key) + 1)
    foot = TOP + STEP * max(map(len, by_key.values()))
    return CombChart(
        width=2 * LEFT + STEP * len(keys),
        height=foot + FOOT,
        foot=foot,
        box=BOX,
        teeth=tuple(
            _tooth(tooth, LEFT + STEP * (key - keys[0]), foot - STEP * (place + 1))
            for key in sorted(by_key)
            for place, tooth in enumerate(sorted(by_key[key], key=lambda tooth: tooth.track))
        ),
        pitches=tuple(_pitch(key, LEFT + STEP * (key - keys[0]) + BOX // 2, key in by_key) for key in keys),
        words=_words(movement, by_key, keys),
    )


def _tooth(tooth: Tooth, x: int, y: int) -> ToothShown:
    state = "unusable" if not tooth.usable else "damped" if tooth.damped else "undamped"
    cents = text_of("movements.cents", cents=f"{tooth.cents:+g}") if tooth.cents else ""
    told = {"tooth": tooth.tooth, "track": tooth.track, "pitch": tooth.pitch, "cents": cents}
    return ToothShown(
        x=x,
        y=y,
        track=str(tooth.track),
        look=state,
        words=text_of("movements.tooth_words", **told, state=text_of(f"movements.{state}")),
    )


def _pitch(key: int, x: int, has_tooth: bool) -> PitchShown:  # noqa: FBT001 -- told by its name at the one call
    name = pitch_of(key)
    letter = name.rstrip("-0123456789")
    return PitchShown(x=x, name=letter, octave=name.removeprefix(letter) if letter == "C" else "", has_tooth=has_tooth)


def _words(movement: Movement, by_key: dict[int, list[Tooth]], keys: range) -> tuple[str, ...]:
    gaps = [pitch_of(key) for key in keys if key not in by_key]
    doubled = [f"{pitch_of(key)} × {len(by_key[key])}" for key in sorted(by_key) if len(by_key[key]) > 1]
    ringing = [str(tooth.tooth) for tooth in movement.teeth if not tooth.damped]
    broken = [str(tooth.tooth) for tooth in movement.teeth if not tooth.usable]
    span = {"teeth": len(movement.teeth), "pitches": len(by_key), "low": pitch_of(keys[0]), "high": pitch_of(keys[-1])}
    lists = {"gaps": gaps, "doubled": doubled, "ringing": ringing, "broken": broken}
    return (
        text_of("movements.comb_words", **span),
        *(text_of(f"movements.comb_{name}", names=", ".join(names)) for name, names in lists.items() if names),
    )
