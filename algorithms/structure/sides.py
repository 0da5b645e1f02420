"""Which side of a fault trace is the hanging wall."""

import numpy as np
import shapely

from .attitudes import dot
from .lines import along, tangent

STATIONS = 32
CLEAR = 0.2  # share of the stations' weight by which one side must prevail


def hanging_wall_right(lines, fault_poles, reach, ground):
    """Whether the hanging wall lies to the right of each trace, as one property of the whole trace.

    A trace that Vs across topography can run in any direction locally, so the ground on both sides is compared with
    the fault plane at many stations: the side that lies above the plane is the hanging wall. On flat ground this
    reduces to the trace's overall direction against the dip azimuth.

    Parameters: traces ``(t,)``; poles ``(t, 3)`` into the hanging wall; `reach` metres to step off the trace;
    `ground` a function of easting and northing giving elevation (nan: unknown, taken as level).
    Returns score ``(t,)``, -1 to 1: positive right, negative left; between -0.2 and 0.2 it is ambiguous.
    """
    stations = (np.arange(STATIONS) + 0.5) / STATIONS * shapely.length(lines)[:, None]
    way = tangent(lines, stations, reach)
    right = np.stack([way[..., 1], -way[..., 0]], axis=-1) * reach
    middle = along(lines, stations)
    rise = _elevations(ground, middle + right) - _elevations(ground, middle - right)
    across = np.concatenate([2 * right, np.nan_to_num(rise)[..., None]], axis=-1)
    above = dot(across, fault_poles[:, None, :])
    weight = np.abs(above).sum(axis=-1)
    return np.divide(above.sum(axis=-1), weight, out=np.zeros(len(lines)), where=weight > 0)


def _elevations(ground, points):
    return ground(points[..., 0], points[..., 1])
