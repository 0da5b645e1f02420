"""The plane in which a map is computed: metres, east and north of one grid; and the way back to the map's own CRS."""

import struct

import numpy as np
from qgis.core import (
    QgsCoordinateReferenceSystem,
    QgsCoordinateTransform,
    QgsCsException,
    QgsLineString,
    QgsProcessingException,
    QgsUnitTypes,
)

LATITUDE_STEP = 1e-4  # degrees; long enough for double precision, short enough for any grid


def transformed(transform, xy):
    """Points ``(n, 2)`` put through a QgsCoordinateTransform in one go; nan where one has no image."""
    if not len(xy):
        return np.zeros((0, 2))
    line = QgsLineString(xy[:, 0].tolist(), xy[:, 1].tolist())
    try:
        line.transform(transform)
    except QgsCsException as error:
        raise QgsProcessingException(f"Coordinates cannot be transformed: {error}") from error
    start = struct.calcsize("<BII")
    moved = np.frombuffer(bytes(line.asWkb()), "<f8", offset=start).reshape(-1, 2)
    return np.where(np.isfinite(moved), moved, np.nan)


class Frame:
    """A metric grid for computing: the fault layer's own, or a local transverse Mercator where that is in degrees.

    `crs` is what features are read in, `metres` the length of its unit, `z_metres` that of the elevations' unit,
    `map_crs` the CRS of the results.
    """

    def __init__(self, crs, centre, context, label, z_metres=1.0):
        """`centre` (x, y) of the map in its own CRS. Raises QgsProcessingException for a layer without a CRS."""
        if not crs.isValid():
            raise QgsProcessingException(
                f"Layer '{label}' has no coordinate reference system: set it in the layer's properties and run again."
            )
        self.map_crs = crs
        self.z_metres = z_metres
        self.transform_context = context.transformContext()
        self.crs = _local_crs(crs, centre) if crs.isGeographic() else crs
        self.metres = QgsUnitTypes.fromUnitToUnitFactor(self.crs.mapUnits(), QgsUnitTypes.DistanceUnit.DistanceMeters)

    def to(self, crs):
        """Transform from this frame's CRS to another."""
        return QgsCoordinateTransform(self.crs, crs, self.transform_context)

    def to_map(self, xy):
        """Metres ``(n, 2)`` to coordinates of the results' CRS."""
        native = np.asarray(xy, float) / self.metres
        return transformed(self.to(self.map_crs), native) if self.crs != self.map_crs else native

    def true_north(self, xy):
        """Grid azimuth ``(n,)`` of true north at points ``(n, 2)`` in metres: minus the meridian convergence.

        By a short step along the meridian, through the CRS's own geographic coordinates.
        """
        degrees = self._geographic()
        there = self.to(degrees)
        back = QgsCoordinateTransform(degrees, self.crs, self.transform_context)
        native = np.asarray(xy, float) / self.metres
        position = transformed(there, native)
        ahead = transformed(back, position + [0.0, LATITUDE_STEP])
        behind = transformed(back, position - [0.0, LATITUDE_STEP])
        step = ahead - behind
        return np.degrees(np.arctan2(step[:, 0], step[:, 1]))

    def _geographic(self):
        if hasattr(self.crs, "toGeographicCrs"):
            return self.crs.toGeographicCrs()
        return QgsCoordinateReferenceSystem("EPSG:4326")


def _local_crs(crs, centre):
    """A transverse Mercator projection of the same datum, its origin in the middle of the map."""
    datum = " ".join(part for part in crs.toProj().split() if not part.startswith(("+proj=", "+no_defs", "+type")))
    return QgsCoordinateReferenceSystem.fromProj(
        f"+proj=tmerc +lat_0={centre[1]:.6f} +lon_0={centre[0]:.6f} +k=1 +x_0=0 +y_0=0 {datum} +units=m +no_defs"
    )
