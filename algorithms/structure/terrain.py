"""Elevation of the ground from a grid, and its gradient."""

from typing import NamedTuple

import numpy as np


class Grid(NamedTuple):
    """Elevations at cell centres.

    `z` ``(rows, columns)`` in metres, first row northernmost, nan for no data; `west`, `north` are the centre of
    the first cell; `step_x`, `step_y` the cell size, all positive and in the units of the x and y asked for.
    """

    z: np.ndarray
    west: float
    north: float
    step_x: float
    step_y: float


def _cell(grid, x, y):
    """Row and column of the cell's upper left corner, and the position inside it, 0-1 each; nan outside."""
    rows, columns = grid.z.shape
    column = (np.asarray(x, float) - grid.west) / grid.step_x
    row = (grid.north - np.asarray(y, float)) / grid.step_y
    inside = (column >= 0) & (column <= columns - 1) & (row >= 0) & (row <= rows - 1)
    c = np.clip(np.where(inside, column, 0).astype(int), 0, max(columns - 2, 0))
    r = np.clip(np.where(inside, row, 0).astype(int), 0, max(rows - 2, 0))
    return r, c, np.where(inside, row - r, np.nan), np.where(inside, column - c, np.nan)


def _corners(grid, r, c):
    down, right = np.minimum(r + 1, grid.z.shape[0] - 1), np.minimum(c + 1, grid.z.shape[1] - 1)
    return grid.z[r, c], grid.z[r, right], grid.z[down, c], grid.z[down, right]


def elevation(grid, x, y):
    """Ground elevation by bilinear interpolation; nan outside the grid or beside a cell without data."""
    r, c, v, u = _cell(grid, x, y)
    nw, ne, sw, se = _corners(grid, r, c)
    return (1 - v) * ((1 - u) * nw + u * ne) + v * ((1 - u) * sw + u * se)


def gradient(ground, x, y, step):
    """Rise per metre eastward and northward ``(n, 2)`` of any ground function, by central differences.

    `ground` gives the elevation at eastings and northings, `step` is half the distance compared, in metres. Unknown
    ground (nan) counts as level.
    """
    east = (ground(x + step, y) - ground(x - step, y)) / (2 * step)
    north = (ground(x, y + step) - ground(x, y - step)) / (2 * step)
    return np.nan_to_num(np.stack([east, north], axis=-1))
