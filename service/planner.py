"""The computation as the service and the command see it: a port, filled by `layout.walk`, by a fake in tests."""

from __future__ import annotations

from collections.abc import Callable
from contextlib import AbstractContextManager
from typing import TYPE_CHECKING, Any, Literal, Protocol, TypeVar

from service.importing import ONE_AT_A_TIME

if TYPE_CHECKING:
    from types import ModuleType

    from layout.check.finding import Finding
    from layout.documents import Cutter, Movement, Settings
    from layout.place.disc import Disc
    from layout.play.plucks import Plucks

Clock = Callable[[], float]  # seconds, only ever forward
Part = Literal["laying-out", "files", "telling"]  # tune to checked discs; these to all files; to what needs no plan


class AnotherDiscError(Exception):
    """A disc was laid out again for its files, and came to another, as a search may that time stopped."""


class Layout(Protocol):
    """A tune laid out on a disc, as far as the service and the command read it themselves."""

    @property
    def title(self) -> str:
        """Of the tune; never empty."""

    @property
    def fingerprint(self) -> str:
        """Sixteen hex digits that name the inputs."""

    @property
    def disc_number(self) -> int:
        """Which disc of its set it is, from 1."""

    @property
    def disc_count(self) -> int:
        """How many discs the tune is cut into."""

    @property
    def good_to_cut(self) -> bool:
        """Whether no error-level finding stands."""

    @property
    def stopped(self) -> str | None:
        """What ended the search for it too early: "time", or a count; None where nothing did."""


class CheckedDrawing(Protocol):
    """What a drawing would play, and what is wrong with it."""

    @property
    def disc(self) -> Disc:
        """The disc that would be cut."""

    @property
    def plucks(self) -> Plucks:
        """When its projections pluck."""

    @property
    def findings(self) -> tuple[Finding, ...]:
        """What is wrong, or near to wrong."""

    @property
    def good_to_cut(self) -> bool:
        """Whether no error-level finding stands."""


LayoutT = TypeVar("LayoutT", bound=Layout)


class Planner(Protocol[LayoutT]):
    """The walk from bytes to files; see `layout.walk` for what each gives and raises."""

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[LayoutT, ...]:
        """The tune laid out and checked, on as many discs as the settings ask for.

        The search keeps to the settings' time limit, or to `most_s` where that is shorter.
        """

    def fingerprint_of(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1
    ) -> str:
        """The id of a layout before it is computed, by the number of its disc, from 1."""

    def files_of(self, laid_out: LayoutT, *, not_good: str | None = None) -> dict[str, bytes]:
        """The files by name, without the cutting files where they are kept back.

        Raises:
            AnotherDiscError: It had to be laid out again, and came to another disc.
        """

    def told_of(self, laid_out: LayoutT, *, not_good: str | None = None) -> dict[str, bytes]:
        """Those of the same files that need no plan of how it is cut.

        Raises:
            AnotherDiscError: As for `files_of`.
        """

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """What the disc of a drawing plays and what is wrong with it."""


AnyPlanner = Planner[Any]  # a planner with layouts of its own kind, which only it looks into


class TheWalk:
    """`layout.walk`, imported when it is first asked for anything: it takes a second, and much is done without it."""

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[Any, ...]:
        """As `layout.walk` does."""
        laid_out: tuple[Any, ...] = _walk().lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)
        return laid_out

    def fingerprint_of(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1
    ) -> str:
        """As `layout.fingerprint` does."""
        from layout.fingerprint import fingerprint_of  # noqa: PLC0415 -- with the documents, which a command may not need

        return fingerprint_of(tune, movement, cutter, settings, number)

    def files_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As `layout.walk` does."""
        files: dict[str, bytes] = _walk().files_of(laid_out, not_good=not_good)
        return files

    def told_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As `layout.walk` does."""
        told: dict[str, bytes] = _walk().told_of(laid_out, not_good=not_good)
        return told

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """As `layout.walk` does."""
        checked: CheckedDrawing = _walk().check_drawing(dxf, movement, cutter)
        return checked


class PlannerAround:
    """Does as another planner does, each part of its work within a context."""

    def __init__(self, planner: AnyPlanner, around: Callable[[Part], AbstractContextManager[object]]) -> None:
        """Wrap a planner.

        Args:
            planner: Does the work.
            around: Gives the context of a part of it.
        """
        self._planner = planner
        self._around = around

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[Any, ...]:
        """As the planner does, within "laying-out"."""
        with self._around("laying-out"):
            return self._planner.lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)

    def fingerprint_of(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1
    ) -> str:
        """As the planner does."""
        return self._planner.fingerprint_of(tune, movement, cutter, settings, number)

    def files_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the planner does, within "files"."""
        with self._around("files"):
            return self._planner.files_of(laid_out, not_good=not_good)

    def told_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the planner does, within "telling"."""
        with self._around("telling"):
            return self._planner.told_of(laid_out, not_good=not_good)

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """As the planner does."""
        return self._planner.check_drawing(dxf, movement, cutter)


def _walk() -> ModuleType:
    with ONE_AT_A_TIME:
        from layout import walk  # noqa: PLC0415 -- as the class says

    return walk
