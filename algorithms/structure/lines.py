"""Small questions about lines, asked of whole arrays at once. Lines are shapely LineStrings in metres."""

import numpy as np
import shapely


def explode(geometries):
    """Single LineStrings of lines and multi-lines, and the row that each came from.

    Repeated points are removed; parts of no length (and missing or other geometries) are left out.
    """
    parts, rows = shapely.get_parts(np.asarray(geometries, object), return_index=True)
    parts = shapely.remove_repeated_points(parts)
    real = (shapely.get_type_id(parts) == 1) & (shapely.length(parts) > 0)
    return parts[real], rows[real]


def xy(points):
    """Coordinates ``(n, 2)`` of an array of points, nan for an empty or missing one."""
    return np.stack([shapely.get_x(points), shapely.get_y(points)], axis=-1)


def end_points(lines):
    """First and last point of each line, an ``(n, 2)`` array of shapely points."""
    return np.stack([shapely.get_point(lines, 0), shapely.get_point(lines, -1)], axis=-1)


def along(lines, stations):
    """Coordinates ``(n, k, 2)`` of points at distances ``(n, k)`` along each line (clipped to the line)."""
    stations = np.clip(stations, 0, shapely.length(lines)[:, None])
    return xy(shapely.line_interpolate_point(lines[:, None], stations))


def tangent(lines, stations, reach):
    """Unit direction ``(n, k, 2)`` of each line at distances along it, over a chord of +-`reach` metres."""
    chord = along(lines, stations + reach) - along(lines, stations - reach)
    length = np.hypot(chord[..., 0], chord[..., 1])[..., None]
    return np.divide(chord, length, out=np.zeros_like(chord), where=length > 0)


def offset_right(lines, points, reach):
    """Signed distance ``(n, k)`` of points ``(n, k, 2)`` from each line, positive to the right of its direction.

    Beyond an end of the line the side is that of the line prolonged.
    """
    stations = shapely.line_locate_point(lines[:, None], shapely.points(points))
    away = points - along(lines, stations)
    way = tangent(lines, stations, reach)
    side = way[..., 1] * away[..., 0] - way[..., 0] * away[..., 1]
    return np.where(side < 0, -1.0, 1.0) * np.hypot(away[..., 0], away[..., 1])


def nearest_point(geometries, points):
    """The point of each geometry nearest to each point, coordinates ``(n, 2)``; nan where there is none."""
    return xy(shapely.get_point(shapely.shortest_line(geometries, points), 0))


def azimuth_of(vectors):
    """Azimuth 0-360 of horizontal vectors ``(..., 2)``."""
    return np.degrees(np.arctan2(vectors[..., 0], vectors[..., 1])) % 360.0
