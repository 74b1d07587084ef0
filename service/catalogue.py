"""Movements and cutters as the command and the service list them."""

from typing import Any

from layout.documents import Cutter, Movement, shipped_cutter_ids

FULL_TURN_DEG = 360.0


def movement_told(movement: Movement) -> dict[str, Any]:
    """One line of the list of movements; `free_turn_s` is the music one turn has room for."""
    free_deg = FULL_TURN_DEG - movement.before_music_deg - movement.after_music_deg
    return {
        "id": movement.id,
        "title": movement.title,
        "revision": movement.revision,
        "turns": movement.turns,
        "revolution_s": movement.revolution_s,
        "free_turn_s": movement.revolution_s * free_deg / FULL_TURN_DEG,
        "track_count": len(movement.tracks),
        "outer_diameter_mm": movement.disc.outer_diameter_mm,
        "thickness_mm": movement.disc.thickness_mm,
        "material": movement.disc.material,
        "projection": movement.projection.kind,
    }


def cutter_told(cutter: Cutter) -> dict[str, Any]:
    """One line of the list of cutters."""
    return {
        "id": cutter.id,
        "title": cutter.title,
        "kind": cutter.kind,
        "drawn_from": cutter.drawn_from,
        "kerf_mm": cutter.kerf_mm,
        "min_web_mm": cutter.min_web_mm,
        "is_default": cutter.id == shipped_cutter_ids()[0],
    }


def document_told(document: Movement | Cutter) -> dict[str, Any]:
    """A document, resolved, as it can be read again: plain numbers, every track listed, nothing unstated."""
    return document.model_dump(mode="json", exclude_none=True)
