"""Cut: from the disc to what the cutting shop gets, two drawings and the order of cutting."""

from layout.cut.plan import CutPlan
from layout.cut.planning import plan_cuts

__all__ = ["CutPlan", "plan_cuts"]
