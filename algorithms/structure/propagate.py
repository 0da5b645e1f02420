"""How errors of the inputs move the slip: the same equations with perturbed poles, positions and slickenlines.

Perturbations are arrays whose last axis is j draws. A pole perturbed by small angles a, b along two tangent directions
is taken as ``m + f (a e1 + b e2)`` with f = tan(r)/r, r the angle turned: the right direction at any length, since the
slip equations do not ask for unit poles.
"""

from typing import NamedTuple

import numpy as np

from .estimate import along_line, meet


class Draws(NamedTuple):
    """Perturbations in physical units.

    `fault` ``(2, s, j)`` tangents of the turn of the fault's pole along strike and down dip; `hanging`, `foot`
    ``(2, s, k, j)`` the same for marker poles (the same array when the walls share them); `shift_hanging`,
    `shift_foot` ``(s, k, j)`` metres across the marker; `rake` ``(s, j)`` degrees.
    """

    fault: np.ndarray
    hanging: np.ndarray
    foot: np.ndarray
    shift_hanging: np.ndarray
    shift_foot: np.ndarray
    rake: np.ndarray


class Slips(NamedTuple):
    """Perturbed slips ``(s, j)``, metres: net, in the perturbed plane (sinistral, normal), and ENU."""

    net: np.ndarray
    sinistral: np.ndarray
    normal: np.ndarray
    heave: np.ndarray
    east: np.ndarray
    north: np.ndarray
    up: np.ndarray


def gnomonic(a, b):
    """Angles (radians) along two tangent directions scaled by tan(r)/r, exact to r**4."""
    r2 = a * a + b * b
    scale = 1.0 + r2 * (1 / 3 + r2 * (2 / 15))
    return a * scale, b * scale


def _tilted(wall, turn, p, q):
    """Coefficients of a wall's equations with perturbed poles: along strike and down dip ``(s, k, j)``, and poles.

    The plane's own axes tilt with the fault's pole n + p s + q d: a vector x s + y d - (p x + q y) n stays in it.
    """
    pole, e1, e2 = wall.pole, wall.turn[:, :, 0], wall.turn[:, :, 1]
    strike, dip, normal = (
        pole[..., i, None] + turn[0] * e1[..., i, None] + turn[1] * e2[..., i, None] for i in range(3)
    )
    return strike - p * normal, dip - q * normal, (strike, dip, normal)


def _right(poles, point, shift):
    return sum(axis * point[..., i, None] for i, axis in enumerate(poles)) + shift


def _known(wall, use):
    """The wall with zeros for markers that are not used, so that their weight of 0 silences them."""
    keep = use[..., None]
    return wall._replace(pole=np.where(keep, wall.pole, 0.0), turn=np.where(keep[..., None], wall.turn, 0.0))


def perturbed_slips(batch, estimate, draws):
    """Slips ``(s, j)`` of a batch under perturbations, with the weights of the estimate."""
    x, y = _in_plane_slips(batch, estimate, draws)
    return _resolve(batch, x, y, *draws.fault)


def _in_plane_slips(batch, estimate, draws):
    p, q = draws.fault[:, :, None, :]
    use = estimate.weight_hanging > 0
    hanging, foot = _known(batch.hanging, use), _known(batch.foot, use)
    weight = estimate.weight_hanging[..., None]
    along, down, poles = _tilted(hanging, draws.hanging, p, q)
    if batch.shared:
        right = _right(poles, hanging.point - foot.point, draws.shift_hanging - draws.shift_foot)
        return _free_or_bound(batch, estimate, along, down, right, weight, draws.rake, *draws.fault)
    x, y = meet(along, down, _right(poles, hanging.point, draws.shift_hanging), weight)
    along, down, poles = _tilted(foot, draws.foot, p, q)
    x_foot, y_foot = meet(along, down, _right(poles, foot.point, draws.shift_foot), estimate.weight_foot[..., None])
    return x - x_foot, y - y_foot


def perturbed_piercing(batch, estimate, draws):
    """Footwall piercing points (x, y), each ``(s, j)``, relative to the centre; they have no meaning by lineation."""
    p, q = draws.fault[:, :, None, :]
    foot = _known(batch.foot, estimate.weight_foot > 0)
    along, down, poles = _tilted(foot, draws.foot, p, q)
    return meet(along, down, _right(poles, foot.point, draws.shift_foot), estimate.weight_foot[..., None])


def _free_or_bound(batch, estimate, along, down, right, weight, rake_error, p, q):
    x, y = meet(along, down, right, weight)
    bound = np.flatnonzero(estimate.by_lineation)
    if len(bound):
        rake = np.radians(batch.rake[bound, None] + rake_error[bound])
        strike_line, dip_line, _ = _plane_axes(batch.dip[bound], p[bound], q[bound])
        cos, sin = (np.cos(rake) * strike_line[i] + np.sin(rake) * dip_line[i] for i in range(2))
        amount = along_line(along[bound], down[bound], right[bound], weight[bound], cos[:, None, :], sin[:, None, :])
        x[bound], y[bound] = amount * cos, amount * sin
    return x, y


def _plane_axes(dip, p, q):
    """Strike line and dip line of perturbed planes, and the cosine of their dip, in the unperturbed fault frame.

    With the pole n + p s + q d and the vertical z, which is -sin(dip) d + cos(dip) n: the strike line is z x pole, the
    dip line strike x pole. Each line is a tuple of its components along s, d and n, each ``(s, j)``.
    """
    sin, cos = np.sin(np.radians(dip))[:, None], np.cos(np.radians(dip))[:, None]
    level, steep = sin + q * cos, cos - q * sin
    with np.errstate(divide="ignore", invalid="ignore"):
        flat = 1.0 / np.sqrt(level * level + p * p)
        length = 1.0 / np.sqrt(1.0 + p * p + q * q)
    strike_line = (level * flat, -p * cos * flat, -p * sin * flat)
    flat = flat * length
    dip_line = (p * steep * flat, (level + p * p * sin) * flat, -(p * p * cos + level * q) * flat)
    return strike_line, dip_line, steep * length


def _resolve(batch, x, y, p, q):
    """Components of slips x s + y d - (p x + q y) n in the axes of the perturbed plane and in ENU."""
    slip = (x, y, -(p * x + q * y))
    strike_line, dip_line, cos_dip = _plane_axes(batch.dip, p, q)
    sinistral, normal = (sum(a * b for a, b in zip(axis, slip)) for axis in (strike_line, dip_line))
    to_enu = batch.axes.transpose(0, 2, 1)[..., None]
    east, north, up = (sum(to_enu[:, i, c] * slip[c] for c in range(3)) for i in range(3))
    net = np.sqrt(sum(component * component for component in slip))
    return Slips(net, sinistral, normal, normal * cos_dip, east, north, up)
