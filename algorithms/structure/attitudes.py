"""Planes and lines as vectors, and back to the angles that a geologist writes.

Conventions of the whole package (docstrings refer to this page instead of repeating it):

- Right-handed East, North, Up. Vectors are arrays ``(..., 3)``, components last.
- Lengths in metres. Angles in degrees at every public function.
- Azimuths clockwise from grid north, 0-360. Strike by the right-hand rule: looking along the strike the
  plane dips to the right, so the dip azimuth is strike + 90 (not the left-hand rule of some older maps).
- Plunge and dip positive downward.
- The pole of a plane points up; that of a fault points into the hanging wall.
- Slip is the movement of the hanging wall relative to the footwall. Rake of slip after Aki & Richards,
  Quantitative Seismology, ch. 4: 0 sinistral, 90 reverse, +-180 dextral, -90 normal (it is not the
  geologist's 0-180 rake measured down from the strike; that one is ``rake_down``).
- nan means "no answer".
"""

import numpy as np


def _vector(east, north, up):
    return np.stack(np.broadcast_arrays(east, north, up), axis=-1)


def _sin_cos(degrees):
    radians = np.radians(degrees)
    return np.sin(radians), np.cos(radians)


def dot(a, b):
    """Scalar product along the last axis."""
    return np.einsum("...i,...i->...", a, b)


def unit(vector):
    """The vector at length one; nan where its length is zero."""
    vector = np.asarray(vector, float)
    length = np.sqrt(dot(vector, vector))[..., None]
    return np.divide(vector, length, out=np.full_like(vector, np.nan), where=length > 0)


def along_strike(strike):
    """Horizontal unit vector ``(..., 3)`` along the strike azimuth."""
    sin, cos = _sin_cos(strike)
    return _vector(sin, cos, np.zeros_like(sin))


def down_dip(strike, dip):
    """Unit vector ``(..., 3)`` down the dip of a plane."""
    sin_strike, cos_strike = _sin_cos(strike)
    sin_dip, cos_dip = _sin_cos(dip)
    return _vector(cos_strike * cos_dip, -sin_strike * cos_dip, -sin_dip)


def pole(strike, dip):
    """Upward unit normal ``(..., 3)`` of a plane; for a fault it points into the hanging wall."""
    sin_strike, cos_strike = _sin_cos(strike)
    sin_dip, cos_dip = _sin_cos(dip)
    return _vector(cos_strike * sin_dip, -sin_strike * sin_dip, cos_dip)


def frame(strike, dip):
    """Axes of a plane as a rotation ``(..., 3, 3)`` whose rows are along strike, down dip and pole.

    ``frame @ v`` turns ENU components into (strike, dip, pole) components. The axes satisfy pole = dip x strike.
    """
    return np.stack([along_strike(strike), down_dip(strike, dip), pole(strike, dip)], axis=-2)


def strike_dip(normal):
    """Strike 0-360 and dip 0-90 of the plane with this normal, which may point up or down."""
    normal = unit(normal)
    up = np.where(normal[..., 2:] < 0, -normal, normal)
    strike = np.degrees(np.arctan2(-up[..., 1], up[..., 0])) % 360.0
    dip = np.degrees(np.arctan2(np.hypot(up[..., 0], up[..., 1]), up[..., 2]))
    return strike, dip


def line(trend, plunge):
    """Unit vector ``(..., 3)`` of a line that plunges downward at its trend."""
    sin_trend, cos_trend = _sin_cos(trend)
    sin_plunge, cos_plunge = _sin_cos(plunge)
    return _vector(sin_trend * cos_plunge, cos_trend * cos_plunge, -sin_plunge)


def trend_plunge(vector):
    """Trend 0-360 and plunge 0-90 of a line, at its downward end (for a level line the end it points to)."""
    vector = np.asarray(vector, float)
    down = np.where(vector[..., 2:] > 0, -vector, vector)
    trend = np.degrees(np.arctan2(down[..., 0], down[..., 1])) % 360.0
    plunge = np.degrees(np.arctan2(-down[..., 2], np.hypot(down[..., 0], down[..., 1])))
    return trend, np.abs(plunge)


def azimuth(vector):
    """Azimuth 0-360 of the horizontal part of a vector."""
    vector = np.asarray(vector, float)
    return np.degrees(np.arctan2(vector[..., 0], vector[..., 1])) % 360.0


def rake(slip, strike, dip):
    """Rake of slip, -180 to 180 (Aki & Richards), of a slip vector ``(..., 3)`` on a fault."""
    sinistral = dot(slip, along_strike(strike))
    normal = dot(slip, down_dip(strike, dip))
    return np.degrees(np.arctan2(-normal, sinistral))


def slip_vector(strike, dip, rake, amount=1.0):
    """Slip vector ``(..., 3)`` of a fault from its rake (Aki & Richards) and amount; the inverse of `rake`."""
    sin, cos = _sin_cos(rake)
    amount = np.asarray(amount, float)
    return (amount * cos)[..., None] * along_strike(strike) - (amount * sin)[..., None] * down_dip(strike, dip)


def rake_down(direction, strike, dip):
    """Rake 0-180 of a line in a plane, measured in the plane from the strike azimuth downward."""
    angle = np.degrees(np.arctan2(dot(direction, down_dip(strike, dip)), dot(direction, along_strike(strike))))
    return angle % 180.0


def cutoff_direction(marker_pole, fault_pole):
    """Unit vector ``(..., 3)`` of the line in which a marker meets a fault, pointing down; nan when parallel."""
    direction = unit(np.cross(marker_pole, fault_pole))
    return np.where(direction[..., 2:] > 0, -direction, direction)


def angle_between_planes(pole_a, pole_b):
    """Angle 0-90 between two planes (or two lines) given by unit vectors."""
    sine = np.linalg.norm(np.cross(pole_a, pole_b), axis=-1)
    return np.degrees(np.arctan2(sine, np.abs(dot(pole_a, pole_b))))


def mean_pole(poles, weights):
    """Mean axis of poles: the orientation tensor's principal direction, pointing up.

    Parameters: poles ``(..., k, 3)`` and weights ``(..., k)``; a pole of weight 0 may be nan.
    Source: Scheidegger 1965; Woodcock 1977 (orientation tensor).
    """
    poles = np.where(weights[..., None] > 0, poles, 0.0)
    tensor = np.einsum("...k,...ki,...kj->...ij", weights, poles, poles)
    mean = np.linalg.eigh(tensor)[1][..., -1]
    return np.where(mean[..., 2:] < 0, -mean, mean)


def wrap(degrees, period=360.0):
    """Angle brought into -period/2 .. period/2."""
    return (np.asarray(degrees) + period / 2) % period - period / 2
