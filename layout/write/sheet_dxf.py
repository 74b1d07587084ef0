"""A sheet as a DXF file: its outline to lay it down by, and its discs to cut, one after the other."""

from collections.abc import Iterator

import numpy as np
from ezdxf.document import Drawing

from layout.documents.cutter import LAYER_COLOURS, layer_of
from layout.documents.sheets import CLAMPS_LAYER, STOCK_LAYER
from layout.mechanics.arrays import FloatArray
from layout.mechanics.drawn import DrawnArc, DrawnCircle, DrawnDisc, DrawnEntity, DrawnLine, DrawnPoint
from layout.mechanics.lettering import strokes_mm
from layout.sheets.plan import DiscKind, Sheet, SheetPlan
from layout.write.dxf import UNIT_SAID
from layout.write.dxf_document import Release, bytes_of, new_document
from layout.write.dxf_entities import APP_ID, Entities, entities_of
from layout.write.numbers import DECIMALS_BULGE, rounded

RIM, MARKS = "RIM", "MARKS"
# Colour indices (AutoCAD Color Index of the DXF reference), none of what is cut.
_COLOURS = {STOCK_LAYER: 7, CLAMPS_LAYER: 252}


def write_sheet_dxf(plan: SheetPlan, number: int) -> bytes:
    """One sheet as a DXF file in millimetres, ASCII, the same bytes every time.

    Discs stand in cutting order, each whole: all of its drawing in the order it is drawn in, moved to its place and
    neither turned nor mirrored, so that every vertex stays exact, folds keep their way to the rolling of the sheet,
    and marks read as on the disc alone. A disc without a drawing is a circle on the layer RIM. Before each stands its
    label on MARKS, where it has one. Layers have the names and colours of the job. The sheet with its
    openings stands on STOCK, zones kept free on CLAMPS: neither is ever cut, and the head of the file says so. Only
    layers that occur are there. The release is R2010, or R12 where a drawing on the sheet is of that release.

    Args:
        plan: The plan.
        number: Which of its sheets, from 1.
    """
    sheet = plan.sheets[number - 1]
    rings = (sheet.piece.outline_mm, *sheet.piece.openings_mm)
    zones = [_around(zone) for zone in sheet.clamps_mm]
    corners = np.concatenate([*rings, *zones])
    kinds = [plan.kinds[kind] for kind in dict.fromkeys(sheet.kind.tolist())]
    release = _release(kinds)
    document = new_document(rounded(np.array([corners.min(axis=0), corners.max(axis=0)])), release)
    _add_layers(document, plan, [*_uncut(sheet), *_layers_of(kinds, sheet)])
    lettered = any(isinstance(each, DrawnLine) and each.words for drawn in _drawings(kinds) for each in drawn.entities)
    if lettered or any(sheet.labels):
        document.appids.add(APP_ID)
    entities = entities_of(document)
    for layer, outlines in ((STOCK_LAYER, rings), (CLAMPS_LAYER, zones)):
        for outline in outlines:
            entities.add_polylines(layer, rounded(outline)[np.newaxis], np.zeros(len(outline)), closed=True)
    names = {ours: layer_of(plan.layers, ours).name for ours in LAYER_COLOURS}
    placed = zip(
        sheet.kind.tolist(), rounded(sheet.centres_mm), rounded(sheet.radius_mm).tolist(), sheet.labels, strict=True
    )
    for kind, centre_mm, radius_mm, label in placed:
        if label is not None:
            strokes = [rounded(stroke + label.at_mm) for stroke in strokes_mm(label.text, label.height_mm)]
            entities.add_strokes(names[MARKS], strokes, label.text)
        drawn = plan.kinds[kind].drawing
        if drawn is None:
            entities.add_circles(names[RIM], centre_mm[np.newaxis], [radius_mm])
        else:
            for entity in drawn.entities:
                _add_moved(entities, entity, centre_mm, names[entity.layer])
    return bytes_of(document, (*_comments(plan, sheet, number), *_of_the_drawings(kinds), *UNIT_SAID.get(release, ())))


def _drawings(kinds: list[DiscKind]) -> Iterator[DrawnDisc]:
    return (kind.drawing for kind in kinds if kind.drawing is not None)


def _release(kinds: list[DiscKind]) -> Release:
    return "R12" if any(drawn.release == "R12" for drawn in _drawings(kinds)) else "R2010"


