"""The plain way: the same job by the same libraries, as a good engineer would write it on a first day.

mido's own iteration, a greedy choice note by note for each transposition, one shapely polygon for each opening with an
STRtree over them, ezdxf's and svgwrite's entities one by one, each the usual way. It checks webs between openings, to
the rim, the centre hole and the features, and repeats on a track; it has no nudges, no proof, no load, no order of the
cuts but by track and angle, and writes no lettering. Nothing of it is slow on purpose: numbers that are the same for
every projection are worked out once. svgwrite checks each attribute unless told not to; ours tells it not to, so both
ways of it can be had.
"""

import io
import math
from collections.abc import Sequence
from dataclasses import dataclass

import mido
import shapely
import svgwrite
from ezdxf.filemanagement import new
from shapely.geometry import LineString, Point, Polygon

from layout.arrange.arrangement import Arrangement
from layout.documents import Cutter, Movement
from layout.documents.feature import Feature
from layout.documents.pitch import key_of
from layout.mechanics.projection import Shape, pattern_of
from layout.mechanics.turning import turning_of

TRANSPOSITIONS = range(-12, 13)
PERCUSSION_CHANNEL = 9
CHORD_STEPS = 16  # straight pieces of a half circle

Vertex = tuple[float, float, float]  # x, y, bulge


@dataclass(frozen=True, slots=True, kw_only=True)
class PlainNote:
    """A note of the tune."""

    onset_s: float
    pitch: int
    channel: int


