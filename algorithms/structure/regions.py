"""The region of the map that holds the tip of a slip vector."""

import numpy as np

VERTICES = 64
SMALLEST_m = 0.01  # metres: semi-axis given to a direction without any spread, so that the outline has an area


def ellipse(east, north, level):
    """Outline ``(s, v, 2)`` of the ellipse that holds a share `level` of the points ``(s, j)``.

    Its shape is the covariance of the points, taken a second time without the outermost 1 - `level` of them, since tips
    of nearly parallel cutoffs have long tails; its size is the smallest that holds the share.
    """
    points = np.stack([east, north], axis=1)
    centre, spread = _moments(points, np.ones(east.shape))
    inner = _rank_cut(_distance(points, centre, spread), level)
    centre, spread = _moments(points, inner)
    distance = _distance(points, centre, spread)
    rank = min(int(np.ceil(level * east.shape[1])), east.shape[1]) - 1
    size = np.sqrt(np.partition(distance, rank, axis=1)[:, rank])
    values, vectors = np.linalg.eigh(np.nan_to_num(spread))
    axes = vectors * np.sqrt(values)[:, None, :] * size[:, None, None]
    turn = np.linspace(0, 2 * np.pi, VERTICES, endpoint=False)
    circle = np.stack([np.cos(turn), np.sin(turn)])
    return centre[:, None, :] + np.einsum("sij,jv->svi", axes, circle)


def _moments(points, weight):
    """Mean ``(s, 2)`` and covariance ``(s, 2, 2)`` of weighted points ``(s, 2, j)``."""
    total = weight.sum(axis=1)[:, None]
    mean = np.einsum("sij,sj->si", points, weight) / total
    away = points - mean[..., None]
    return mean, np.einsum("sij,skj,sj->sik", away, away, weight) / total[..., None] + np.eye(2) * SMALLEST_m**2


def _distance(points, centre, spread):
    """Squared Mahalanobis distance ``(s, j)``."""
    x, y = points[:, 0] - centre[:, :1], points[:, 1] - centre[:, 1:]
    a, b, d = spread[:, 0, 0, None], spread[:, 0, 1, None], spread[:, 1, 1, None]
    return (d * x * x - 2 * b * x * y + a * y * y) / (a * d - b * b)


def _rank_cut(distance, level):
    """1.0 for the share `level` of nearest points, 0.0 for the others."""
    rank = min(int(np.ceil(level * distance.shape[1])), distance.shape[1]) - 1
    return (distance <= np.partition(distance, rank, axis=1)[:, rank, None]).astype(float)
