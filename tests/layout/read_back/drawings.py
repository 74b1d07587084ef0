"""Drawings for the tests: cut plans written by a small writer of the tests' own, for changing by hand."""

import io

import ezdxf
import numpy as np
from ezdxf.document import Drawing as Document

from layout.cut import plan_cuts
from layout.cut.plan import Circles, Drawing, LayerName, Lettering, Outlines, Points
from layout.documents import Cutter, Movement
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc
from tests.layout.examples import LASER, disc_of

MILLIMETRES = 4
R12 = "AC1009"


def document_of(drawing: Drawing, cutter: Cutter, *, release: str = "R2010") -> Document:
    document = ezdxf.new(release)
    document.header["$INSUNITS"] = MILLIMETRES
    space = document.modelspace()
    for entity in drawing.entities:
        on_layer = {"layer": cutter.layer(entity.layer).name}
        match entity:
            case Outlines():
                for points in entity.points_mm:
                    add_line(
                        document, np.column_stack([points, entity.bulges]), entity.layer, cutter, closed=entity.closed
                    )
            case Circles():
                for centre, radius_mm in zip(entity.centres_mm.tolist(), entity.radius_mm.tolist(), strict=True):
                    space.add_circle(centre, radius_mm, dxfattribs=on_layer)
            case Points():
                for point in entity.points_mm.tolist():
                    space.add_point(point, dxfattribs=on_layer)
            case Lettering():
                for stroke in entity.strokes_mm:
                    straight = np.column_stack([stroke, np.zeros(len(stroke))])
                    add_line(document, straight, entity.layer, cutter, closed=False)
    return document


def add_line(document: Document, vertices: FloatArray, layer: LayerName, cutter: Cutter, *, closed: bool) -> None:
    space = document.modelspace()
    add = space.add_polyline2d if document.dxfversion == R12 else space.add_lwpolyline
    add(vertices.tolist(), format="xyb", close=closed, dxfattribs={"layer": cutter.layer(layer).name})


def bytes_of(document: Document) -> bytes:
    stream = io.StringIO()
    document.write(stream)
    return stream.getvalue().encode("utf-8")


def disc_document(disc: Disc, *, release: str = "R2010") -> Document:
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)
    return document_of(plan.disc, disc.cutter, release=release)


def random_disc(movement: Movement, cutter: Cutter = LASER, seed: int = 0, count: int = 40) -> Disc:
    """A disc whose working edges lie on a grid of places at least a thousandth of a turn apart."""
    dice = np.random.default_rng(seed)
    slots = dice.choice(len(movement.tracks) * 800, size=count, replace=False)
    plucks = [(int(slot) // 800 + 1, movement.revolution_s * (int(slot) % 800) / 1000) for slot in slots]
    return disc_of(movement, plucks, cutter)