def _uncut(sheet: Sheet) -> list[str]:
    return [STOCK_LAYER, *([CLAMPS_LAYER] if len(sheet.clamps_mm) else [])]


def _layers_of(kinds: list[DiscKind], sheet: Sheet) -> list[str]:
    """Our layers that the discs use, in the order of the table."""
    used = {entity.layer for drawn in _drawings(kinds) for entity in drawn.entities} | {RIM}
    if any(sheet.labels):
        used.add(MARKS)
    return [layer for layer in LAYER_COLOURS if layer in used]


def _add_layers(document: Drawing, plan: SheetPlan, layers: list[str]) -> None:
    for ours in layers:
        name, colour = ours, _COLOURS.get(ours)
        if colour is None:
            wanted = layer_of(plan.layers, ours)
            name, colour = wanted.name, wanted.colour
        if name in document.layers:  # layer 0, the only one that stands already
            document.layers.get(name).color = colour
        else:
            document.layers.add(name, color=colour)


def _add_moved(entities: Entities, entity: DrawnEntity, by_mm: FloatArray, layer: str) -> None:
    match entity:
        case DrawnCircle():
            entities.add_circles(layer, rounded(entity.centre_mm + by_mm)[np.newaxis], [entity.radius_mm])
        case DrawnArc():
            ends_deg = (entity.from_deg, entity.to_deg)
            entities.add_arc(layer, rounded(entity.centre_mm + by_mm), entity.radius_mm, ends_deg)
        case DrawnPoint():
            entities.add_points(layer, rounded(entity.at_mm + by_mm)[np.newaxis])
        case DrawnLine():
            points_mm, bulges = rounded(entity.points_mm + by_mm), rounded(entity.bulge_ratio, DECIMALS_BULGE)
            entities.add_polylines(layer, points_mm[np.newaxis], bulges, closed=entity.closed, words=entity.words)


def _around(zone: FloatArray) -> FloatArray:
    least_x, least_y, greatest_x, greatest_y = zone.tolist()
    return np.array([(least_x, least_y), (greatest_x, least_y), (greatest_x, greatest_y), (least_x, greatest_y)])


def _comments(plan: SheetPlan, sheet: Sheet, number: int) -> tuple[str, ...]:
    lot = f", lot {sheet.lot}" if sheet.lot else ""
    drawn = any(plan.kinds[kind].drawing is not None for kind in sheet.kind.tolist())
    names = {ours: layer_of(plan.layers, ours).name for ours in (RIM, MARKS)}
    beside = (f"Letters on {names[MARKS]} beside the discs say which is which: id and number, as in parts.csv.",)
    what = (
        "Cut in the order of the file, disc by disc: each is marked, cut inside and cut free before the next. "
        f"{names[MARKS]} are marked and never cut through."
        if drawn
        else f"Cut {names[RIM]} alone, in the order of the file."
    )
    return (
        f"{plan.title}: sheet {number} of {len(plan.sheets)}, from {sheet.stock}{lot}; {len(sheet.kind)} discs; "
        f"millimetres, {'discs as drawn, see below' if drawn else 'nominal rims without kerf'}",
        f"{what} STOCK is the sheet's own edge and CLAMPS are zones kept free: never cut them.",
        f"Cutting begins at the {sheet.cut_from} and goes across the sheet in strips, so what is not cut yet "
        "stays in one piece. Discs that are cut free may tip: keep to the rules of the machine and the shop.",
        *(beside if any(sheet.labels) else ()),
        f"job {plan.fingerprint}",
    )


def _of_the_drawings(kinds: list[DiscKind]) -> Iterator[str]:
    """What the heads of the discs' drawings say: each disc's own, then what all share."""
    drawings = list(_drawings(kinds))
    for kind in kinds:
        if kind.drawing is None:
            if drawings:
                yield f"disc {kind.id}: a plain circle, nominal rim without kerf"
        else:
            title, fingerprint = kind.drawing.title or "untitled", kind.drawing.fingerprint or "unknown"
            yield f"disc {kind.id}: {title}; fingerprint {fingerprint}"
            if kind.drawing.hits:
                yield f"disc {kind.id}: {kind.drawing.hits}"
    for told in zip(*((drawn.blank, drawn.side, drawn.kerf) for drawn in drawings), strict=True):
        yield from dict.fromkeys(line for line in told if line)
    if any(isinstance(each, DrawnPoint) for drawn in drawings for each in drawn.entities):
        yield "hits go round the centre of their own disc, which parts.csv tells"
