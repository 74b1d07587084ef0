"""Discs, cut plans and layouts made by hand, small enough to follow in the head."""

import math
from dataclasses import replace

import numpy as np

from layout.arrange.arrangement import NO_NOTE, Arrangement, LeftOut, Worth
from layout.check.finding import Code, Finding, Level, Place
from layout.cut.plan import Circles, CutPlan, Drawing, Entity, LayerName, Lettering, Outlines, Points
from layout.documents import Cutter, Movement, shipped_cutter, shipped_movement
from layout.mechanics.arrays import FloatArray, frozen_floats, frozen_ints
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of
from layout.place.disc import Disc
from layout.play.plucks import Plucks
from layout.read.score import Score
from layout.report import report_on
from layout.write.laid_out import LaidOut

FERNHOLLOW = shipped_movement("fernhollow-31")
MOSSBROOK = shipped_movement("mossbrook-67")
TARNLIGHT = shipped_movement("tarnlight-17")
LASER = shipped_cutter("fibre-laser")
PRESS = shipped_cutter("turn-press")
OPEN_FOLD = {"inside_radius_mm": 0.4, "fold_side": "behind", "relief_mm": 0.3, "slit": "centre-line"}
OPEN_LASER = Cutter.model_validate(LASER.model_dump(mode="json") | {"id": "open-laser", "fold": OPEN_FOLD})
FINGERPRINT = "0123456789abcdef"


def disc_of(movement: Movement, cutter: Cutter, placed: list[tuple[int, float]]) -> Disc:
    """A disc with projections at these (track number, angle of the working edge in degrees)."""
    return Disc(
        movement=movement,
        cutter=cutter,
        turning=turning_of(movement),
        pattern=pattern_of(movement, cutter),
        track_index=frozen_ints([track - 1 for track, _ in placed]),
        edge_angle_rad=frozen_floats([math.radians(angle_deg) for _, angle_deg in placed]),
    )


EMPTY_DISC = disc_of(FERNHOLLOW, LASER, [])
ONE_FOLD = disc_of(FERNHOLLOW, LASER, [(5, 90.0)])  # track 5: 36 + 4 * 2.62 = 46.48 mm
THREE_FOLDS = disc_of(FERNHOLLOW, LASER, [(1, 20.0), (16, 200.0), (31, 359.0)])
THREE_SLOTS = disc_of(TARNLIGHT, LASER, [(17, 359.0), (1, 20.0), (9, 200.0)])  # cut in another order
THREE_LANCES = disc_of(MOSSBROOK, PRESS, [(1, 20.0), (33, 200.0), (67, 270.0)])
OPEN_SLITS = disc_of(FERNHOLLOW, OPEN_LASER, [(3, 10.0), (20, 130.0)])
SLOTS_ON_A_PRESS = disc_of(TARNLIGHT, PRESS, [(2, 45.0), (9, 300.0)])
EXAMPLE_DISCS = {
    "empty disc": EMPTY_DISC,
    "one fold": ONE_FOLD,
    "three folds": THREE_FOLDS,
    "three slots": THREE_SLOTS,
    "three lances": THREE_LANCES,
    "open slits": OPEN_SLITS,
    "slots on a press": SLOTS_ON_A_PRESS,
}


def full_disc(movement: Movement, cutter: Cutter) -> Disc:
    """A dense disc: a projection every 15 mm or so on every track, its angle from its moment as in a real one."""
    tracks = movement.tracks
    counts = [int(2 * math.pi * track.radius_mm / 6) for track in tracks]
    placed = [
        (track.track, 24 + 320 * (((place + track.track * 0.618034) % count) / count))
        for track, count in zip(tracks, counts, strict=True)
        for place in range(count)
        if (place * 7 + track.track * 3) % 5 < 2
    ]
    disc = disc_of(movement, cutter, placed)
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad, disc.track_index)
    return replace(disc, edge_angle_rad=frozen_floats(disc.turning.edge_angle_rad(sounds_s, disc.track_index)))


def drawn_mm(disc: Disc, points_mm: FloatArray) -> FloatArray:
    """Shape (n, k, 2). Points of every projection's flat frame as drawn."""
    placed = disc.placed_mm(points_mm)
    return frozen_floats(placed * (1, 1 if disc.cutter.drawn_from == "label-side" else -1))


