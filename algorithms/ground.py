"""Ground elevation from a raster, for any points, in bounded memory."""

import numpy as np
from qgis.core import QgsRectangle

from .frame import transformed
from .structure import Grid, elevation

TILE = 512  # cells
KEPT = 200  # tiles in memory, 1 MB each
_TYPES = {1: "u1", 2: "<u2", 3: "<i2", 4: "<u4", 5: "<i4", 6: "<f4", 7: "<f8"}  # Qgis.DataType numbers


class RasterGround:
    """A function of easting and northing (metres in a `Frame`) giving the elevation in metres, bilinear.

    Points are taken to the raster's CRS; the raster itself is never warped. nan outside it and where it has no data.
    """

    def __init__(self, provider, frame, z_metres):
        self.provider = provider
        self.metres = frame.metres
        self.transform = frame.to(provider.crs())
        self.z_metres = z_metres
        self.extent = provider.extent()
        self.size = np.array([provider.xSize(), provider.ySize()])
        self.cell = np.array([self.extent.width(), self.extent.height()]) / self.size
        self.tiles = {}

    def step(self):
        """Half a cell in metres of the frame, near enough for taking slopes."""
        centre = self.extent.center()
        corners = np.array([[centre.x(), centre.y()], [centre.x(), centre.y() + self.cell[1]]])
        back = self.transform
        back = type(back)(back.destinationCrs(), back.sourceCrs(), back.context())
        ends = transformed(back, corners) * self.metres
        return float(np.hypot(*(ends[1] - ends[0])) / 2)

    def __call__(self, x, y):
        x, y = np.broadcast_arrays(x, y)
        native = np.stack([np.ravel(x), np.ravel(y)], axis=1) / self.metres
        place = transformed(self.transform, native)
        cell = (place - [self.extent.xMinimum(), self.extent.yMaximum()]) / (self.cell * [1, -1])
        inside = np.isfinite(cell).all(axis=1) & (cell >= 0).all(axis=1) & (cell <= self.size).all(axis=1)
        z = np.full(len(cell), np.nan)
        tile = np.where(inside[:, None], np.minimum(cell, self.size - 1), -1) // TILE
        for key in np.unique(tile[inside], axis=0).astype(int).tolist():
            mine = inside & (tile == key).all(axis=1)
            z[mine] = elevation(self._tile(*key), place[mine, 0], place[mine, 1])
        return (z * self.z_metres).reshape(x.shape)

    def _tile(self, column, row):
        if (column, row) not in self.tiles:
            if len(self.tiles) >= KEPT:
                self.tiles.pop(next(iter(self.tiles)))
            self.tiles[column, row] = self._read(column * TILE, row * TILE)
        return self.tiles[column, row]

    def _read(self, column, row):
        """The grid of one tile with a margin of a cell on every side, so that any point in it can be interpolated.

        Along the raster's border the outermost cells are repeated: their outer half has no neighbour to go by.
        """
        first = np.maximum([column - 1, row - 1], 0)
        last = np.minimum([column + TILE + 1, row + TILE + 1], self.size)
        width, height = (last - first).tolist()
        west, north = self.extent.xMinimum(), self.extent.yMaximum()
        window = QgsRectangle(
            west + first[0] * self.cell[0],
            north - last[1] * self.cell[1],
            west + last[0] * self.cell[0],
            north - first[1] * self.cell[1],
        )
        z = _values(self.provider.block(1, window, width, height), width, height)
        border = [(int(first[1] == 0), int(last[1] == self.size[1])), (int(first[0] == 0), int(last[0] == self.size[0]))]
        return Grid(
            np.pad(z, border, mode="edge"),
            west + (first[0] + 0.5 - border[1][0]) * self.cell[0],
            north - (first[1] + 0.5 - border[0][0]) * self.cell[1],
            *self.cell,
        )


def _values(block, width, height):
    """Values of a raster block as floats, nan for no data."""
    kind = int(getattr(block.dataType(), "value", block.dataType()))
    z = np.frombuffer(bytes(block.data()), _TYPES[kind]).reshape(height, width).astype("f4" if kind < 7 else "f8")
    if block.hasNoDataValue():
        z[z == np.asarray(block.noDataValue(), z.dtype)] = np.nan
    return z
