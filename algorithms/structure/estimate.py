"""The slip that the data say, unperturbed: weighted least squares over markers, all faults of a batch at once."""

from typing import NamedTuple

import numpy as np

from .attitudes import dot

ROUNDS = 3  # the weights depend on the slip
PARALLEL = 1.0  # degrees; cutoff lines that cross at less give only one component
NO_CUTOFF = 1.0  # degrees; a marker nearer to the fault than this has no cutoff line
FLOOR_m = 1e-6  # metres; the smallest standard deviation that an equation is given


class Estimate(NamedTuple):
    """Solutions of a batch in fault-frame components; nan where there is none.

    `slip` ``(s, 2)`` sinistral and normal components in metres; `hanging`, `foot` ``(s, 2)`` piercing points relative
    to the centre; `weight_hanging`, `weight_foot` ``(s, k)`` of the equations, 0 for a marker that says nothing;
    `residual` ``(s, k)`` metres across the marker; `misfit` chi-square per degree of freedom; `crossing` degrees;
    `by_lineation` which slips use the slickenlines.
    """

    slip: np.ndarray
    hanging: np.ndarray
    foot: np.ndarray
    weight_hanging: np.ndarray
    weight_foot: np.ndarray
    residual: np.ndarray
    misfit: np.ndarray
    crossing: np.ndarray
    by_lineation: np.ndarray


