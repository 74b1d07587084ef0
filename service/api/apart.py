"""A planner that computes in children of this process, in turn.

While a child computes, this process gives what is at hand, and neither waits for the other's interpreter. What a tune
does to a child, such as filling its memory or crashing a library, it does to that child alone.
"""

import itertools
import logging
import math
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import TypeVar

from layout.documents import Cutter, Movement, Settings
from service.api.computing_queue import ComputingQueue
from service.api.problems import ProblemError
from service.children.child_process import ChildEndedError, ChildTooLongError
from service.computing.children import MOST_CHILDREN, Children, ComputingChild, NoChildError, least_computed
from service.computing.messages import Answer, Asked, DiscTold, Kind, Want, Work
from service.planner import AnotherDiscError, Clock, TheWalk
from service.settings import ServiceSettings

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
        files: All its files where time stopped the search, which another search need not come to; else none.
    """

    told: DiscTold
    work: Work
    name: str
    child: ComputingChild
    files: Mapping[str, bytes]

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


class PlannedApart(TheWalk):
    """The walk, whose long parts are done in children. They take turns among themselves, whatever is computed here."""

    def __init__(self, children: Children, *, within_s: float) -> None:
        """Have none started yet.

        Args:
            children: They compute.
            within_s: Seconds that a piece of work may take, tried again or not.
        """
        self._children = children
        self._queue = ComputingQueue(most_at_a_time=MOST_CHILDREN)  # so that nobody holds a turn and waits for a child
        self._within_s = within_s
        self._names = map(str, itertools.count())

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

        asked = Asked(want=Want.DISCS, work=work, name=name)

        def disc(told: DiscTold, child: ComputingChild, last_s: float) -> DiscApart:
            files: Mapping[str, bytes] = {}
            if told.stopped == "time":
                asked_more = replace(asked, want=Want.FILES, disc_number=told.disc_number)
                files = self._answer(asked_more, child, last_s).files
            return DiscApart(told=told, work=work, name=name, child=child, files=files)

        def discs(child: ComputingChild, last_s: float) -> tuple[DiscApart, ...]:
            return tuple(disc(told, child, last_s) for told in self._answer(asked, child, last_s).discs)

        return self._with_child(None, discs)

    def files_of(self, laid_out: DiscApart, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the walk does; laid out again where no child has the disc at hand.

        Raises:
            AnotherDiscError: It was laid out again, and came to another disc.
            ProblemError: It takes more than it may, or no child could be started.
        """
        if laid_out.files and (not_good is None or laid_out.good_to_cut):
            return dict(laid_out.files)
        return self._of_disc(Want.FILES, laid_out, not_good)

    def told_of(self, laid_out: DiscApart, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the walk does, and as `files_of`.

        Raises:
            AnotherDiscError, ProblemError: As `files_of`.
        """
        if not_good is None or laid_out.good_to_cut:
            return dict(laid_out.told.told)
        return self._of_disc(Want.TOLD, laid_out, not_good)

    def _of_disc(self, want: Want, laid_out: DiscApart, not_good: str | None) -> dict[str, bytes]:
        asked = Asked(
            want=want,
            work=laid_out.work,
            name=laid_out.name,
            disc_number=laid_out.disc_number,
            not_good=not_good,
        )
        answer = self._with_child(laid_out.child, lambda child, last_s: self._answer(asked, child, last_s))
        if any(again.told["layout.json"] != laid_out.told.told["layout.json"] for again in answer.discs):
            raise AnotherDiscError(laid_out.fingerprint)
        return dict(answer.files)

    def _with_child(
        self, preferred: ComputingChild | None, work: Callable[[ComputingChild, float], ResultT]
    ) -> ResultT:
        """What work with a child comes to, in turn; done again with another where the child ends.

        Args:
            preferred: The child that is taken where it is idle.
            work: Is told the child, and till when by the monotonic clock it may take.

        Raises:
            LayoutError, ProblemError: As `lay_out_discs`.
        """
        how_ended, last_s = "", math.inf
        for _ in range(ATTEMPTS):
            try:
                with self._queue.admitted() as measure_by:
                    last_s = min(last_s, time.monotonic() + self._within_s)  # waiting for the first turn takes nothing
                    measure_by(least_computed())  # while one is started
                    with self._children.one(preferred) as child:
                        measure_by(child.stopwatch())
                        return work(child, last_s)
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

    def _answer(self, asked: Asked, child: ComputingChild, last_s: float) -> Answer:
        """What a child answers, where it is an answer.

        Raises:
            ChildEndedError, ChildTooLongError: As the child does.
            LayoutError: The computation refused.
            ProblemError: It takes more memory than it may.
            ComputingFailedError: The program itself is at fault.
        """
        answer = child.ask(asked, last_s - time.monotonic())
        match answer.kind:
            case Kind.TOO_LARGE:
                raise _too_much(f"takes more than {self._children.setup.memory_mib} MiB of memory")
            case Kind.FAILED:
                raise ComputingFailedError(answer.trace)
        if answer.error is not None:
            raise answer.error
        return answer


def within_s(settings: ServiceSettings) -> float:
    """Seconds that one piece of work may take: as an order may, and at least the longest search and what follows."""
    return max(settings.work.plan_within_s, settings.limits.search_s + settings.limits.after_search_s)


def _too_much(why: str) -> ProblemError:
    return ProblemError(
        name="too-much-to-compute", detail=f"laying this tune out {why}; shorten it, or split it over more discs"
    )
