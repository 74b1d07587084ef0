"""Trial: a small piece of a movement's sheet, with steps to measure, before a blank is spent."""

from layout.trial.piece import TrialPiece
from layout.trial.trying import trial_piece

__all__ = ["TrialPiece", "trial_piece"]
