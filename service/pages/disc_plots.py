"""Plots of a disc's report, as lines and bars with their axes: the template draws them and says them in words too."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from service.pages.texts import text_of

WIDTH, HEIGHT = 360, 200  # units of the picture: about the pixels of a phone's width
LEFT, RIGHT, TOP, BOTTOM = 46, 10, 26, 34
MOST_TICKS = 5
STEPS = (1.0, 2.0, 2.5, 5.0, 10.0, 20.0)  # what a tick's step may be, times a power of ten
LEAST_SHOWN = 1e-6  # of any unit; what is smaller is shown as nothing
FULL_TURN_DEG = 360


@dataclass(frozen=True, slots=True, kw_only=True)
class Tick:
    """A number on an axis and where it stands."""

    at: float
    words: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Bar:
    """An upright bar: its corner and its size."""

    x: float
    y: float
    width: float
    height: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Plot:
    """A plot, ready to draw.

    Attributes:
        name: Of its texts: `plots.<name>`.
        words: What it shows, in a sentence.
        line: Path data of a curve; "" for none.
        bars: Strong bars.
        faint: Bars behind them.
        limit: Height of a limit's line; None for none.
        x_ticks: Along the foot.
        y_ticks: Up the side.
        x_words: What the foot counts.
        y_words: What the side counts.
        head: Of the table of the same numbers; () for no table.
        rows: Of that table.
    """

    name: str
    words: str
    x_ticks: tuple[Tick, ...]
    y_ticks: tuple[Tick, ...]
    x_words: str
    y_words: str
    line: str = ""
    bars: tuple[Bar, ...] = ()
    faint: tuple[Bar, ...] = ()
    limit: float | None = None
    head: tuple[str, ...] = ()
    rows: tuple[tuple[str, ...], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class NoPlot:
    """A plot that cannot be drawn, and why in words."""

    name: str
    words: str


def plots_of(report: Mapping[str, Any], *, before_music_deg: float, revolution_s: float) -> tuple[Plot | NoPlot, ...]:
    """Torque over the turn, timing error by track, worth by transposition, in that order.

    Args:
        report: A report.json.
        before_music_deg: How far the disc has turned when the music starts.
        revolution_s: Seconds a turn.
    """
    return (
        _torque(report["drive"], before_music_deg, revolution_s),
        _timing(report["tracks"]),
        _worth(report["tried"], report["transposed_semitones"], report["speed_factor"]),
    )


def _torque(drive: Mapping[str, Any], before_music_deg: float, revolution_s: float) -> Plot | NoPlot:
    torque = drive["torque"]
    if torque is None:
        return NoPlot(name="torque", words=text_of("plots.torque_unknown", names=", ".join(drive["not_stated"])))
    curve, limit_nmm = torque["over_the_turn"], torque["limit_nmm"]
    top, y_ticks = _scale(max(torque["peak_nmm"], limit_nmm or 0.0))
    degrees = [_degrees(at_s, before_music_deg, revolution_s) for at_s in curve["at_s"]]
    points = [
        f"{_across(degree / FULL_TURN_DEG):.1f} {_up(nmm / top):.1f}"
        for degree, nmm in zip(degrees, curve["torque_nmm"], strict=True)
    ]
    told = {"peak": f"{torque['peak_nmm']:.0f}", "mean": f"{torque['mean_nmm']:.0f}"}
    told |= {
        "at_s": f"{torque['at_s']:.2f}",
        "at_deg": f"{_degrees(torque['at_s'], before_music_deg, revolution_s):.0f}",
    }
    limited = "plots.torque_words" if limit_nmm is None else "plots.torque_words_limit"
    return Plot(
        name="torque",
        words=text_of(limited, **told, **({} if limit_nmm is None else {"limit": f"{limit_nmm:.0f}"})),
        line="M" + "L".join(points) if points else "",
        limit=None if limit_nmm is None else _up(limit_nmm / top),
        x_ticks=tuple(Tick(at=_across(deg / FULL_TURN_DEG), words=f"{deg}°") for deg in range(0, 361, 60)),
        y_ticks=y_ticks,
        x_words=text_of("plots.turned"),
        y_words=text_of("plots.torque_unit"),
    )


def _degrees(at_s: float, before_music_deg: float, revolution_s: float) -> float:
    return before_music_deg + FULL_TURN_DEG * at_s / revolution_s


def _timing(tracks: Sequence[Mapping[str, Any]]) -> Plot | NoPlot:
    known = [track for track in tracks if track["together_ms"] is not None]
    if not known:
        return NoPlot(name="timing", words=text_of("plots.timing_unknown"))
    worst = max(known, key=lambda track: track["together_ms"])
    top, y_ticks = _scale(worst["together_ms"])
    slots = [_slot(place, len(known)) for place in range(len(known))]
    step = -(-len(known) // 12)  # about a dozen numbers find room along the foot
    middle = {place: slot[0] + slot[1] / 2 for place, slot in enumerate(slots)}
    return Plot(
        name="timing",
        words=text_of(
            "plots.timing_words",
            together=f"{worst['together_ms']:.1f}",
            roots=f"{worst['root_square_ms']:.1f}",
            track=worst["track"],
            radius=f"{worst['radius_mm']:g}",
        ),
        faint=tuple(_bar(slot, track["together_ms"] / top) for slot, track in zip(slots, known, strict=True)),
        bars=tuple(_bar(slot, track["root_square_ms"] / top) for slot, track in zip(slots, known, strict=True)),
        x_ticks=tuple(Tick(at=middle[n], words=f"{known[n]['track']}") for n in range(0, len(known), step)),
        y_ticks=y_ticks,
        x_words=text_of("plots.track"),
        y_words=text_of("plots.ms"),
        head=tuple(text_of(f"plots.{name}") for name in ("track", "radius", "roots", "together", "nudge")),
        rows=tuple(
            (
                f"{track['track']}",
                f"{track['radius_mm']:g}",
                f"{track['root_square_ms']:.1f}",
                f"{track['together_ms']:.1f}",
                f"{track['largest_nudge_ms']:.1f}",
            )
            for track in known
        ),
    )


def _worth(tried: Sequence[Mapping[str, Any]], semitones: int, speed_factor: float) -> Plot | NoPlot:
    if not tried:
        return NoPlot(name="worth", words=text_of("plots.worth_unknown"))
    by_pitch = sorted(tried, key=lambda one: (one["semitones"], one["speed_factor"]))
    best = max(one["bound"] for one in tried) or 1
    top, y_ticks = _scale(100.0)
    slots = [_slot(place, len(by_pitch)) for place in range(len(by_pitch))]
    speeds = len({one["speed_factor"] for one in tried}) > 1
    names = [_named(one, speeds=speeds) for one in by_pitch]

    def share(value: int | None) -> float:
        return 0.0 if value is None else 100 * value / best

    chosen = {"semitones": semitones, "speed_factor": speed_factor}
    return Plot(
        name="worth",
        words=text_of("plots.worth_words", count=len(tried), chosen=_named(chosen, speeds=speeds)),
        faint=tuple(_bar(slot, share(one["bound"]) / top) for slot, one in zip(slots, by_pitch, strict=True)),
        bars=tuple(_bar(slot, share(one["kept"]) / top) for slot, one in zip(slots, by_pitch, strict=True)),
        x_ticks=tuple(Tick(at=slot[0] + slot[1] / 2, words=words) for slot, words in zip(slots, names, strict=True)),
        y_ticks=y_ticks,
        x_words=text_of("plots.transposition"),
        y_words=text_of("plots.share"),
        head=tuple(text_of(f"plots.{name}") for name in ("transposition", "kept", "bound")),
        rows=tuple(
            (words, "–" if one["kept"] is None else f"{share(one['kept']):.1f}", f"{share(one['bound']):.1f}")
            for words, one in zip(names, by_pitch, strict=True)
        ),
    )


def _named(one: Mapping[str, Any], *, speeds: bool) -> str:
    words = f"{one['semitones']:+d}".replace("-", "\N{MINUS SIGN}").replace("+0", "0")
    return f"{words} × {one['speed_factor']:.3g}" if speeds else words


def _scale(most: float) -> tuple[float, tuple[Tick, ...]]:
    """The end of an axis from 0 that holds `most`, and its ticks."""
    most = most if most >= LEAST_SHOWN else 1.0
    power = 10.0 ** math.floor(math.log10(most / MOST_TICKS))
    step = next(size * power for size in STEPS if size * power * MOST_TICKS >= most)
    count = math.ceil(most / step)
    return count * step, tuple(Tick(at=_up(n / count), words=f"{n * step:g}") for n in range(count + 1))


def _across(share: float) -> float:
    return LEFT + share * (WIDTH - LEFT - RIGHT)


def _up(share: float) -> float:
    return round(HEIGHT - BOTTOM - share * (HEIGHT - TOP - BOTTOM), 1)


def _slot(place: int, count: int) -> tuple[float, float]:
    """Left edge and width of the bar at a place of so many."""
    room = (WIDTH - LEFT - RIGHT) / count
    return round(LEFT + room * (place + 0.15), 2), round(room * 0.7, 2)


def _bar(slot: tuple[float, float], share: float) -> Bar:
    y = _up(share)
    return Bar(x=slot[0], y=y, width=slot[1], height=round(HEIGHT - BOTTOM - y, 1))
