"""What a person writes: movement, cutter and settings documents, and the ones that ship."""

from layout.documents.cutter import Cutter, read_cutter
from layout.documents.movement import Movement, read_movement
from layout.documents.settings import Settings, read_settings
from layout.documents.shipped import (
    shipped_cutter,
    shipped_cutter_ids,
    shipped_movement,
    shipped_movement_ids,
    shipped_text,
)

__all__ = [
    "Cutter",
    "Movement",
    "Settings",
    "read_cutter",
    "read_movement",
    "read_settings",
    "shipped_cutter",
    "shipped_cutter_ids",
    "shipped_movement",
    "shipped_movement_ids",
    "shipped_text",
]
