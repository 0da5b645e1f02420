"""Intervals of the slip by propagation of distributions.

Source: JCGM 101:2008, Evaluation of measurement data, Supplement 1, Propagation of distributions using a Monte Carlo
method; the coverage interval is the probabilistically symmetric one of its 7.7.
Poles carry an isotropic angular error, each tangent component normal. A fault's assumed dip is uniform within its
bounds. Attitudes shared by both walls are drawn once for both.
"""

from typing import NamedTuple

import numpy as np

from .problems import never_cancelled
from .propagate import Draws, gnomonic, perturbed_slips
from .regions import ellipse

LEVEL = 0.95
CACHE = 60_000  # numbers in the largest array of a chunk: small enough for the processor's cache
QUANTITIES = ("slip", "rake", "trend", "plunge", "throw", "heave", "ss", "ds")


class Intervals(NamedTuple):
    """Summary of the draws, arrays of s rows, nan without a solution.

    `median`, `low`, `high` are dictionaries by quantity: net slip, rake, trend, plunge, throw, heave, strike slip and
    dip slip. Angles are unwrapped about the estimate, so that an interval may run past 180 or 360 degrees.
    `normal`, `sinistral`, `both` are probabilities: of a normal dip slip, of a sinistral strike slip, and of having both
    components of the estimate's sign. `region` ``(s, v, 2)`` is the outline, east and north, of the ellipse that holds
    95 % of the tips of the slip vector in map view.
    """

    median: dict
    low: dict
    high: dict
    normal: np.ndarray
    sinistral: np.ndarray
    both: np.ndarray
    region: np.ndarray


def draw(batch, rng, count):
    """Random perturbations of a batch, `count` for each solution: standard normals scaled by every input's error."""
    s, k = batch.hanging.given.shape
    fault = _fault_turns(batch, rng, count)
    hanging = _pole_turns(batch.hanging, rng, count)
    foot = hanging if batch.shared else _pole_turns(batch.foot, rng, count)
    shifts = [rng.standard_normal((s, k, count)) * np.nan_to_num(w.shift_sd)[..., None] for w in (batch.hanging, batch.foot)]
    return Draws(fault, hanging, foot, *shifts, _rake_errors(batch, rng, count))


def _fault_turns(batch, rng, count):
    a, b = rng.standard_normal((2, len(batch.dip), count)) * batch.pole_sd[:, None]
    assumed = np.flatnonzero(batch.dip_spread > 0)
    p, q = gnomonic(a, b)
    if len(assumed):
        change = rng.uniform(-1, 1, (len(assumed), count)) * batch.dip_spread[assumed, None]
        p[assumed], q[assumed] = a[assumed], np.tan(np.radians(change))
    return np.stack([p, q])


def _pole_turns(wall, rng, count):
    angles = rng.standard_normal((2, *wall.given.shape, count))
    angles *= np.nan_to_num(wall.pole_sd)[..., None]
    return gnomonic(angles[0], angles[1])


def _rake_errors(batch, rng, count):
    """Errors of the slickenlines' rake; none are drawn where no fault of the batch has any."""
    if np.isnan(batch.rake).all():
        return np.broadcast_to(0.0, (len(batch.rake), count))
    return rng.standard_normal((len(batch.rake), count)) * batch.rake_sd[:, None]


def intervals(batch, estimate, samples, rng, report=never_cancelled):
    """Medians, 95 % intervals, probabilities of sense and map regions of every solution of a batch.

    Parameters: `samples` draws for each solution; `rng` a numpy Generator; `report` called with the fraction done.
    """
    size = len(batch.dip)
    step = max(1, CACHE // (samples * batch.hanging.given.shape[1]))
    chunks = []
    for start in range(0, size, step):
        report(start / size)
        rows = slice(start, min(start + step, size))
        part = batch.part(rows)
        fixed = type(estimate)(*(column[rows] for column in estimate))
        chunks.append(_summary(part, fixed, perturbed_slips(part, fixed, draw(part, rng, samples))))
    return _joined(chunks)


def _joined(chunks):
    columns = {
        name: {key: np.concatenate([getattr(chunk, name)[key] for chunk in chunks]) for key in QUANTITIES}
        for name in ("median", "low", "high")
    }
    rest = {
        name: np.concatenate([getattr(chunk, name) for chunk in chunks])
        for name in Intervals._fields
        if name not in columns
    }
    return Intervals(**columns, **rest)


def _ranks(count):
    """Ranks from 0 of the lower bound, the median and the upper bound (JCGM 101:2008, 7.7.1)."""
    covered = int(LEVEL * count + 0.5)
    low = max((count - covered + 1) // 2, 1)
    return low - 1, (count - 1) // 2, min(low + covered, count) - 1


def _summary(batch, estimate, slips):
    values = _quantities(batch, estimate, slips)
    ranks = _ranks(slips.net.shape[1])
    low, median, high = {}, {}, {}
    for name, (samples, centre) in values.items():
        ordered = np.partition(samples, ranks, axis=1)
        low[name], median[name], high[name] = (ordered[:, rank] + centre for rank in ranks)
    sinistral, normal = slips.sinistral > 0, slips.normal > 0
    same = (sinistral == (estimate.slip[:, :1] > 0)) & (normal == (estimate.slip[:, 1:] > 0))
    known = np.where(np.isnan(estimate.slip[:, 0]), np.nan, 1.0)
    return Intervals(
        median,
        low,
        high,
        normal.mean(axis=1) * known,
        sinistral.mean(axis=1) * known,
        same.mean(axis=1) * known,
        ellipse(slips.east, slips.north, LEVEL),
    )


def _quantities(batch, estimate, slips):
    """Samples of every quantity and what to add to them: angles are deviations from the estimate."""
    along, down = estimate.slip[:, :1], estimate.slip[:, 1:]
    east, north, up = (np.einsum("sa,sa->s", batch.axes[:, :2, i], estimate.slip)[:, None] for i in range(3))
    rake = np.arctan2(along * -slips.normal + down * slips.sinistral, along * slips.sinistral + down * slips.normal)
    with np.errstate(divide="ignore", invalid="ignore"):
        turn = np.arctan((slips.east * north - slips.north * east) / (slips.north * north + slips.east * east))
        plunge = np.arctan(np.abs(slips.up) / np.sqrt(slips.east**2 + slips.north**2))
    trend = np.arctan2(-np.copysign(1, up) * east, -np.copysign(1, up) * north)[:, 0]
    return {
        "slip": (slips.net, 0.0),
        "rake": (np.degrees(rake), np.degrees(np.arctan2(-down, along))[:, 0]),
        "trend": (np.degrees(turn), np.degrees(trend) % 360.0),
        "plunge": (np.degrees(plunge), 0.0),
        "throw": (-slips.up, 0.0),
        "heave": (slips.heave, 0.0),
        "ss": (slips.sinistral, 0.0),
        "ds": (slips.normal, 0.0),
    }
