"""How tests read the files back: DXF by GDAL, SVG by svgelements; neither wrote them."""

import io
import math
from collections.abc import Iterator
from itertools import pairwise
from pathlib import Path

import numpy as np
import pyogrio
import shapely
import svgelements

ARC_STEP_DEG = 0.2  # on a disc of 428 mm the middle of such a chord lies 0.0003 mm inside its arc
Geometry = shapely.LineString | shapely.Point


def read_dxf(dxf: bytes, folder: Path) -> list[tuple[str, Geometry]]:
    """Layer and shape of everything drawn, in file order; arcs as short chords with their ends on the arc."""
    path = folder / "drawing.dxf"
    path.write_bytes(dxf)
    pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": ARC_STEP_DEG})
    try:
        meta, _, shapes, columns = pyogrio.raw.read(path)
    finally:
        pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": None})
    layers = columns[list(meta["fields"]).index("Layer")]
    return list(zip(layers.tolist(), shapely.force_2d(shapely.from_wkb(shapes)).tolist(), strict=True))


def dxf_tags(dxf: bytes) -> list[tuple[int, str]]:
    """Every group code and value of the file, as the DXF reference has them: two lines each."""
    lines = dxf.decode("ascii").split("\n")
    return [(int(code), value) for code, value in zip(lines[:-1:2], lines[1::2], strict=True)]


def header_values(dxf: bytes) -> dict[str, str]:
    """The first value of every header variable."""
    tags = dxf_tags(dxf)
    return {name: tags[place + 1][1] for place, (code, name) in enumerate(tags) if code == 9}


def layer_names(dxf: bytes) -> list[str]:
    """The names in the layer table."""
    tags = dxf_tags(dxf)
    return [
        next(value for code, value in tags[place + 1 :] if code == 2)
        for place, tag in enumerate(tags)
        if tag == (0, "LAYER")
    ]


def read_svg(svg: bytes) -> dict[str, list[Geometry]]:
    """Shapes of every group by its id, in the file's own order and coordinates, at its physical size."""
    picture = svgelements.SVG.parse(io.BytesIO(svg), ppi=25.4)  # so that one pixel is one millimetre
    shift = complex(picture.viewbox.x, picture.viewbox.y)
    groups = picture.select(lambda item: isinstance(item, svgelements.Group) and item.id is not None)
    return {
        group.id: [shape for item in group for shape in _shapes(item, shift)]
        for group in groups
        if group is not picture
    }


def _shapes(item: object, shift: complex) -> Iterator[Geometry]:
    if isinstance(item, svgelements.Circle | svgelements.Path):
        for part in svgelements.Path(item).as_subpaths():
            points = [complex(*point) + shift for segment in part for point in _points(segment)]
            apart = [points[0], *(b for a, b in pairwise(points) if abs(b - a) > 1e-9)]
            pairs = [(point.real, point.imag) for point in apart]
            yield shapely.LineString(pairs) if len(pairs) > 1 else shapely.Point(pairs[0])


def _points(segment: object) -> Iterator[tuple[float, float]]:
    if isinstance(segment, svgelements.Arc):
        steps = max(1, math.ceil(math.degrees(abs(segment.sweep)) / ARC_STEP_DEG))
        yield from segment.npoint(np.linspace(0, 1, steps + 1)).tolist()
    elif getattr(segment, "end", None) is not None:
        yield segment.end.x, segment.end.y


def upside_down(shape: Geometry) -> Geometry:
    """The shape with y turned over, as a picture counts it."""
    return shapely.transform(shape, lambda points: points * (1, -1))
