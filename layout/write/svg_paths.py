"""Entities of a drawing as SVG path data and circles, in the picture's own coordinates (x, −y)."""

import math
from collections.abc import Iterator

import numpy as np

from layout.cut.plan import Circles, Entity, Lettering, Outlines, Points
from layout.mechanics.arrays import FloatArray
from layout.write.many_numbers import lines_as_data, strokes_as_data
from layout.write.numbers import DECIMALS_RADIUS, number, rounded


def path_data(entities: list[Entity]) -> str:
    """SVG path data of all entities of a layer but its circles; "" where there are none.

    A point becomes a piece without length, which round line ends make a dot.
    """
    parts: list[str] = []
    for entity in entities:
        match entity:
            case Outlines():
                parts += _outlines(entity)
            case Lettering():
                parts.append(strokes_as_data([rounded(stroke * (1, -1)) for stroke in entity.strokes_mm]))
            case Points():
                parts += [f"M{number(x)} {number(y)}h0" for x, y in rounded(entity.points_mm * (1, -1)).tolist()]
    return "".join(parts)


def area_data(entities: list[Entity]) -> str:
    """SVG path data of what the outlines of a layer bound: a closed one alone, open lines with those that follow.

    Bridges leave an outline open, and no line bounds anything alone. After each line its outline goes on with the next
    one, or is round where that begins farther off than its own first line.
    """
    parts: list[str] = []
    lines: list[Outlines] = []
    outlines = [entity for entity in entities if isinstance(entity, Outlines)]
    for entity, following in zip(outlines, [*outlines[1:], None], strict=True):
        if entity.closed:
            parts += _outlines(entity)
            continue
        lines.append(entity)
        round_mm = math.dist(entity.points_mm[-1, -1], lines[0].points_mm[0, 0])
        if (
            following is None
            or following.closed
            or round_mm <= math.dist(entity.points_mm[-1, -1], following.points_mm[0, 0])
        ):
            parts.append(_joined_data("".join(piece for line in lines for piece in _outlines(line))))
            lines = []
    return "".join(parts)


def _joined_data(data: str) -> str:
    first, *others = data.split("M")[1:]
    return "M" + "L".join([first, *others]) + "Z"


def circles(entities: list[Entity]) -> Iterator[tuple[str, str, str]]:
    """Centre x, centre y and radius of every circle, as text."""
    for entity in entities:
        if isinstance(entity, Circles):
            centres_mm = rounded(entity.centres_mm * (1, -1)).tolist()
            for (x, y), radius_mm in zip(centres_mm, entity.radius_mm.tolist(), strict=True):
                yield number(x), number(y), number(radius_mm)


def lines_data(ends_mm: FloatArray) -> str:
    """SVG path data of straight lines given as shape (n, 2, 2), in drawing coordinates."""
    return lines_as_data(rounded(ends_mm * (1, -1)))


def _outlines(outlines: Outlines) -> Iterator[str]:
    """Path data of each outline, or of all together where all their pieces are straight."""
    if not outlines.bulges.any():
        together = lines_as_data(rounded(outlines.points_mm * (1, -1)))
        yield together.replace("M", "ZM")[1:] + "Z" if together and outlines.closed else together
        return
    bulges = outlines.bulges.tolist()
    pieces = len(bulges) if outlines.closed else len(bulges) - 1
    turned = rounded(outlines.points_mm * (1, -1)).tolist()
    for points, radii in zip(turned, _radii_mm(outlines), strict=True):
        data = [f"M{number(points[0][0])} {number(points[0][1])}"]
        for place in range(pieces):
            x, y = points[(place + 1) % len(points)]
            if bulges[place]:
                data.append(_arc(radii[place], bulges[place], f"{number(x)} {number(y)}"))
            elif place + 1 < len(points):  # a straight piece back to the start is drawn by Z
                data.append(f"L{number(x)} {number(y)}")
        yield "".join(data) + ("Z" if outlines.closed else "")


def _arc(radius_mm: float, bulge: float, end: str) -> str:
    # Seen with y down, as SVG counts, an anticlockwise arc (bulge above 0) is the one with sweep 0.
    large, sweep = int(abs(bulge) > 1), int(bulge < 0)
    radius = number(radius_mm, DECIMALS_RADIUS)
    return f"A{radius} {radius} 0 {large} {sweep} {end}"


def _radii_mm(outlines: Outlines) -> list[list[float]]:
    """Radius of the arc that starts at each vertex, c(1 + b²)/(4|b|); 0 where the piece is straight.

    The chord is that of the points as they are written: a half circle whose radius is half a nanometre too large for
    its ends has its centre a thousand times as far off.
    """
    written_mm = rounded(outlines.points_mm)
    chord = np.roll(written_mm, -1, axis=1) - written_mm
    bulge = np.abs(outlines.bulges)
    curve = np.divide(1 + bulge**2, 4 * bulge, out=np.zeros_like(bulge), where=bulge > 0)
    radii: list[list[float]] = (np.hypot(chord[..., 0], chord[..., 1]) * curve).tolist()
    return radii
