"""The computation as the service and the command see it: a port, filled by `layout.walk`, by a fake in tests."""

from collections.abc import Callable
from typing import Any, Protocol, TypeVar

from layout.check.finding import Finding
from layout.documents import Cutter, Movement, Settings
from layout.place.disc import Disc
from layout.play.plucks import Plucks
from layout.read.score import Score

Clock = Callable[[], float]  # seconds, only ever forward


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
    def score(self) -> Score:
        """The notes read, with what was odd about the file."""

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
        """The files by name, without the cutting files where they are kept back."""

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """What the disc of a drawing plays and what is wrong with it."""


AnyPlanner = Planner[Any]  # a planner with layouts of its own kind, which only it looks into
