"""Plots of a disc's report, as lines and bars with their axes: the template draws them and says them in words too."""

from bisect import bisect_left, bisect_right
from collections.abc import Mapping, Sequence
from typing import Any

from layout.mechanics.tolerances import ORDER_HEARD_MS
from service.pages.disc_told import signed
from service.pages.plot_shapes import Bar, Drawn, NoPlot, Plot, Tick, across, bar, middle, names_along, scale, up
from service.pages.texts import text_of

FULL_TURN_DEG = 360
SECTOR_DEG = 30  # a row of the table of torques; twelve rows are read at a glance
TICK_DEG = 60


def plots_of(report: Mapping[str, Any], *, before_music_deg: float, revolution_s: float) -> tuple[Plot | NoPlot, ...]:
    """Torque over the turn, timing error by track, worth by transposition, in that order.

    Args:
        report: A report.json; one that was kept since before every transposition was told has the best alone.
        before_music_deg: How far the disc has turned when the music starts.
        revolution_s: Seconds a turn.
    """
    transpositions = report.get("transpositions") or sorted(report["tried"], key=lambda one: one["semitones"])
    return (
        _torque(report["drive"], before_music_deg, revolution_s),
        _timing(report["tracks"]),
        _worth(transpositions, report["transposed_semitones"], several=report["disc"]["of"] > 1),
    )


def _torque(drive: Mapping[str, Any], before_music_deg: float, revolution_s: float) -> Plot | NoPlot:
    torque = drive["torque"]
    if torque is None:
        return NoPlot(name="torque", words=text_of("plots.torque_unknown", names=", ".join(drive["not_stated"])))
    curve, limit_nmm = torque["over_the_turn"], torque["limit_nmm"]
    top, y_ticks = scale(max(torque["peak_nmm"], limit_nmm or 0.0))
    degrees = [_degrees(at_s, before_music_deg, revolution_s) for at_s in curve["at_s"]]
    points = [
        f"{across(degree / FULL_TURN_DEG):.1f} {up(nmm / top):.1f}"
        for degree, nmm in zip(degrees, curve["torque_nmm"], strict=True)
    ]
    told = {
        "peak": f"{torque['peak_nmm']:.0f}",
        "mean": f"{torque['mean_nmm']:.0f}",
        "at_s": f"{torque['at_s']:.2f}",
        "at_deg": f"{_degrees(torque['at_s'], before_music_deg, revolution_s):.0f}",
    }
    words = text_of("plots.torque_words", **told)
    limit = None
    if limit_nmm is None:
        words += " " + text_of("plots.torque_no_limit")
    else:
        limit = Tick(at=up(limit_nmm / top), words=text_of("plots.torque_limit", limit=f"{limit_nmm:.0f}"))
        share = 100 * torque["peak_nmm"] / limit_nmm
        words += " " + text_of("plots.torque_words_limit", limit=f"{limit_nmm:.0f}", share=f"{share:.0f}")
    return Plot(
        name="torque",
        words=words,
        line="M" + "L".join(points) if points else "",
        limit=limit,
        x_ticks=tuple(
            Tick(at=across(deg / FULL_TURN_DEG), words=f"{deg}°") for deg in range(0, FULL_TURN_DEG + 1, TICK_DEG)
        ),
        y_ticks=y_ticks,
        x_words=text_of("plots.turned"),
        y_words=text_of("plots.torque_unit"),
        head=(text_of("plots.turned_from_to"), text_of("plots.greatest")),
        rows=tuple(
            (f"{deg}–{deg + SECTOR_DEG}", f"{_greatest(degrees, curve['torque_nmm'], deg, deg + SECTOR_DEG):.0f}")
            for deg in range(0, FULL_TURN_DEG, SECTOR_DEG)
        ),
    )


def _degrees(at_s: float, before_music_deg: float, revolution_s: float) -> float:
    return before_music_deg + FULL_TURN_DEG * at_s / revolution_s


def _greatest(at: Sequence[float], values: Sequence[float], begin: float, end: float) -> float:
    """The greatest value of a curve of straight lines between two places; 0 for a curve without points."""
    inside = values[bisect_left(at, begin) : bisect_right(at, end)]
    return max((*inside, _between(at, values, begin), _between(at, values, end)), default=0.0)


