"""Making: what making one disc takes, from its cut plan and what the shop states."""

from layout.making.making import Making
from layout.making.reckoning import making_of

__all__ = ["Making", "making_of"]
