"""Entities written as text against the same ones written by ezdxf object by object: byte for byte the same file."""

from collections.abc import Callable

import numpy as np
import pytest
from ezdxf.audit import Auditor
from hypothesis import given
from hypothesis import strategies as st

from layout.write import dxf_entities
from layout.write.dxf_document import bytes_of, new_document
from layout.write.dxf_entities import APP_ID, Entities, LibraryEntities, WrittenEntities, entities_of
from tests.layout.write.test_dxf import reread

EXTENTS_MM = np.array([(-100.0, -100.0), (100.0, 100.0)])
LAYERS = ("SLITS", "MARKS", "100% cut")
WORDS = ("", "Turning Day", "half of 100 %r", "Größe 𝄞", "x" * 400)
mm = st.floats(-1e4, 1e4).map(lambda value: round(value, 6) + 0.0)
Added = Callable[[Entities], None]


def written_by(make: Callable[..., Entities], *added: Added) -> bytes:
    document = new_document(EXTENTS_MM)
    for layer in LAYERS:
        document.layers.add(layer)
    document.appids.add(APP_ID)
    entities = make(document)
    for add in added:
        add(entities)
    return bytes_of(document, ("a comment",))


@st.composite
def polylines(draw: st.DrawFn) -> Added:
    count, vertices = draw(st.integers(0, 4)), draw(st.integers(1, 9))
    points = draw(st.lists(mm, min_size=count * vertices * 2, max_size=count * vertices * 2))
    bulges = draw(st.lists(st.sampled_from([0.0, 1.0, -1.0, 0.414213562373]), min_size=vertices, max_size=vertices))
    layer, closed, words = draw(st.sampled_from(LAYERS)), draw(st.booleans()), draw(st.sampled_from(WORDS))
    shaped = np.array(points, dtype=np.float64).reshape(count, vertices, 2)
    return lambda entities: entities.add_polylines(layer, shaped, np.array(bulges), closed=closed, words=words)


@st.composite
def circles(draw: st.DrawFn) -> Added:
    rows = draw(st.lists(st.tuples(mm, mm, st.floats(1e-3, 1e4)), max_size=4))
    layer, numbers = draw(st.sampled_from(LAYERS)), np.array(rows, dtype=np.float64).reshape(-1, 3)
    return lambda entities: entities.add_circles(layer, numbers[:, :2], numbers[:, 2].tolist())


@st.composite
def arcs(draw: st.DrawFn) -> Added:
    centre, radius = np.array(draw(st.tuples(mm, mm))), draw(st.floats(1e-3, 1e4))
    ends, layer = draw(st.tuples(st.floats(-360, 360), st.floats(-360, 360))), draw(st.sampled_from(LAYERS))
    return lambda entities: entities.add_arc(layer, centre, radius, ends)


@st.composite
def points(draw: st.DrawFn) -> Added:
    rows, layer = draw(st.lists(st.tuples(mm, mm), max_size=4)), draw(st.sampled_from(LAYERS))
    return lambda entities: entities.add_points(layer, np.array(rows, dtype=np.float64).reshape(-1, 2))


@st.composite
def strokes(draw: st.DrawFn) -> Added:
    lines = draw(st.lists(st.lists(st.tuples(mm, mm), min_size=1, max_size=6), max_size=4))
    layer, words = draw(st.sampled_from(LAYERS)), draw(st.sampled_from(WORDS))
    return lambda entities: entities.add_strokes(layer, [np.array(line, dtype=np.float64) for line in lines], words)


@given(st.lists(st.one_of(polylines(), circles(), arcs(), points(), strokes()), max_size=5))
def test_entities_of_every_kind_are_written_as_ezdxf_writes_them(added: list[Added]) -> None:
    assert written_by(WrittenEntities, *added) == written_by(LibraryEntities, *added)


def test_many_entities_of_a_make_are_written_some_at_a_time_and_nothing_shows_where(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(dxf_entities, "_AT_A_TIME", 3)
    corners = np.arange(56.0).reshape(7, 4, 2)  # of seven squares, three, three and one at a time
    many: list[Added] = [
        lambda entities: entities.add_polylines("SLITS", corners, np.zeros(4), closed=True),
        lambda entities: entities.add_circles("MARKS", corners[:6, 0], [1.0] * 6),
        lambda entities: entities.add_points("MARKS", corners[:2, 0]),
    ]

    assert written_by(WrittenEntities, *many) == written_by(LibraryEntities, *many)


def test_no_handle_is_given_twice_and_the_next_one_is_free() -> None:
    square = np.array([[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0)]] * 300)

    document = reread(
        written_by(
            WrittenEntities,
            lambda entities: entities.add_polylines("SLITS", square, np.zeros(3), closed=True),
            lambda entities: entities.add_points("MARKS", np.zeros((2, 2))),
        )
    )

    auditor = Auditor(document)
    auditor.run()
    assert (auditor.errors, auditor.fixes) == ([], [])
    handles = {entity.dxf.handle for entity in document.modelspace()}
    assert len(handles) == 300 + 2
    assert int(str(document.header["$HANDSEED"]), 16) > max(int(handle, 16) for handle in handles)


@pytest.mark.parametrize(("release", "kind"), [("R12", LibraryEntities), ("R2010", WrittenEntities)])
def test_a_release_without_light_polylines_is_left_to_ezdxf(release: str, kind: type) -> None:
    assert isinstance(entities_of(new_document(EXTENTS_MM, release)), kind)


def test_a_document_whose_entities_went_with_its_file_is_not_written_without_them() -> None:
    document = new_document(EXTENTS_MM)
    entities = WrittenEntities(document)
    entities.add_circles("0", np.zeros((1, 2)), [1.0])
    bytes_of(document, ())

    with pytest.raises(RuntimeError, match="written once"):
        bytes_of(document, ())