def _between(at: Sequence[float], values: Sequence[float], place: float) -> float:
    after = bisect_right(at, place)
    if not 0 < after < len(at):
        return 0.0
    share = (place - at[after - 1]) / (at[after] - at[after - 1])
    return values[after - 1] + share * (values[after] - values[after - 1])


def _timing(tracks: Sequence[Mapping[str, Any]]) -> Plot | NoPlot:
    known = [track for track in tracks if track["together_ms"] is not None]
    if not known:
        return NoPlot(name="timing", words=text_of("plots.timing_unknown"))
    worst = max(known, key=lambda track: track["together_ms"])
    top, y_ticks = scale(max(worst["together_ms"], ORDER_HEARD_MS))
    drawn: tuple[tuple[Drawn, str], ...] = (("most", "together_ms"), ("full", "root_square_ms"))
    return Plot(
        name="timing",
        words=text_of(
            "plots.timing_words",
            together=f"{worst['together_ms']:.1f}",
            roots=f"{worst['root_square_ms']:.1f}",
            track=worst["track"],
            radius=f"{worst['radius_mm']:g}",
            heard=f"{ORDER_HEARD_MS:g}",
        ),
        bars=tuple(
            bar(place, len(known), track[name] / top, how) for how, name in drawn for place, track in enumerate(known)
        ),
        limit=Tick(at=up(ORDER_HEARD_MS / top), words=text_of("plots.timing_limit", heard=f"{ORDER_HEARD_MS:g}")),
        x_ticks=names_along([f"{track['track']}" for track in known]),
        y_ticks=y_ticks,
        x_words=text_of("plots.tracks"),
        y_words=text_of("plots.ms"),
        key=tuple((how, text_of(f"plots.timing_{how}")) for how, _ in reversed(drawn)),
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


def _worth(told: Sequence[Mapping[str, Any]], semitones: int, *, several: bool) -> Plot | NoPlot:
    if not told[1:]:
        return NoPlot(name="worth", words=text_of("plots.worth_unknown", chosen=signed(semitones)))
    best = max(one["bound"] for one in told) or 1
    top, y_ticks = scale(100.0)
    names = [signed(one["semitones"]) for one in told]
    chosen = next((place for place, one in enumerate(told) if one["semitones"] == semitones), None)
    upright = next((place for place, one in enumerate(told) if one["semitones"] == 0), 0)
    words = text_of("plots.worth_words", count=len(told), chosen=signed(semitones))
    bars = [drawn for place, one in enumerate(told) for drawn in _worth_bars(place, len(told), one, best * top / 100)]
    used = {one.drawn for one in bars}
    ways: tuple[Drawn, ...] = ("full", "part", "most")
    return Plot(
        name="worth",
        words=f"{words} {text_of('plots.worth_several')}" if several else words,
        bars=tuple(bars),
        mark=None if chosen is None else Tick(at=middle(chosen, len(told)), words=text_of("plots.worth_chosen")),
        x_ticks=names_along(names, through=upright),
        y_ticks=y_ticks,
        x_words=text_of("plots.semitones"),
        y_words=text_of("plots.share"),
        key=tuple((way, text_of(f"plots.worth_{way}")) for way in ways if way in used),
        head=tuple(text_of(f"plots.{name}") for name in ("transposition", "kept", "bound", "known")),
        rows=tuple(_worth_row(name, one, best) for name, one in zip(names, told, strict=True)),
    )


def _worth_bars(place: int, count: int, one: Mapping[str, Any], whole: float) -> list[Bar]:
    kept, bound = one["kept"], one["bound"]
    if kept == bound:
        return [bar(place, count, kept / whole, "full")]
    most = [bar(place, count, bound / whole, "most")]
    return most if kept is None else [*most, bar(place, count, kept / whole, "part")]


def _worth_row(name: str, one: Mapping[str, Any], best: int) -> tuple[str, ...]:
    kept, bound = one["kept"], one["bound"]
    how: Drawn = "full" if kept == bound else "most" if kept is None else "part"
    shown = "–" if kept is None else f"{100 * kept / best:.1f}"
    return name, shown, f"{100 * bound / best:.1f}", text_of(f"plots.known_{how}")