def plan_by_hand(disc: Disc, *, title: str = "Example", not_good: str | None = None) -> CutPlan:
    """A cut plan with every kind of entity, in the disc's own order."""
    pattern, movement = disc.pattern, disc.movement
    turned = disc.turning.direction * (1 if disc.cutter.drawn_from == "label-side" else -1)
    circle_mm = np.zeros((1, 2))
    rim_mm = frozen_floats([movement.disc.outer_diameter_mm / 2])
    hole_mm = frozen_floats([movement.disc.centre_hole_mm / 2])
    at_mm = drawn_mm(disc, np.array([[pattern.strike_u_mm, 0.0]]))[:, 0]
    cut: list[Entity] = []
    if disc.cutter.kind == "punch-press":
        cut = [Points(layer="HITS", points_mm=at_mm)]
    elif pattern.cut is not None:
        points_mm, bulges = drawn_mm(disc, pattern.cut.points_mm), frozen_floats(turned * pattern.cut.bulges)
        layer: LayerName = "SLITS" if pattern.making == "fold" else "SLOTS"
        cut = [Outlines(layer=layer, points_mm=points_mm, bulges=bulges, closed=pattern.cut.closed)]
    letter_mm = (np.array([(8.0, 3.0), (8.0, 1.0), (9.0, 1.0)]), np.array([(8.0, 2.0), (8.5, 2.0)]))
    blank: list[Entity] = [
        Circles(layer="HOLES", centres_mm=circle_mm, radius_mm=hole_mm),
        Lettering(layer="MARKS", text=title, strokes_mm=letter_mm),
        Circles(layer="RIM", centres_mm=circle_mm, radius_mm=rim_mm),
    ]
    opening = pattern.opening
    after_mm, bulges = drawn_mm(disc, opening.points_mm), frozen_floats(turned * opening.bulges)
    radii_mm = disc.turning.radius_mm
    formed: list[Entity] = [
        Circles(layer="TRACKS", centres_mm=np.zeros((len(radii_mm), 2)), radius_mm=radii_mm),
        Outlines(layer="AFTER_FORMING", points_mm=after_mm, bulges=bulges, closed=True),
    ]
    if pattern.fold_line_mm is not None:
        lines_mm, straight = drawn_mm(disc, pattern.fold_line_mm), frozen_floats([0.0, 0.0])
        formed.append(Outlines(layer="FOLDS", points_mm=lines_mm, bulges=straight, closed=False))
    side = f"seen from the {disc.cutter.drawn_from}"
    return CutPlan(
        title=title,
        fingerprint=FINGERPRINT,
        drawn_from=disc.cutter.drawn_from,
        not_good=not_good,
        disc=Drawing(entities=(*cut, *blank), comments=(f"tune disc, {side}", "units: mm")),
        record=Drawing(entities=(*formed, *cut, *blank), comments=("for reading, not for cutting",)),
        order=frozen_ints(range(disc.projection_count)),
        at_mm=at_mm,
        tool=pattern.tool,
    )


def laid_out_of(disc: Disc, *, title: str = "Example", findings: tuple[Finding, ...] = ()) -> LaidOut:
    """A layout in which every projection plays one note, at its moment, and one last note is left out."""
    count = disc.projection_count
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad, disc.track_index)
    score = Score(
        onset_s=frozen_floats(range(count + 1)),
        duration_s=frozen_floats([0.5] * (count + 1)),
        pitch=frozen_ints([60] * (count + 1)),
        velocity=frozen_ints([64] * (count + 1)),
        channel=frozen_ints([1] * (count + 1)),
        bar_s=frozen_floats([0.0]),
        beat_s=frozen_floats([0.0]),
        title="name in the file",
        midi_format=1,
        sequence=1,
        sequence_count=1,
        percussion_count=2,
        warnings=("3 bytes follow the last track",),
    )
    arrangement = Arrangement(
        track_index=disc.track_index,
        key=frozen_ints([60] * count),
        asked_s=frozen_floats(sounds_s),
        planned_s=frozen_floats(sounds_s),
        notes=tuple((note,) for note in range(count)),
        again_of=frozen_ints([NO_NOTE] * count),
        octave_semitones=frozen_ints([0] * count),
        left_out=(LeftOut(note=count, reason="no-such-pitch"),),
        transposed_semitones=-3,
        speed_factor=1.25,
        from_s=0.5,
        length_s=float(max(sounds_s, default=0.0)),
        worth=Worth(kept=1000 * count, bound=1000 * count + 1000, proved=False),
        note_weight=frozen_ints([1000] * (count + 1)),
        highest=np.ones(count + 1, dtype=np.bool_),
        lowest=np.zeros(count + 1, dtype=np.bool_),
        melody=np.ones(count + 1, dtype=np.bool_),
        tried=(),
        transpositions=(),
        load=None,
    )
    plucks = Plucks(track_index=disc.track_index, sounds_s=frozen_floats(sounds_s), silent_from_s=frozen_floats([]))
    return LaidOut(
        title=title,
        fingerprint=FINGERPRINT,
        score=score,
        arrangement=arrangement,
        disc=disc,
        plucks=plucks,
        findings=findings,
        report=report_on(score, arrangement, disc),
    )


THIN_WEB = Finding(
    code=Code.WEB_TOO_THIN,
    level=Level.ERROR,
    message="The web between two openings on tracks 4 and 5 is 0.31 mm; the cutter needs 0.5 mm.",
    measured=0.31,
    limit=0.5,
    unit="mm",
    at=Place(tracks=(4, 5), projections=(0, 1), radius_mm=45.2, angle_deg=91.5),
    remedy="Leave one of the two notes out, or let the arranger move it to another tooth.",
)
NEAR_LIMIT = Finding(
    code=Code.MARGIN_UNSURE,
    level=Level.WARNING,
    message="The tip clears the bend by 0.02 mm, less than the 0.05 mm its axis depth may be off.",
    measured=0.02,
    limit=0.05,
    unit="mm",
    at=Place(),
    remedy="Measure the axis depth of the star wheels again.",
)
EARLY_DAMPER = Finding(
    code=Code.DAMPER_NOT_RECOVERED,
    level=Level.ADVICE,
    message="Tooth 9 sounds again after 0.11 s; its damper needs 0.12 s.",
    measured=0.11,
    limit=0.12,
    unit="s",
    at=Place(tracks=(9,), radius_mm=57.0, angle_deg=300.0, sounds_s=12.5),
    remedy="Play the tune a little slower.",
)


def without(finding: Finding, **changed: object) -> Finding:
    """The finding with some fields changed."""
    return replace(finding, **changed)  # type: ignore[arg-type]  # names are checked by replace itself
