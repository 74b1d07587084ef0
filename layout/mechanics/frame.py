"""From a projection's flat frame to the disc: where the points of each projection lie."""

import numpy as np

from layout.mechanics.arrays import FloatArray


def on_disc_mm(
    points_mm: FloatArray,
    radius_mm: FloatArray,
    angle_rad: FloatArray,
    direction: int,
    square_at_mm: float = 0.0,
) -> FloatArray:
    """Disc coordinates of flat-frame points, for many projections at once.

    The frame is square to the radius through its point u = w, v = 0, and its origin, the working edge,
    lies at (r, α). For w = 0 a point (u, v) lies at (r + v) along the radius and u along the tangent in
    the direction of travel: −s times the anticlockwise tangent. Else the frame stands at (R, θ) with
    R² = r² − w² and θ = α − s·asin(w/r), which leaves the origin where it is: a press stands its tool
    square to the slide at the strike point, wherever the working edge is on the tool.

    Args:
        points_mm: Shape (k, 2). u, v.
        radius_mm: Shape (n,). Track radius of each projection.
        angle_rad: Shape (n,). Working-edge angle α of each projection.
        direction: s, +1 for a clockwise disc, −1 for an anticlockwise one.
        square_at_mm: w. Radii within it stand at the centre.

    Returns:
        Shape (n, k, 2). x, y seen from the label side; (0, k, 2) for no projections.
    """
    stands_mm, cos, sin = radius_mm, np.cos(angle_rad), np.sin(angle_rad)
    if square_at_mm:
        stands_mm = np.sqrt(np.maximum(radius_mm**2 - square_at_mm**2, 0.0))
        # By the sine and cosine of asin(w/r) themselves: roots and quotients are the same on every processor.
        turn_cos, turn_sin = stands_mm / radius_mm, direction * square_at_mm / radius_mm
        cos, sin = cos * turn_cos + sin * turn_sin, sin * turn_cos - cos * turn_sin
    cos, sin = cos[:, None], sin[:, None]
    along = stands_mm[:, None] + points_mm[None, :, 1]
    ahead = direction * (points_mm[None, :, 0] - square_at_mm)
    return np.stack([along * cos + ahead * sin, along * sin - ahead * cos], axis=-1)
