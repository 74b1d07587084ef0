"""What the pages of movements and cutters say: every number with what it is worth, and the tracks of a movement."""

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import groupby
from operator import attrgetter
from typing import Any

from layout.documents import Cutter, Movement, read_cutter, read_movement, shipped_cutter, shipped_cutter_ids
from layout.documents.reading import Stated, read_json
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import Spacing, spacing_of
from layout.mechanics.turning import FULL_TURN_RAD, turning_of
from service.catalogue import document_told
from service.pages.texts import text_of
from service.store.documents import KeptDocument

# The unit of a field by how its name ends; the longer endings first.
UNITS = (
    ("_n_per_mm2", "N/mm²"),
    ("_n_per_mm", "N/mm"),
    ("_mm_per_s", "mm/s"),
    ("_deg_per_s", "°/s"),
    ("_turns_per_s", "1/s"),
    ("_kg_m3", "kg/m³"),
    ("_kg_m2", "kg·m²"),
    ("_nmm", "N·mm"),
    ("_turns", "turns"),
    ("_deg", "°"),
    ("_mm", "mm"),
    ("_n", "N"),
    ("_s", "s"),
    ("cents", "cents"),
)
TOLD_ELSEWHERE = frozenset({"format", "id", "revision", "title", "tracks", "teeth"})


@dataclass(frozen=True, slots=True, kw_only=True)
class ValueTold:
    """A row: the field in words, its value with the unit, how far it may be off, what it stands on; "" for unsaid.

    `part` is what of the group the field belongs to, such as one hole of a blank; "" for the group itself.
    """

    part: str
    name: str
    value: str
    plus_minus: str
    basis: str


@dataclass(frozen=True, slots=True, kw_only=True)
class TrackTold:
    """A row of the tracks: what it is and plays, and how soon after a note it can play the next."""

    track: int
    radius_mm: str
    plus_minus: str
    pitch: str
    teeth: str
    least_deg: str
    least_s: str
    why: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupTold:
    """A table of values: its title, and its rows under the headings of its parts; a group's own have the heading ""."""

    title: str
    parts: tuple[tuple[str, tuple[ValueTold, ...]], ...]


def values_of(document: KeptDocument) -> tuple[GroupTold, ...]:
    """The values of a document by group, but for what its page tells elsewhere."""
    read = (read_movement if document.kind == "movement" else read_cutter)(document.text)
    told = document_told(read)
    _, stated = read_json(document.text, document=document.kind)
    plain = {key: value for key, value in told.items() if key not in TOLD_ELSEWHERE and not _is_group(value)}
    groups: dict[str, tuple[str, Any]] = {"": (text_of("movements.plain"), plain)}
    for name, value in told.items():
        if name in TOLD_ELSEWHERE or not _is_group(value):
            continue
        if isinstance(value, Mapping):
            groups[f"/{name}"] = (field_words(name), value)
        else:
            groups |= {f"/{name}/{n}": (f"{field_words(name)} · {n + 1}", part) for n, part in enumerate(value)}
    return tuple(
        GroupTold(title=title, parts=_by_part(_rows(value, place, (), stated)))
        for place, (title, value) in groups.items()
        if value
    )


def tracks_of(movement: Movement, cutter: Cutter | None = None) -> tuple[TrackTold, ...]:
    """The tracks of a movement, from the innermost.

    Args:
        movement: The movement.
        cutter: Whose least web counts for the least repeat; None for the one meant where none is named.
    """
    turning, used = turning_of(movement), cutter or shipped_cutter(shipped_cutter_ids()[0])
    spacing = spacing_of(movement, turning, pattern_of(movement, used), used.min_web_mm)
    rows = []
    for index, track in enumerate(movement.tracks):
        teeth = [tooth for tooth in movement.teeth if tooth.track == track.track]
        least_rad = float(spacing.least_rad[index])
        stated = movement.stated.get(f"/tracks/{index}/radius_mm")
        rows.append(
            TrackTold(
                track=track.track,
                radius_mm=f"{track.radius_mm:g}",
                plus_minus=_off(stated),
                pitch=teeth[0].pitch if teeth else "–",
                teeth=", ".join(str(tooth.tooth) for tooth in teeth) or "–",
                least_deg=f"{math.degrees(least_rad):.1f}",
                least_s=f"{least_rad / FULL_TURN_RAD * turning.revolution_s:.2f}",
                why=text_of(f"movements.why_{_why(spacing, index)}"),
            )
        )
    return tuple(rows)


def field_words(name: str) -> str:
    """A field's name in words, as the form shows it."""
    return text_of(f"script.movements.field_{name}")


def unit_of(name: str) -> str:
    """The unit that a field's name carries; "" for none."""
    return next((unit for ending, unit in UNITS if name.endswith(ending)), "")


def _why(spacing: Spacing, index: int) -> str:
    least = float(spacing.least_rad[index])
    named = {"wheel": spacing.wheel_rad, "damper": spacing.damper_rad, "web": spacing.web_rad}
    return next(name for name, angles in named.items() if float(angles[index]) == least)


def _is_group(value: object) -> bool:
    return isinstance(value, dict | list | tuple)


def _by_part(rows: Iterator[ValueTold]) -> tuple[tuple[str, tuple[ValueTold, ...]], ...]:
    return tuple((part, tuple(told)) for part, told in groupby(rows, key=attrgetter("part")))


def _rows(
    value: Any, pointer: str, names: tuple[str, ...], stated: Mapping[str, Stated], field: str = ""
) -> Iterator[ValueTold]:
    if isinstance(value, Mapping):
        for key, part in value.items():
            words = field_words(key) if _has_words(key) else key
            yield from _rows(part, f"{pointer}/{key}", (*names, words), stated, key)
    elif isinstance(value, list | tuple) and not any(
        _is_group(part) or f"{pointer}/{place}" in stated for place, part in enumerate(value)
    ):
        if value:
            yield ValueTold(
                part=" · ".join(names[:-1]),
                name=_last(names),
                value=" / ".join(map(_shown, value)),
                plus_minus="",
                basis="",
            )
    elif isinstance(value, list | tuple):
        for place, part in enumerate(value):
            yield from _rows(part, f"{pointer}/{place}", (*names, str(place + 1)), stated, field)
    else:
        worth = stated.get(pointer)
        unit = unit_of(field)
        yield ValueTold(
            part=" · ".join(names[:-1]),
            name=_last(names),
            value=_shown(value) + ("" if not unit else unit if unit == "°" else f" {unit}"),
            plus_minus=_off(worth),
            basis="" if worth is None else text_of(f"script.movements.basis_{worth.basis}"),
        )


def _last(names: tuple[str, ...]) -> str:
    return names[-1] if names else ""  # a bare value in a list is a group of its own


def _has_words(name: str) -> bool:
    try:
        field_words(name)
    except KeyError:  # a name that the document's writer gave, such as a layer's
        return False
    return True


def _off(worth: Stated | None) -> str:
    return f"± {worth.plus_minus:g}" if worth is not None and worth.plus_minus else ""


def _shown(value: object) -> str:
    if isinstance(value, bool):
        return text_of("movements.yes" if value else "movements.no")
    return f"{value:.10g}" if isinstance(value, float) else str(value)
