"""From a movement and a cutter to their trial piece."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely

from layout.cut.plan import Drawing, Entity, LayerName, Lettering, Outlines, Points
from layout.documents.cutter import Cutter
from layout.documents.feature import Feature
from layout.documents.movement import Movement
from layout.errors import DocumentError, Problem
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.projection import Pattern, Shape, fitting_tool, pattern_of
from layout.mechanics.spacing import core_geometries
from layout.trial import wording
from layout.trial.ladders import rows_of, tool_ladders, track_ladder
from layout.trial.lettering import LETTER_HEIGHT_MM, standing_at, text_strokes_mm
from layout.trial.piece import Hits, Ladder, NotTried, TrialPiece
from layout.trial.rungs import Row
from layout.trial.sector import (
    Sector,
    fan_mm,
    feature_metal_mm,
    hub_features,
    hub_radius_mm,
    outline,
)
from layout.trial.spreading import Ground, PlacedRung, Spread, spread

# Comfortable metal between everything cut but the web ladder's own steps: times the cutter's least web, and
# times the thickness (common practice: 1.5 is a comfortable web); the larger counts.
WEB_FACTOR = 1.5
SIDE_WEBS = 2.0  # such webs to the sector's sides and rim: they are handled
WIDEST_SECTOR_RAD = math.radians(340)  # so that hub and sector keep two sides
MIDDLES = 360  # places tried for the sector's middle, the disc's angle 0 first


def trial_piece(movement: Movement, cutter: Cutter) -> TrialPiece:
    """The trial piece of a movement as a cutter makes it.

    It is a sector of the movement's own disc, joined to a hub with the centre hole and the holes that
    drive it, so that it goes on the movement as a disc does. It has one projection on each track, in the
    disc's own pattern, and beside them ladders of steps. What the sector cannot have is told as not tried. Its drawing
    shows it finished, ladder by ladder, without the holes: the cut stage puts them in, and all in cutting order.

    Raises:
        DocumentError: The cutter cannot make the movement's projections, so there is nothing to try; or the tracks
            are so near the centre that their projections fill a disc.
    """
    _check_it_can_be_made(movement, cutter)
    pattern = pattern_of(movement, cutter)
    mirror = -1 if cutter.drawn_from == "star-side" else 1
    turn = mirror * (1 if movement.turns == "clockwise" else -1)
    rows = [row for row in rows_of(movement, cutter) if row.rungs]
    impossible = [row.ladder.name for row in rows_of(movement, cutter) if row.ladder and not row.rungs]
    near_mm = float(pattern.core_points_mm[:, 1].min()) - pattern.core_round_mm
    within_mm = movement.tracks[0].radius_mm + near_mm
    features = hub_features(movement, within_mm)
    tracks, off_disc = _tracks_on_the_metal(movement, pattern, features, cutter.min_web_mm)
    ground = _ground(movement, cutter, features, within_mm)
    places = spread(movement, pattern, tracks, rows, ground)
    _check_there_is_room(movement, places)
    sector, absent = _sector(movement, features, ground, places.whole_rad, mirror)
    drawn = _Drawn(sector=sector, turn=turn, whole_rad=places.whole_rad)
    hits_mm, cut = _cut(drawn, movement, pattern, tracks, places)
    marks = _marks(drawn, movement, tracks, places)
    return TrialPiece(
        movement_id=movement.id,
        movement_revision=movement.revision,
        cutter_id=cutter.id,
        material=movement.disc.material,
        thickness_mm=movement.disc.thickness_mm,
        disc_diameter_mm=movement.disc.outer_diameter_mm,
        drawn_from=cutter.drawn_from,
        edges=wording.edge_words(cutter),
        drawing=Drawing(
            entities=(*marks, *cut, outline(sector)), comments=wording.head_lines(movement, cutter, pattern.tool)
        ),
        hub=features,
        web_mm=places.web_mm,
        ladders=_told(movement, cutter, rows, places, tracks),
        hits=None if hits_mm is None else Hits(tool=pattern.tool, at_mm=hits_mm),
        not_tried=(*off_disc, *_cannot_be_cut(impossible), *_rows_left_out(places), *absent, *_unlettered(cutter)),
        cautions=wording.cautions(movement, cutter),
    )


def _check_it_can_be_made(movement: Movement, cutter: Cutter) -> None:
    projection, is_laser = movement.projection, cutter.kind == "laser"
    message = ""
    if is_laser and projection.forming == "lance":
        message = f"{movement.id} needs lanced projections and {cutter.id} is a laser; name a press"
    elif is_laser and projection.kind == "standing" and cutter.fold is None:
        message = f"{movement.id} needs folded projections and {cutter.id} states no fold; add fold to the cutter"
    elif not is_laser and projection.forming == "fold":
        message = f"{movement.id} needs folded projections and {cutter.id} is a press; name a laser that folds"
    elif not is_laser and fitting_tool(movement, cutter) is None:
        tools = ", ".join(tool.tool for tool in cutter.tools) or "none"
        message = f"no tool of {cutter.id} makes the projections of {movement.id}; it has {tools}; add one to tools"
    if message:
        raise DocumentError(document="cutter", problems=(Problem(pointer="", message=message),))


def _check_there_is_room(movement: Movement, places: Spread) -> None:
    if places.whole_rad > WIDEST_SECTOR_RAD:
        message = (
            f"{len(movement.tracks)} tracks from {movement.tracks[0].radius_mm:g} mm on find no room on a sector of "
            f"{math.degrees(WIDEST_SECTOR_RAD):g} degrees; a trial piece needs tracks farther from the centre"
        )
        raise DocumentError(document="movement", problems=(Problem(pointer="/tracks", message=message),))


def _ground(movement: Movement, cutter: Cutter, features: tuple[Feature, ...], within_mm: float) -> Ground:
    web_mm = WEB_FACTOR * max(cutter.min_web_mm, movement.disc.thickness_mm)
    return Ground(
        hub_mm=hub_radius_mm(movement, features, within_mm),
        rim_mm=movement.disc.outer_diameter_mm / 2,
        web_mm=web_mm,
        side_mm=SIDE_WEBS * web_mm,
        rings_mm=tuple((ring.from_radius_mm, ring.to_radius_mm) for ring in movement.keep_out),
    )


def _tracks_on_the_metal(
    movement: Movement, pattern: Pattern, features: tuple[Feature, ...], min_web_mm: float
) -> tuple[list[int], tuple[NotTried, ...]]:
    """The tracks whose openings leave the least web to rim and holes, by their place, and the others."""
    radius_mm = np.array([track.radius_mm for track in movement.tracks])
    cores = core_geometries(
        on_disc_mm(pattern.core_points_mm, radius_mm, np.zeros(len(radius_mm)), 1, pattern.strike_u_mm)
    )
    reach_mm = np.array([float(np.hypot(*shapely.get_coordinates(core).T).max()) for core in cores])
    near_mm = shapely.distance(cores, shapely.Point(0, 0)) - pattern.core_round_mm
    far_mm = reach_mm + pattern.core_round_mm
    # Holes of the hub lie at any angle to the sector, so they count by how far they reach.
    holes_mm = [
        float(np.hypot(*shapely.get_coordinates(core).T).max()) + round_mm
        for feature in features
        for core, round_mm in feature_metal_mm(feature, 1)[:1]
    ]
    inside_mm = max([movement.disc.centre_hole_mm / 2, *holes_mm])
    fits = (near_mm >= inside_mm + min_web_mm) & (far_mm <= movement.disc.outer_diameter_mm / 2 - min_web_mm)
    off = [f"track {index + 1}" for index in np.flatnonzero(~fits).tolist()]
    why = f"its opening leaves less than {min_web_mm:g} mm to the rim or to a hole"
    return np.flatnonzero(fits).tolist(), tuple(NotTried(what=what, why=why) for what in off)


def _sector(
    movement: Movement, features: tuple[Feature, ...], ground: Ground, whole_rad: float, mirror: int
) -> tuple[Sector, tuple[NotTried, ...]]:
    """The sector where it meets the fewest of the disc's other holes and notches, and those it would need."""
    others = [
        (feature, core.buffer(round_mm) if round_mm else core)
        for feature in movement.disc.features
        if feature not in features
        for core, round_mm in feature_metal_mm(feature, mirror)
    ]
    best: tuple[Sector, list[Feature]] | None = None
    for place in range(MIDDLES):
        middle_rad = 2 * math.pi * ((place + 1) // 2 * (-1) ** place) / MIDDLES  # 0, then ever more to both sides
        sector = Sector(hub_mm=ground.hub_mm, rim_mm=ground.rim_mm, middle_rad=middle_rad, half_rad=whole_rad / 2)
        fan = fan_mm(sector, ground.side_mm)
        met = [feature for feature, metal in others if fan.intersects(metal)]
        if best is None or len(met) < len(best[1]):
            best = (sector, met)
        if not met:
            break
    sector, met = best if best is not None else (sector, [])
    told = dict.fromkeys((feature.purpose, feature.shape, feature.radius_mm) for feature in met)
    why = "it lies across the sector: take out what stands there in the movement before the piece is put on"
    return sector, tuple(NotTried(what=f"{what} {shape} at {at_mm:g} mm", why=why) for what, shape, at_mm in told)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Drawn:
    """From the angle a, which grows as the disc is played, to the drawing."""

    sector: Sector
    turn: int  # +1 where a grows anticlockwise as drawn, else −1
    whole_rad: float

    def angle_rad(self, angle_rad: FloatArray | float) -> FloatArray:
        return np.asarray(self.sector.middle_rad + self.turn * (np.asarray(angle_rad) - self.whole_rad / 2))

    def points_mm(
        self, points_mm: FloatArray, radius_mm: FloatArray, angle_rad: FloatArray, square_at_mm: float = 0.0
    ) -> FloatArray:
        # A disc mirrored in Y is a disc that turns the other way, with its angles negative.
        return frozen_floats(on_disc_mm(points_mm, radius_mm, self.angle_rad(angle_rad), self.turn, square_at_mm))

    def outlines(self, layer: LayerName, shape: Shape, radius_mm: FloatArray, angle_rad: FloatArray) -> Outlines:
        return Outlines(
            layer=layer,
            points_mm=self.points_mm(shape.points_mm, radius_mm, angle_rad),
            bulges=frozen_floats(shape.bulges if self.turn > 0 else 0.0 - shape.bulges),
            closed=shape.closed,
        )


def _cut(
    drawn: _Drawn, movement: Movement, pattern: Pattern, tracks: Sequence[int], places: Spread
) -> tuple[FloatArray | None, tuple[Entity, ...]]:
    """Where a press strikes, or None; and what is cut: projections by track, then the ladders' steps."""
    radius_mm = np.array([movement.tracks[index].radius_mm for index in tracks])
    if pattern.cut is not None:
        cut: list[Entity] = []
        layer: LayerName = "SLITS" if pattern.making == "fold" else "SLOTS"
        if len(radius_mm):
            cut.append(drawn.outlines(layer, pattern.cut, radius_mm, places.track_angle_rad))
        for one in places.rungs:
            if one.rung.shape is not None:
                at_mm, at_rad = _openings(one)
                cut.append(drawn.outlines(one.rung.layer, one.rung.shape, at_mm, at_rad))
        return None, tuple(cut)
    strike_mm = pattern.strike_u_mm
    struck = [drawn.points_mm(np.array([[strike_mm, 0.0]]), radius_mm, places.track_angle_rad, strike_mm)]
    for one in places.rungs:
        if one.rung.strike_u_mm is not None:
            struck.append(drawn.points_mm(np.array([[one.rung.strike_u_mm, 0.0]]), *_openings(one)))
    hits_mm = frozen_floats(np.concatenate([points[:, 0, :] for points in struck]))
    return hits_mm, (Points(layer="HITS", points_mm=hits_mm),) if len(hits_mm) else ()


def _openings(one: PlacedRung) -> tuple[FloatArray, FloatArray]:
    """Radius and angle a of each opening of a rung."""
    apart_rad = one.rung.apart_rad(one.radius_mm)
    angle_rad = [one.angle_rad] if one.rung.web_mm is None else [one.angle_rad - apart_rad, one.angle_rad + apart_rad]
    return np.full(len(angle_rad), one.radius_mm), np.array(angle_rad)


def _marks(drawn: _Drawn, movement: Movement, tracks: Sequence[int], places: Spread) -> tuple[Entity, ...]:
    """The letters, and the line up to which the piece is turned."""
    stop_rad = float(drawn.angle_rad(places.stop_rad))
    along_mm = np.array([[drawn.sector.hub_mm, drawn.sector.rim_mm]]).T * [math.cos(stop_rad), math.sin(stop_rad)]
    # Ends inside the metal, a millimetre or less from hub and rim.
    ends_mm = along_mm[0] + (along_mm[1] - along_mm[0]) * np.array([[0.01], [0.99]])
    line = Outlines(
        layer="MARKS", points_mm=frozen_floats(ends_mm[None]), bulges=frozen_floats([0.0, 0.0]), closed=False
    )
    said: list[tuple[str, float, float]] = [
        (one.rung.text, one.radius_mm + one.label_mm, one.angle_rad) for one in places.rungs
    ]
    for index in _numbered(tracks, places):
        base_mm = movement.tracks[index].radius_mm - LETTER_HEIGHT_MM / 2
        said.append((f"T{index + 1}", base_mm, float(places.mark_angle_rad[tracks.index(index)])))
    letters = [
        Lettering(layer="MARKS", text=text, strokes_mm=standing_at(text, radius_mm, float(drawn.angle_rad(angle_rad))))
        for text, radius_mm, angle_rad in said
        if text_strokes_mm(text)
    ]
    return (line, *letters)


def _numbered(tracks: Sequence[int], places: Spread) -> list[int]:
    """The tracks whose number is engraved and told: the first, the middle and the last of the first column."""
    column = tracks[:: places.column_count]
    return sorted({column[0], column[len(column) // 2], column[-1]}) if column else []


def _told(
    movement: Movement, cutter: Cutter, rows: Sequence[Row], places: Spread, tracks: Sequence[int]
) -> tuple[Ladder, ...]:
    ladders = [row.ladder for row in rows if row.ladder is not None and row not in places.left_out]
    ladders.sort(key=lambda ladder: ladder.name == "web")  # last: what it shows counts once kerf is right
    numbered = _numbered(tracks, places)
    if not numbered:
        return tuple(ladders)
    return (*tool_ladders(movement, cutter, numbered), *ladders, track_ladder(movement, numbered))


def _cannot_be_cut(names: Sequence[str]) -> tuple[NotTried, ...]:
    why = "no step of it can be cut: the kerf is wider, or nothing is left of a tab beside its bend"
    return tuple(NotTried(what=f"ladder {name}", why=why) for name in names)


def _unlettered(cutter: Cutter) -> tuple[NotTried, ...]:
    if cutter.labels:
        return ()
    why = "the cutter states labels false; STOP and the numbers stay, by which the piece is turned and measured"
    return (NotTried(what="lettering of what the piece is", why=why),)


def _rows_left_out(places: Spread) -> tuple[NotTried, ...]:
    why = "the disc has no room for it beside the others"
    return tuple(
        NotTried(what=f"ladder {row.ladder.name}" if row.ladder else f"lettering {row.rungs[0].text!r}", why=why)
        for row in places.left_out
    )
