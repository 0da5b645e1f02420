"""Which input dominates the uncertainty: first-order shares of the variance, and errors of the piercing points.

Every input is moved by plus and minus one standard deviation, all others held (JCGM 100:2008, 5.1.3: contribution of an
input = sensitivity x standard uncertainty). The differences are taken with the equations of the Monte Carlo runs.
"""

from typing import NamedTuple

import numpy as np

from .propagate import Draws, gnomonic, perturbed_piercing, perturbed_slips


class Shares(NamedTuple):
    """First-order shares of the variance of the net slip, 0-1, and standard deviations of the footwall piercing point.

    `fault` ``(s, 2)`` strike and dip; `marker` ``(s, k, 3)`` strike, dip and position of each marker; `rake` ``(s,)``
    slickenlines; `piercing_sd` ``(s, 2)`` metres along strike and down dip.
    """

    fault: np.ndarray
    marker: np.ndarray
    rake: np.ndarray
    piercing_sd: np.ndarray


def _probes(batch):
    """Draws in which each input in turn moves by one standard deviation, up and down: pairs of columns."""
    s, k = batch.hanging.given.shape
    inputs = 3 + 6 * k
    step = np.zeros((inputs, 2 * inputs))
    step[np.arange(inputs), 2 * np.arange(inputs)] = 1.0
    step[np.arange(inputs), 2 * np.arange(inputs) + 1] = -1.0
    fault, rake, markers = step[:2], step[2], step[3:].reshape(6, k, -1)
    dip_sd = np.where(batch.dip_spread > 0, np.radians(batch.dip_spread) / np.sqrt(3), batch.pole_sd)
    turn = np.stack([fault[0] * batch.pole_sd[:, None], np.tan(fault[1] * dip_sd[:, None])])
    hanging = _turns(batch.hanging, markers[:2])
    foot = hanging if batch.shared else _turns(batch.foot, markers[2:4])
    shifts = [
        np.nan_to_num(wall.shift_sd)[..., None] * markers[4 + number]
        for number, wall in enumerate((batch.hanging, batch.foot))
    ]
    return Draws(turn, hanging, foot, *shifts, batch.rake_sd[:, None] * rake)


def _turns(wall, steps):
    angles = np.nan_to_num(wall.pole_sd)[None, ..., None] * steps[:, None]
    return gnomonic(angles[0], angles[1])


def shares(batch, estimate):
    """First-order `Shares` of every solution of a batch; nan without a solution."""
    s, k = batch.hanging.given.shape
    draws = _probes(batch)
    effect = _variances(perturbed_slips(batch, estimate, draws).net)
    with np.errstate(invalid="ignore", divide="ignore"):
        part = effect / effect.sum(axis=1, keepdims=True)
    markers = part[:, 3:].reshape(s, 6, k)
    grouped = np.stack([markers[:, 0] + markers[:, 2], markers[:, 1] + markers[:, 3], markers[:, 4] + markers[:, 5]], axis=2)
    piercing = [np.sqrt(_variances(axis).sum(axis=1)) for axis in perturbed_piercing(batch, estimate, draws)]
    return Shares(part[:, :2], grouped, part[:, 2], np.stack(piercing, axis=1))


def _variances(values):
    """Variance that each input causes: half the difference of its pair of columns, squared."""
    return ((values[:, 0::2] - values[:, 1::2]) / 2) ** 2