def meet(along, down, right, weight):
    """Weighted least-squares solution (x, y) of ``along x + down y = right`` over axis 1; nan if singular."""
    ww_aa = (weight * along * along).sum(axis=1)
    ww_dd = (weight * down * down).sum(axis=1)
    ww_ad = (weight * along * down).sum(axis=1)
    ww_ar = (weight * along * right).sum(axis=1)
    ww_dr = (weight * down * right).sum(axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        scale = 1.0 / (ww_aa * ww_dd - ww_ad * ww_ad)
        return (ww_dd * ww_ar - ww_ad * ww_dr) * scale, (ww_aa * ww_dr - ww_ad * ww_ar) * scale


def along_line(along, down, right, weight, cos, sin):
    """Like `meet` for a solution bound to the direction (cos, sin)."""
    effect = along * cos + down * sin
    with np.errstate(divide="ignore", invalid="ignore"):
        return (weight * effect * right).sum(axis=1) / (weight * effect * effect).sum(axis=1)


def usable(wall):
    """Markers of a wall whose cutoff line exists, ``(s, k)``."""
    in_plane = np.hypot(wall.pole[..., 0], wall.pole[..., 1])
    return wall.given & (np.nan_to_num(in_plane) > np.sin(np.radians(NO_CUTOFF)))


def crossing_angle(wall, use):
    """Widest acute angle ``(s,)`` in degrees at which the used cutoff lines of a wall cross; nan for fewer than two."""
    direction = np.degrees(np.arctan2(wall.pole[..., 1], wall.pole[..., 0]))
    apart = np.abs((direction[:, :, None] - direction[:, None, :] + 90.0) % 180.0 - 90.0)
    apart = np.where(use[:, :, None] & use[:, None, :], apart, -1.0)
    widest = apart.max(axis=(1, 2))
    return np.where(use.sum(axis=1) >= 2, widest, np.nan)


def _safe(wall, use):
    """Pole and point of a wall with zeros in place of what is unknown."""
    return np.where(use[..., None], wall.pole, 0.0), wall.point


def _variance(batch, poles, wall, lever, moved):
    """Variance of the equations from angles: the marker's pole on a lever ``(s, k, 3)``, and the fault's pole.

    The fault's error tilts the in-plane vector `moved` ``(s, 2)`` out of the plane; it is common to all markers of a
    fault, but taken as independent here, where only the weights and the misfit depend on it.
    """
    across = dot(poles, lever)
    swing = np.maximum(dot(lever, lever) - across**2, 0.0)
    fault_sd = np.maximum(batch.pole_sd, np.radians(batch.dip_spread) / np.sqrt(3))
    tilt = (fault_sd**2 * np.nan_to_num((moved**2).sum(axis=1)))[:, None] * poles[..., 2] ** 2
    return np.nan_to_num(wall.pole_sd) ** 2 * swing + tilt


def _in_plane(xy):
    return np.concatenate([np.nan_to_num(xy), np.zeros((len(xy), 1))], axis=1)[:, None, :]


def _weights(variance, use):
    return np.where(use, 1.0 / np.maximum(variance, FLOOR_m**2), 0.0)


def solve(batch, use=None):
    """Slip and piercing points of every solution of a batch.

    `use` ``(s, k)`` restricts the markers; by default all that have a cutoff line. A fault whose cutoff lines all lie
    parallel, or with one marker, is solved along its slickenlines where it has them, if the walls share attitudes.
    """
    everything = usable(batch.hanging) & usable(batch.foot)
    use = everything if use is None else everything & use
    crossing = np.fmin(crossing_angle(batch.hanging, use), crossing_angle(batch.foot, use))
    resolved = crossing >= PARALLEL
    by_lineation = ~resolved & ~np.isnan(batch.rake) & use.any(axis=1) & batch.shared
    solver = _solve_shared if batch.shared else _solve_per_block
    found = solver(batch, use, by_lineation)
    hopeless = ~(resolved | by_lineation)
    values = {
        name: np.where(hopeless.reshape(-1, *[1] * (array.ndim - 1)), np.nan, array)
        for name, array in found.items()
        if not name.startswith("weight")
    }
    weights = {name: array for name, array in found.items() if name.startswith("weight")}
    return Estimate(**values, **weights, crossing=crossing, by_lineation=by_lineation)


def _solution(batch, along, down, right, weight, by_lineation):
    """In-plane vector ``(s, 2)``: free, or along the slickenlines."""
    x, y = meet(along, down, right, weight)
    rake = np.radians(np.nan_to_num(batch.rake))
    cos, sin = np.cos(rake), np.sin(rake)
    amount = along_line(along, down, right, weight, cos[:, None], sin[:, None])
    return np.stack([np.where(by_lineation, amount * cos, x), np.where(by_lineation, amount * sin, y)], axis=1)


def _misfit(residual, weight, use, by_lineation):
    freedom = use.sum(axis=1) - np.where(by_lineation, 1, 2)
    chi_square = (weight * residual**2).sum(axis=1)
    return np.divide(chi_square, freedom, out=np.full(len(freedom), np.nan), where=freedom > 0)


def _solve_shared(batch, use, by_lineation):
    poles, hanging_point = _safe(batch.hanging, use)
    foot_point = batch.foot.point
    separation = hanging_point - foot_point
    right = dot(poles, separation)
    along, down = poles[..., 0], poles[..., 1]
    positions = batch.hanging.shift_sd**2 + batch.foot.shift_sd**2
    weight = _weights(np.ones_like(right), use)
    for _ in range(ROUNDS):
        slip = _solution(batch, along, down, right, weight, by_lineation)
        angles = _variance(batch, poles, batch.hanging, separation - _in_plane(slip), slip)
        weight = _weights(positions + angles, use)
    slip = _solution(batch, along, down, right, weight, by_lineation)
    foot = np.stack(meet(along, down, dot(poles, foot_point), weight), axis=1)
    foot = np.where(by_lineation[:, None], _outcrop(batch.foot, use), foot)
    residual = np.where(use, along * slip[:, :1] + down * slip[:, 1:] - right, np.nan)
    return {
        "slip": slip,
        "hanging": foot + slip,
        "foot": foot,
        "weight_hanging": weight,
        "weight_foot": weight,
        "residual": residual,
        "misfit": _misfit(np.nan_to_num(residual), weight, use, by_lineation),
    }


def _outcrop(wall, use):
    """The first used cutoff of a wall, in the plane: where a slip along slickenlines is drawn from."""
    first = np.argmax(use, axis=1)
    return wall.point[np.arange(len(first)), first, :2]


def _piercing(batch, wall, use):
    """Piercing point of one wall from its own attitudes, and the weights of its equations."""
    poles, point = _safe(wall, use)
    right = dot(poles, point)
    weight = _weights(np.ones_like(right), use)
    for _ in range(ROUNDS):
        where = np.stack(meet(poles[..., 0], poles[..., 1], right, weight), axis=1)
        angles = _variance(batch, poles, wall, _in_plane(where) - point, where)
        weight = _weights(wall.shift_sd**2 + angles, use)
    return np.stack(meet(poles[..., 0], poles[..., 1], right, weight), axis=1), weight


def _solve_per_block(batch, use, _by_lineation):
    hanging, weight_hanging = _piercing(batch, batch.hanging, use)
    foot, weight_foot = _piercing(batch, batch.foot, use)
    miss = [
        dot(_safe(wall, use)[0], _in_plane(point) - wall.point)
        for wall, point in ((batch.hanging, hanging), (batch.foot, foot))
    ]
    residual = np.where(use, miss[0] - miss[1], np.nan)
    both = np.divide(weight_hanging * weight_foot, weight_hanging + weight_foot, out=np.zeros(use.shape), where=use)
    return {
        "slip": hanging - foot,
        "hanging": hanging,
        "foot": foot,
        "weight_hanging": weight_hanging,
        "weight_foot": weight_foot,
        "residual": residual,
        "misfit": _misfit(np.nan_to_num(residual), both, use, np.zeros(len(use), bool)),
    }
