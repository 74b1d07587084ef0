"""What the page of a disc is made from, wherever the disc comes from: a layout, an order, a proof."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from layout.documents import Cutter, Movement
from layout.file_names import CUTTING_FILES, files_for

Record = Mapping[str, Any]  # JSON, as layout.write says it


@dataclass(frozen=True, slots=True, kw_only=True)
class ShownDisc:
    """A disc to be shown.

    Attributes:
        layout: Its layout.json.
        report: Its report.json.
        movement: The movement it is for.
        cutter: The machine that cuts it.
        files: The address of each file that can be had, by name; a picture among them is shown where no script runs.
        hearing: Where its sound is, "disc" as it plays and "written" as the tune is written; empty where there is none.
        turning_table: Where the disc stands through the sound: (seconds, degrees turned), rising; () for the sound of
            a steady turn.
        despite_findings: For which reason its cutting files are given although an error stands; None where none is.
        asks_reason: Whether this page may be asked again with such a reason.
        rulings_at: Where rulings by hand are sent; None where this disc takes none.
    """

    layout: Record
    report: Record
    movement: Movement
    cutter: Cutter
    files: Mapping[str, str]
    hearing: Mapping[str, str]
    turning_table: tuple[tuple[float, float], ...] = ()
    despite_findings: str | None = None
    asks_reason: bool = False
    rulings_at: str | None = None

    @property
    def kept_back(self) -> tuple[str, ...]:
        """The names of the cutting files that are not given because an error stands."""
        if self.layout["good_to_cut"]:
            return ()
        return tuple(name for name in files_for(self.cutter) if name in CUTTING_FILES and name not in self.files)
