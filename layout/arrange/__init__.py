"""The arrange stage: which notes are plucked on which tracks, and why the others are not."""

from layout.arrange.arrangement import Arrangement
from layout.arrange.arranging import arrange

__all__ = ["Arrangement", "arrange"]
