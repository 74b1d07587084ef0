"""A planner that computes in children of this process, in turn.

While a child computes, this process gives what is at hand, and neither waits for the other's interpreter. What a tune
does to a child, such as filling its memory or crashing a library, it does to that child alone.
"""

import itertools
import logging
from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeVar

from layout.documents import Cutter, Movement, Settings
from service.api.computing_queue import ComputingQueue
from service.api.problems import ProblemError
from service.children.child_process import ChildEndedError, ChildTooLongError
from service.computing.children import Children, ComputingChild, NoChildError
from service.computing.messages import Answer, Asked, DiscTold, Kind, Want, Work
from service.planner import AnotherDiscError, CheckedDrawing, Clock, TheWalk

ATTEMPTS = 2  # that end a child before its work is refused: the first may have been ended by something else
COME_AGAIN_S = 5  # s; where no child could be started
ResultT = TypeVar("ResultT")

log = logging.getLogger("discwright")


class ComputingFailedError(Exception):
    """The computation met a fault of the program itself; the text is its trace."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DiscApart:
    """A disc that a child has laid out, and may have at hand.

    Attributes:
        told: What is known of it.
        work: What it was made from.
        name: Of its set, in the child.
        child: Who laid it out.
    """

    told: DiscTold
    work: Work
    name: str
    child: ComputingChild

    @property
    def title(self) -> str:
        """Of the tune."""
        return self.told.title

    @property
    def fingerprint(self) -> str:
        """Names the inputs."""
        return self.told.fingerprint

    @property
    def disc_number(self) -> int:
        """Which disc of its set it is, from 1."""
        return self.told.disc_number

    @property
    def disc_count(self) -> int:
        """How many discs the tune is cut into."""
        return self.told.disc_count

    @property
    def good_to_cut(self) -> bool:
        """Whether no error-level finding stands."""
        return self.told.good_to_cut

    @property
    def stopped(self) -> str | None:
        """What ended the search too early, or None."""
        return self.told.stopped


class PlannedApart:
    """The walk, in children."""

    def __init__(self, children: Children, queue: ComputingQueue, within_s: float) -> None:
        """Have none started yet.

        Args:
            children: They compute.
            queue: Where turns are waited for.
            within_s: Seconds that a piece of work may take.
        """
        self._children = children
        self._queue = queue
        self._within_s = within_s
        self._names = map(str, itertools.count())
        self._here = TheWalk()

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[DiscApart, ...]:
        """As the walk does; by a clock of the child's own, where there is one.

        Raises:
            LayoutError: As the walk does.
            ProblemError: It takes more than it may, or no child could be started.
        """
        work = Work(
            tune=tune, movement=movement, cutter=cutter, settings=settings, is_timed=clock is not None, most_s=most_s
        )
        name = next(self._names)

        def discs(answer: Answer, child: ComputingChild) -> tuple[DiscApart, ...]:
            return tuple(DiscApart(told=told, work=work, name=name, child=child) for told in answer.discs)

        return self._ask(Asked(want=Want.DISCS, work=work, name=name), None, discs)

    def fingerprint_of(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1
    ) -> str:
        """As the walk does, here."""
        return self._here.fingerprint_of(tune, movement, cutter, settings, number)

    def files_of(self, laid_out: DiscApart, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the walk does; laid out again where no child has the disc at hand.

        Raises:
            AnotherDiscError: It was laid out again, and came to another disc.
            ProblemError: It takes more than it may, or no child could be started.
        """
        if laid_out.told.files and (not_good is None or laid_out.good_to_cut):
            return dict(laid_out.told.files)
        return self._of_disc(Want.FILES, laid_out, not_good)

    def told_of(self, laid_out: DiscApart, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the walk does, and as `files_of`.

        Raises:
            AnotherDiscError, ProblemError: As `files_of`.
        """
        if not_good is None or laid_out.good_to_cut:
            return dict(laid_out.told.told)
        return self._of_disc(Want.TOLD, laid_out, not_good)

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """As the walk does, here: nobody asks the service for it."""
        return self._here.check_drawing(dxf, movement, cutter)

    def _of_disc(self, want: Want, laid_out: DiscApart, not_good: str | None) -> dict[str, bytes]:
        asked = Asked(
            want=want,
            work=laid_out.work,
            name=laid_out.name,
            disc_number=laid_out.disc_number,
            not_good=not_good,
        )
        answer = self._ask(asked, laid_out.child, lambda answer, _: answer)
        if any(again.told["layout.json"] != laid_out.told.told["layout.json"] for again in answer.discs):
            raise AnotherDiscError(laid_out.fingerprint)
        return dict(answer.files)

    def _ask(
        self, asked: Asked, preferred: ComputingChild | None, result: Callable[[Answer, ComputingChild], ResultT]
    ) -> ResultT:
        """What a child answers, tried again where one ends.

        Raises:
            LayoutError, ProblemError: As `lay_out_discs`.
        """
        how_ended = ""
        for _ in range(ATTEMPTS):
            try:
                with self._queue.admitted() as measure_by:
                    measure_by(_nothing_computed)  # while one is started; it holds up who would have to start another
                    with self._children.one(preferred) as child:
                        measure_by(child.stopwatch())
                        return result(self._seen_to(child.ask(asked, self._within_s)), child)
            except NoChildError as fault:
                detail = f"no process could be started that computes ({fault})"
                headers = {"Retry-After": str(COME_AGAIN_S)}
                raise ProblemError(name="service-busy", detail=detail, headers=headers) from fault
            except ChildTooLongError:
                raise _too_much(f"takes longer than {self._within_s:g} s") from None
            except ChildEndedError as fault:
                how_ended = str(fault)
                log.warning("computing ended: %s", fault)
        raise _too_much(f"ended {ATTEMPTS} processes that tried; of the last, {how_ended}")

    def _seen_to(self, answer: Answer) -> Answer:
        """The answer, where it is one.

        Raises:
            LayoutError: The computation refused.
            ProblemError: It takes more memory than it may.
            ComputingFailedError: The program itself is at fault.
        """
        match answer.kind:
            case Kind.TOO_LARGE:
                raise _too_much(f"takes more than {self._children.setup.memory_mib} MiB of memory")
            case Kind.FAILED:
                raise ComputingFailedError(answer.trace)
        if answer.error is not None:
            raise answer.error
        return answer


def _nothing_computed() -> float:
    return 0.0


def _too_much(why: str) -> ProblemError:
    return ProblemError(
        name="too-much-to-compute", detail=f"laying this tune out {why}; shorten it, or split it over more discs"
    )
