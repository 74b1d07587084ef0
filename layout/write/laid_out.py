"""Everything known of one layout: what the walk gives and the writers tell."""

from dataclasses import dataclass

from layout.arrange.arrangement import Arrangement, Stopped
from layout.check.finding import Finding, stands
from layout.place.disc import Disc
from layout.play.plucks import Plucks
from layout.read.score import Score
from layout.report.report import Report

NOT_GOOD = "NOT GOOD TO CUT"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LaidOut:
    """A tune laid out on a disc.

    Attributes:
        title: Of the tune: the settings', else the score's, else "untitled tune".
        fingerprint: Sixteen hex digits of the inputs' SHA-256; the same inputs give the same.
        score: The notes read.
        arrangement: Which of them the disc plays.
        disc: Where its projections are; projection i is pluck i of the arrangement.
        plucks: When they sound; pluck i is projection i.
        findings: What is wrong or near to wrong.
        report: What the disc keeps of the tune, and what that cost.
        disc_number: Which disc of its set it is, from 1.
        disc_count: How many discs the tune is cut into; 1 for one alone.
        order_number: The shop's, as the settings state it; None for none.
    """

    title: str
    fingerprint: str
    score: Score
    arrangement: Arrangement
    disc: Disc
    plucks: Plucks
    findings: tuple[Finding, ...]
    report: Report
    disc_number: int = 1
    disc_count: int = 1
    order_number: str | None = None

    @property
    def good_to_cut(self) -> bool:
        """Whether no error-level finding stands."""
        return not stands(self.findings)

    @property
    def stopped(self) -> Stopped | None:
        """What ended the search for the arrangement too early, if anything did."""
        return self.arrangement.worth.stopped

    @property
    def part(self) -> str:
        """Which disc of a set it is, in words such as "disc 2 of 3"; "" for one alone."""
        return "" if self.disc_count == 1 else f"disc {self.disc_number} of {self.disc_count}"
