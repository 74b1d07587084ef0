"""From a projection's flat frame to the disc: where the points of each projection lie."""

import numpy as np

from layout.mechanics.arrays import FloatArray


def on_disc_mm(points_mm: FloatArray, radius_mm: FloatArray, angle_rad: FloatArray, direction: int) -> FloatArray:
    """Disc coordinates of flat-frame points, for many projections at once.

    A point (u, v) of the frame at (r, α) lies at (r + v) along the radius and u along the
    tangent in the direction of travel: −s times the anticlockwise tangent.

    Args:
        points_mm: Shape (k, 2). u, v.
        radius_mm: Shape (n,). Track radius of each projection.
        angle_rad: Shape (n,). Working-edge angle α of each projection.
        direction: s, +1 for a clockwise disc, −1 for an anticlockwise one.

    Returns:
        Shape (n, k, 2). x, y seen from the label side; (0, k, 2) for no projections.
    """
    cos, sin = np.cos(angle_rad)[:, None], np.sin(angle_rad)[:, None]
    along = radius_mm[:, None] + points_mm[None, :, 1]
    ahead = direction * points_mm[None, :, 0]
    return np.stack([along * cos + ahead * sin, along * sin - ahead * cos], axis=-1)
