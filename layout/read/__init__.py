"""The read stage: MIDI bytes to Score."""

from layout.read.reader import read_score
from layout.read.score import Score

__all__ = ["Score", "read_score"]
