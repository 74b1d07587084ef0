"""The computation as the service and the command see it: a port, filled by `layout.walk`, by a fake in tests."""

from typing import Any, Protocol, TypeVar

from layout.check.finding import Finding
from layout.documents import Cutter, Movement, Settings
from layout.place.disc import Disc
from layout.play.plucks import Plucks
from layout.read.score import Score


class Layout(Protocol):
    """A tune laid out on a disc, as far as the service and the command read it themselves."""

    @property
    def title(self) -> str:
        """Of the tune; never empty."""

    @property
    def fingerprint(self) -> str:
        """Sixteen hex digits that name the inputs."""

    @property
    def score(self) -> Score:
        """The notes read, with what was odd about the file."""

    @property
    def good_to_cut(self) -> bool:
        """Whether no error-level finding stands."""


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

    def lay_out(self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings) -> LayoutT:
        """The tune laid out and checked."""

    def fingerprint_of(self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings) -> str:
        """The id of a layout before it is computed."""

    def files_of(self, laid_out: LayoutT, *, not_good: str | None = None) -> dict[str, bytes]:
        """The files by name, without the cutting files where they are kept back."""

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """What the disc of a drawing plays and what is wrong with it."""


AnyPlanner = Planner[Any]  # a planner with layouts of its own kind, which only it looks into
