"""A drawing as GDAL sees it: outlines by layer, with nothing of our own code between file and numbers."""

import math
from pathlib import Path

import pyogrio
import shapely

from layout.documents import Cutter, Movement


def layers_of(dxf: bytes, folder: Path) -> dict[str, list[shapely.Geometry]]:
    """Every entity of a DXF file as GDAL's driver gives it, by layer name; the file is written into the folder."""
    path = folder / "drawing.dxf"
    path.write_bytes(dxf)
    _, _, geometries, fields = pyogrio.raw.read(path, columns=["Layer"])
    found: dict[str, list[shapely.Geometry]] = {}
    for layer, geometry in zip(fields[0], shapely.from_wkb(geometries), strict=True):
        found.setdefault(str(layer), []).append(geometry)
    return found


def area_of(geometry: shapely.Geometry) -> shapely.Polygon:
    """A closed line as the area it goes round."""
    return geometry if isinstance(geometry, shapely.Polygon) else shapely.Polygon(geometry.coords)


def plucks_from_cut_geometry(
    layers: dict[str, list[shapely.Geometry]], movement: Movement, cutter: Cutter
) -> list[tuple[int, float]]:
    """(track number, sounds_s) of every projection, worked out from the absolute place of what is cut.

    Written against the trade model alone: it asks where the working edge of each cut is, turns the disc to
    the moment that edge passes its release line, and takes the nearest track.
    """
    side = -1.0 if cutter.drawn_from == "star-side" else 1.0
    if cutter.kind == "punch-press":
        return [_struck(complex(p.x, side * p.y), _strike_mm(movement, cutter), movement) for p in layers["HITS"]]
    if movement.projection.kind == "slot":
        centres = [area_of(outline).centroid for outline in layers["SLOTS"]]
        # the working edge is the trailing end: the middle of the slot is half its length ahead
        ahead_mm = (movement.projection.length_mm or 0.0) / 2
    else:
        centres = [shapely.minimum_rotated_rectangle(outline).centroid for outline in layers["SLITS"]]
        ahead_mm = _middle_of_slit_mm(movement, cutter)
    return [_pluck(complex(c.x, side * c.y), ahead_mm, movement) for c in centres]


def _strike_mm(movement: Movement, cutter: Cutter) -> float:
    wanted = {"fernhollow-31": "L12", "mossbrook-67": "L11", "tarnlight-17": "S22"}[movement.id]
    return next(-tool.edge_ahead_mm for tool in cutter.tools if tool.tool == wanted)


def _middle_of_slit_mm(movement: Movement, cutter: Cutter) -> float:
    """How far ahead of the working edge the middle of the slit's bounding box lies."""
    fold, thickness_mm = cutter.fold, movement.disc.thickness_mm
    assert fold is not None
    inside_mm = fold.inside_radius_mm
    k = 0.65 + 0.5 * math.log10(inside_mm / thickness_mm)  # DIN 6935
    blank_mm = math.pi / 2 * (inside_mm + k * thickness_mm / 2) + (movement.projection.depth_mm or 0.0) - inside_mm
    # from the tangent line: back into the relief, and out past the free end to the far side of the slit;
    # the line of an open slit runs half a kerf inside both
    if fold.slit == "channel":
        back_mm, out_mm = fold.relief_mm, blank_mm + (fold.slit_width_mm or 0.0)
    else:
        back_mm, out_mm = fold.relief_mm - cutter.kerf_mm / 2, blank_mm + cutter.kerf_mm / 2
    if fold.fold_side == "behind":
        return inside_mm + (back_mm - out_mm) / 2
    return -(inside_mm + thickness_mm) + (out_mm - back_mm) / 2


def _pluck(place: complex, ahead_mm: float, movement: Movement) -> tuple[int, float]:
    """What a cut outline plucks, whose frame is square to the radius through its edge."""
    radius_mm = math.sqrt(abs(place) ** 2 - ahead_mm**2)
    return _edge(radius_mm, _behind_rad(place, math.atan2(ahead_mm, radius_mm), movement), movement)


def _struck(place: complex, ahead_mm: float, movement: Movement) -> tuple[int, float]:
    """What a hit plucks: the tool stands square to the radius through the strike point."""
    radius_mm = math.hypot(abs(place), ahead_mm)
    return _edge(radius_mm, _behind_rad(place, math.atan2(ahead_mm, abs(place)), movement), movement)


def _behind_rad(place: complex, by_rad: float, movement: Movement) -> float:
    # ahead is along the travel: clockwise travel lowers the angle, so the edge lies at a higher one
    return math.atan2(place.imag, place.real) + (1 if movement.turns == "clockwise" else -1) * by_rad


def _edge(radius_mm: float, edge_rad: float, movement: Movement) -> tuple[int, float]:
    sign = 1 if movement.turns == "clockwise" else -1
    track = min(movement.tracks, key=lambda track: abs(track.radius_mm - radius_mm))
    assert abs(track.radius_mm - radius_mm) < 0.001
    wheel = movement.star_wheel
    past_mm = (
        wheel.release_arc_mm
        if hasattr(wheel, "release_arc_mm")
        else wheel.tip_radius_mm * math.sin(math.radians(wheel.release_angle_deg))
    )
    released_rad = math.asin((movement.gantry_offset_mm - sign * past_mm) / radius_mm)
    turned_deg = math.degrees(sign * (edge_rad - released_rad)) % 360
    return track.track, (turned_deg - movement.before_music_deg) * movement.revolution_s / 360
