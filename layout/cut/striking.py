"""The order in which a press strikes."""

import numpy as np

from layout.mechanics.arrays import IntArray, frozen_ints
from layout.place.disc import Disc


def hit_order(disc: Disc) -> IntArray:
    """Shape (n,). Projection indices in the order of the hits: by track from the innermost, then by angle."""
    return frozen_ints(np.lexsort((disc.edge_angle_rad, disc.track_index)))
