"""What a plot is made from, ready to draw: lines, bars, limits with their names, axes, a key, a table."""

import math
from dataclasses import dataclass
from typing import Literal

WIDTH, HEIGHT = 360, 220  # units of the picture: about the pixels of a phone's width
LEFT, RIGHT, TOP, BOTTOM = 46, 18, 40, 38
# Where the picture's edges and axes stand, for the template.
FRAME = {"width": WIDTH, "height": HEIGHT, "left": LEFT, "right": WIDTH - RIGHT, "top": TOP, "foot": HEIGHT - BOTTOM}
MOST_TICKS = 5
STEPS = (1.0, 2.0, 2.5, 5.0, 10.0, 20.0)  # what a tick's step may be, times a power of ten
LEAST_SHOWN = 1e-6  # of any unit; what is smaller is shown as nothing
MOST_NAMED = 13  # bars; the names of more find no room along the foot

# How a bar is drawn: what is known in full, in part, and what is the most it can be.
Drawn = Literal["full", "part", "most"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Tick:
    """A number on an axis and where it stands."""

    at: float
    words: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Bar:
    """An upright bar: its corner, its size, and how it is drawn."""

    x: float
    y: float
    width: float
    height: float
    drawn: Drawn


@dataclass(frozen=True, slots=True, kw_only=True)
class Plot:
    """A plot, ready to draw.

    Attributes:
        name: Of its texts: `plots.<name>`.
        words: What it shows, in a sentence.
        line: Path data of a curve; "" for none.
        bars: Bars, those behind first.
        limit: A limit's height and its name; None for none.
        mark: What is pointed at from above, and its name; None for nothing.
        x_ticks: Along the foot.
        y_ticks: Up the side.
        x_words: What the foot counts, with its unit.
        y_words: What the side counts, with its unit.
        key: What each way of drawing says; () where there is one alone.
        head: Of the table of the same numbers.
        rows: Of that table; the first of a row names it.
    """

    name: str
    words: str
    x_ticks: tuple[Tick, ...]
    y_ticks: tuple[Tick, ...]
    x_words: str
    y_words: str
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    line: str = ""
    bars: tuple[Bar, ...] = ()
    limit: Tick | None = None
    mark: Tick | None = None
    key: tuple[tuple[Drawn, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class NoPlot:
    """A plot that cannot be drawn, and why in words."""

    name: str
    words: str


def scale(most: float) -> tuple[float, tuple[Tick, ...]]:
    """The end of an axis from 0 that holds `most`, and its ticks.

    Args:
        most: The greatest value shown, from 0.
    """
    most = most if most >= LEAST_SHOWN else 1.0
    power = 10.0 ** math.floor(math.log10(most / MOST_TICKS))
    step = next(size * power for size in STEPS if size * power * MOST_TICKS >= most)
    count = math.ceil(most / step)
    return count * step, tuple(Tick(at=up(n / count), words=f"{n * step:g}") for n in range(count + 1))


def across(share: float) -> float:
    """Where a share of the foot stands."""
    return LEFT + share * (WIDTH - LEFT - RIGHT)


def up(share: float) -> float:
    """Where a share of the side stands."""
    return round(HEIGHT - BOTTOM - share * (HEIGHT - TOP - BOTTOM), 1)


def middle(place: int, count: int) -> float:
    """Where the middle of a bar stands, by its place among so many."""
    return round(across((place + 0.5) / count), 2)


def bar(place: int, count: int, share: float, drawn: Drawn) -> Bar:
    """A bar from the foot.

    Args:
        place: Its place, from 0.
        count: Among so many.
        share: Its height as a share of the side.
        drawn: How.
    """
    room, y = (WIDTH - LEFT - RIGHT) / count, up(share)
    return Bar(
        x=round(LEFT + room * (place + 0.15), 2),
        y=y,
        width=round(room * 0.7, 2),
        height=round(HEIGHT - BOTTOM - y, 1),
        drawn=drawn,
    )


def names_along(names: list[str], *, through: int = 0) -> tuple[Tick, ...]:
    """The names of bars along the foot, as many as find room.

    Args:
        names: Of all bars, in their order.
        through: The place of one that is named, whichever others are.
    """
    step = -(-len(names) // MOST_NAMED)
    return tuple(Tick(at=middle(n, len(names)), words=names[n]) for n in range(through % step, len(names), step))