@dataclass(frozen=True, slots=True, kw_only=True)
class PlainTab:
    """A projection: its track, from 0, the angle of its working edge, and the notes it plays, by their places."""

    track: int
    angle_rad: float
    notes: tuple[int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class PlainFiles:
    """What comes out."""

    dxf: bytes
    svg: bytes
    thin_webs: int
    tab_count: int


def plain_from_bytes(tune: bytes, movement: Movement, cutter: Cutter, *, svg_checked: bool = True) -> PlainFiles:
    """From the tune to both files."""
    return plain_drawn(plain_chosen(plain_notes(tune), movement), movement, cutter, svg_checked=svg_checked)


def plain_from_arrangement(
    arrangement: Arrangement, movement: Movement, cutter: Cutter, *, svg_checked: bool = True
) -> PlainFiles:
    """From an arrangement to both files."""
    return plain_drawn(plain_tabs(arrangement, movement), movement, cutter, svg_checked=svg_checked)


def plain_tabs(arrangement: Arrangement, movement: Movement) -> list[PlainTab]:
    """The projections of an arrangement."""
    plucks = zip(arrangement.track_index.tolist(), arrangement.planned_s.tolist(), arrangement.notes, strict=True)
    return [_tab(movement, track, at_s, notes) for track, at_s, notes in plucks]


def plain_drawn(
    tabs: Sequence[PlainTab], movement: Movement, cutter: Cutter, *, svg_checked: bool = True
) -> PlainFiles:
    """The checks and both drawings."""
    outlines = plain_outlines(tabs, movement, cutter)
    thin = plain_thin_webs([outline["opening"] for outline in outlines], movement, cutter)
    svg = plain_svg(outlines, movement, is_checked=svg_checked)
    return PlainFiles(dxf=plain_dxf(outlines, movement), svg=svg, thin_webs=thin, tab_count=len(tabs))


def plain_notes(tune: bytes) -> list[PlainNote]:
    """Every note of the tune that is no drum, by mido's own clock, in the order of onset, pitch and channel."""
    notes, now_s = [], 0.0
    for message in mido.MidiFile(file=io.BytesIO(tune)):
        now_s += message.time
        if message.type == "note_on" and message.velocity > 0 and message.channel != PERCUSSION_CHANNEL:
            notes.append(PlainNote(onset_s=now_s, pitch=message.note, channel=message.channel))
    return sorted(notes, key=lambda note: (note.onset_s, note.pitch, note.channel))


def plain_chosen(notes: Sequence[PlainNote], movement: Movement) -> list[PlainTab]:
    """Of all transpositions the one with the most notes on a free track."""
    tracks_of: dict[int, list[int]] = {}
    for tooth in movement.teeth:
        if tooth.usable:
            tracks_of.setdefault(key_of(tooth.pitch), []).append(tooth.track - 1)
    least_s = _least_s(movement)
    first_s = notes[0].onset_s if notes else 0.0
    best: list[tuple[int, float, int]] = []
    for semitones in TRANSPOSITIONS:
        chosen = []
        last_s = dict.fromkeys(range(len(movement.tracks)), -math.inf)
        for place, note in enumerate(notes):
            at_s = note.onset_s - first_s
            free = [
                track for track in tracks_of.get(note.pitch + semitones, ()) if at_s - last_s[track] >= least_s[track]
            ]
            if free:
                track = min(free, key=lambda one: last_s[one])
                last_s[track] = at_s
                chosen.append((track, at_s, place))
        if len(chosen) > len(best):
            best = chosen
    return [_tab(movement, track, at_s, (place,)) for track, at_s, place in best]


def _least_s(movement: Movement) -> list[float]:
    turning = turning_of(movement)
    return [
        max(
            arc_mm * movement.revolution_s / (2 * math.pi * radius_mm * math.cos(row_rad)),
            movement.damper_recovery_s * movement.revolution_s / movement.fastest_revolution_s,
        )
        for arc_mm, radius_mm, row_rad in zip(
            turning.engagement_arc_mm.tolist(), turning.radius_mm.tolist(), turning.row_rad.tolist(), strict=True
        )
    ]


def _tab(movement: Movement, track: int, at_s: float, notes: tuple[int, ...]) -> PlainTab:
    """The exact angle: s·φ(t) + asin((d − s·a)/r)."""
    way = 1 if movement.turns == "clockwise" else -1
    turned_rad = math.radians(movement.before_music_deg) + 2 * math.pi * at_s / movement.revolution_s
    _, release_mm = movement.arcs_mm(track)
    beside = (movement.gantry_offset_mm - way * release_mm) / movement.tracks[track].radius_mm
    return PlainTab(track=track, angle_rad=(way * turned_rad + math.asin(beside)) % (2 * math.pi), notes=notes)


def plain_outlines(tabs: Sequence[PlainTab], movement: Movement, cutter: Cutter) -> list[dict[str, list[Vertex]]]:
    """For each projection, by track and angle, the outline that is cut, the opening, the fold and the working edge."""
    pattern = pattern_of(movement, cutter)
    half_mm = movement.projection.width_mm / 2
    shapes = {"opening": _vertices(pattern.opening)}
    if pattern.cut is not None:
        shapes["cut"] = _vertices(pattern.cut)
    if pattern.fold_line_mm is not None:
        shapes["fold"] = [(u, v, 0.0) for u, v in pattern.fold_line_mm.tolist()]
    shapes["edge"] = [(0.0, -half_mm, 0.0), (0.0, half_mm, 0.0)]
    way = 1 if movement.turns == "clockwise" else -1
    outlines = []
    for tab in sorted(tabs, key=lambda one: (one.track, one.angle_rad)):
        radius_mm = movement.tracks[tab.track].radius_mm
        cos, sin = math.cos(tab.angle_rad), math.sin(tab.angle_rad)
        placed = {}
        for name, vertices in shapes.items():
            points = []
            for u, v, bulge in vertices:
                along, ahead = radius_mm + v, way * u
                points.append((along * cos + ahead * sin, along * sin - ahead * cos, way * bulge))
            placed[name] = points
        outlines.append(placed)
    return outlines


def _vertices(shape: Shape) -> list[Vertex]:
    return [(u, v, bulge) for (u, v), bulge in zip(shape.points_mm.tolist(), shape.bulges.tolist(), strict=True)]


def plain_thin_webs(openings: Sequence[Sequence[Vertex]], movement: Movement, cutter: Cutter) -> int:
    """How many webs are too thin: between openings, to the rim, the centre hole and the features."""
    blank, limit_mm, thin = movement.disc, cutter.min_web_mm, 0
    polygons = [plain_polygon(opening) for opening in openings]
    tree = shapely.STRtree(polygons)
    rim = Point(0, 0).buffer(blank.outer_diameter_mm / 2, quad_segs=90).exterior
    centre = Point(0, 0).buffer(blank.centre_hole_mm / 2)
    features = [
        LineString([(radius * math.cos(angle), radius * math.sin(angle)) for radius in ends]).buffer(
            feature.width_mm / 2
        )
        for feature in blank.features
        for angle in map(math.radians, feature.angles_deg)
        for ends in [(feature.radius_mm - feature.length_mm / 2, feature.radius_mm + feature.length_mm / 2)]
    ]
    for place, polygon in enumerate(polygons):
        for other in tree.query(polygon, predicate="dwithin", distance=limit_mm):
            if other > place and polygon.distance(polygons[other]) < limit_mm:
                thin += 1
        if polygon.distance(rim) < limit_mm or polygon.distance(centre) < limit_mm:
            thin += 1
    for feature in features:
        thin += len(tree.query(feature, predicate="dwithin", distance=limit_mm))
    return thin


def plain_polygon(opening: Sequence[Vertex]) -> Polygon:
    """An outline with bulges as straight pieces."""
    points: list[tuple[float, float]] = []
    for (x, y, bulge), (to_x, to_y, _) in zip(opening, [*opening[1:], opening[0]], strict=True):
        points.append((x, y))
        if bulge:
            turn = 4 * math.atan(bulge)
            chord = complex(to_x - x, to_y - y)
            middle = complex(x, y) + chord * complex(0.5, 0.5 / math.tan(turn / 2))
            for step in range(1, CHORD_STEPS):
                at = middle + (complex(x, y) - middle) * complex(
                    math.cos(turn * step / CHORD_STEPS), math.sin(turn * step / CHORD_STEPS)
                )
                points.append((at.real, at.imag))
    return Polygon(points)


def plain_dxf(outlines: Sequence[dict[str, list[Vertex]]], movement: Movement) -> bytes:
    """The cutter's drawing."""
    document = new("R2010", setup=False)
    document.header["$INSUNITS"] = 4
    for name in ("SLITS", "HOLES", "RIM"):
        document.layers.add(name)
    space = document.modelspace()
    for outline in outlines:
        if "cut" in outline:
            space.add_lwpolyline(outline["cut"], format="xyb", close=True, dxfattribs={"layer": "SLITS"})
    for feature in movement.disc.features:
        for angle in map(math.radians, feature.angles_deg):
            space.add_lwpolyline(_hole(feature, angle), format="xyb", close=True, dxfattribs={"layer": "HOLES"})
    space.add_circle((0, 0), movement.disc.centre_hole_mm / 2, dxfattribs={"layer": "HOLES"})
    space.add_circle((0, 0), movement.disc.outer_diameter_mm / 2, dxfattribs={"layer": "RIM"})
    out = io.StringIO()
    document.write(out)
    return out.getvalue().encode()


def _hole(feature: Feature, angle_rad: float) -> list[Vertex]:
    """A feature as two half circles and two straight sides, along the radius; a notch too, which it cuts as a hole."""
    straight_mm, half_mm = feature.length_mm - feature.width_mm, feature.width_mm / 2
    if straight_mm < 0:
        straight_mm, half_mm = 0.0, feature.length_mm / 2
    corners = [(-straight_mm / 2, half_mm, 1.0), (-straight_mm / 2, -half_mm, 0.0)]
    corners += [(straight_mm / 2, -half_mm, 1.0), (straight_mm / 2, half_mm, 0.0)]
    cos, sin = math.cos(angle_rad), math.sin(angle_rad)
    return [
        ((feature.radius_mm + along) * cos - across * sin, (feature.radius_mm + along) * sin + across * cos, bulge)
        for along, across, bulge in corners
    ]


def plain_svg(outlines: Sequence[dict[str, list[Vertex]]], movement: Movement, *, is_checked: bool = True) -> bytes:
    """The preview: rim, tracks, holes, and for each projection its opening, slit, fold line and working edge."""
    half_mm = movement.disc.outer_diameter_mm / 2
    size = f"{2 * half_mm}mm"
    view = f"{-half_mm} {-half_mm} {2 * half_mm} {2 * half_mm}"
    drawing = svgwrite.Drawing(size=(size, size), viewBox=view, debug=is_checked)
    drawing.add(drawing.circle((0, 0), half_mm, fill="none", stroke="black"))
    drawing.add(drawing.circle((0, 0), movement.disc.centre_hole_mm / 2, fill="none", stroke="black"))
    for feature in movement.disc.features:
        for angle in map(math.radians, feature.angles_deg):
            corners = plain_polygon(_hole(feature, angle)).exterior.coords
            drawing.add(drawing.polygon([(round(x, 3), round(-y, 3)) for x, y in corners], fill="white"))
    for track in movement.tracks:
        drawing.add(drawing.circle((0, 0), track.radius_mm, fill="none", stroke="grey"))
    for outline in outlines:
        drawing.add(drawing.polygon(_flat(outline["opening"]), fill="lightblue"))
        if "cut" in outline:
            drawing.add(drawing.polygon(_flat(outline["cut"]), fill="none", stroke="blue"))
        for name, colour in (("fold", "green"), ("edge", "black")):
            if name in outline:
                start, end = _flat(outline[name])
                drawing.add(drawing.line(start, end, stroke=colour))
    return str(drawing.tostring()).encode()


def _flat(vertices: Sequence[Vertex]) -> list[tuple[float, float]]:
    return [(round(x, 3), round(-y, 3)) for x, y, _ in vertices]
