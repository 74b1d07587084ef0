"""The arrange stage: which notes are plucked on which tracks, and why the others are not."""

from layout.arrange.arrangement import Arrangement
from layout.arrange.arranging import Clock, arrange, arrange_discs

__all__ = ["Arrangement", "Clock", "arrange", "arrange_discs"]
