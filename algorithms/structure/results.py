"""Solutions as rows: the numbers of a geologist's table, one row for each slip, separation and piercing point."""

from typing import NamedTuple

import numpy as np

from .attitudes import azimuth, dot, trend_plunge
from .cautions import cautions, degrees_of_freedom
from .senses import apparent_sense, named_components, rake_note, sense
from .uncertainty import QUANTITIES

MARKERS, LINEATION, SEPARATION = "markers", "lineation", "separation"
SMALLEST_SHARE = 0.01
LEVEL_CUTOFF = 1.0  # degrees; a lone cutoff line this level fixes the dip slip


class SlipRows(NamedTuple):
    """Net slips, n rows; lengths in metres, angles in degrees, azimuths from true north; nan or '' for no answer.

    `fault` row of the fault table; `markers` names of the markers used; `method` 'markers', 'lineation' or 'separation';
    `slip` ``(n, 3)`` ENU of the grid; `foot`, `hanging` ``(n, 3)`` piercing points; `depth` ``(n, 2)`` of them below
    ground (foot, hanging); `sd` ``(n, 2)`` of them along strike and down dip; `median`, `low`, `high` by quantity;
    `region` ``(n, v, 2)`` outline round the tip, in map coordinates.
    """

    fault: np.ndarray
    markers: np.ndarray
    n_markers: np.ndarray
    method: np.ndarray
    net: np.ndarray
    rake: np.ndarray
    rake_note: np.ndarray
    trend: np.ndarray
    plunge: np.ndarray
    azimuth: np.ndarray
    sinistral: np.ndarray
    normal: np.ndarray
    heave: np.ndarray
    throw: np.ndarray
    slip: np.ndarray
    sense: np.ndarray
    sense_prob: np.ndarray
    normal_prob: np.ndarray
    sinistral_prob: np.ndarray
    crossing: np.ndarray
    misfit: np.ndarray
    rotation: np.ndarray
    least: np.ndarray
    shares: np.ndarray
    caution: np.ndarray
    foot: np.ndarray
    hanging: np.ndarray
    depth: np.ndarray
    sd: np.ndarray
    median: dict
    low: dict
    high: dict
    region: np.ndarray


class SeparationRows(NamedTuple):
    """Separations of matched markers: rows of the cutoff table on either wall, metres, and words."""

    hanging: np.ndarray
    foot: np.ndarray
    strike: np.ndarray
    dip: np.ndarray
    across: np.ndarray
    least: np.ndarray
    cutoff_rake: np.ndarray
    sense: np.ndarray
    residual: np.ndarray


def _spread_out(solved, values, width=()):
    """Values of the solved rows put back among all rows of a group, nan elsewhere."""
    full = np.full((len(solved), *width), np.nan)
    full[solved] = values
    return full


def _names(cutoffs, item):
    return cutoffs.marker[item.group.hanging]


def _used(item):
    """Markers that take part in a solution, ``(s, k)``; all of them where there is none."""
    use = item.estimate.weight_hanging > 0
    return use | ~item.solved[:, None]


def _joined_names(names, used):
    return np.array([" + ".join(str(name) for name in row[use]) for row, use in zip(names, used)], object)


def _share_texts(item, names):
    """'coal dip 55 %, fault dip 12 %, ...' for every solution, largest first; '' without a solution."""
    texts = np.full(len(names), "", object)
    for number, row in enumerate(np.flatnonzero(item.solved)):
        parts = [("fault strike", item.shares.fault[number, 0]), ("fault dip", item.shares.fault[number, 1])]
        parts.append(("slickenline rake", item.shares.rake[number]))
        for name, values in zip(names[row], item.shares.marker[number]):
            parts += [(f"{name} {what}", value) for what, value in zip(("strike", "dip", "position"), values)]
        large = sorted((part for part in parts if part[1] >= SMALLEST_SHARE), key=lambda part: -part[1])
        texts[row] = ", ".join(f"{name} {100 * value:.0f} %" for name, value in large)
    return texts


def _points(item, in_plane):
    """Points of the fault plane from components along strike and down dip, ``(s, 3)``."""
    axes = item.batch.axes
    return item.batch.centre + in_plane[:, :1] * axes[:, 0] + in_plane[:, 1:] * axes[:, 1]


def _depths(points, item, ground):
    """Metres of points below ground; where the ground is unknown, below the mean of the cutoffs."""
    z = ground(points[:, 0], points[:, 1]) if ground is not None else np.full(len(points), np.nan)
    return np.where(np.isnan(z), item.batch.centre[:, 2], z) - points[:, 2]


def _dip_slip_of_level_cutoff(item):
    """Dip slip of the solutions whose lone marker's cutoff line is level: its separation is all dip slip."""
    apart = item.separations
    rake = apart.cutoff_rake[:, 0]
    level = np.minimum(rake, 180.0 - rake) < LEVEL_CUTOFF
    alone = ~item.solved & (np.isfinite(apart.least).sum(axis=1) == 1) & (apart.least.shape[1] == 1)
    return np.where(alone & level, apart.dip[:, 0], np.nan)


def _sense_probability(item, rake):
    """Probability of the components that the sense names."""
    if item.intervals is None:
        return np.full(len(rake), np.nan)
    by_dip, by_strike = named_components(rake[item.solved])
    slip = item.estimate.slip[item.solved]
    sinistral = np.where(slip[:, 0] > 0, item.intervals.sinistral, 1 - item.intervals.sinistral)
    normal = np.where(slip[:, 1] > 0, item.intervals.normal, 1 - item.intervals.normal)
    return _spread_out(item.solved, np.where(by_dip & by_strike, item.intervals.both, np.where(by_dip, normal, sinistral)))


def _percentiles(item, name, turn):
    """One of the dictionaries median, low, high of a group; trends turned to true north."""
    spread = getattr(item.intervals, name) if item.intervals is not None else None
    columns = {
        quantity: _spread_out(item.solved, spread[quantity] if spread else np.nan) for quantity in QUANTITIES
    }
    columns["trend"] = columns["trend"] + turn
    return columns


def _slips_of(item, faults, cutoffs, ground, true_minus_grid):
    estimate, batch = item.estimate, item.batch
    turn = true_minus_grid[item.group.fault]
    slip = np.einsum("sa,sai->si", estimate.slip, batch.axes[:, :2])
    trend, plunge = trend_plunge(slip)
    rake = np.degrees(np.arctan2(-estimate.slip[:, 1], estimate.slip[:, 0]))
    dip_slip = np.where(item.solved, estimate.slip[:, 1], _dip_slip_of_level_cutoff(item))
    strike = batch.strike + turn
    foot, hanging = _points(item, estimate.foot), _points(item, estimate.hanging)
    depth = np.stack([_depths(foot, item, ground), _depths(hanging, item, ground)], axis=1)
    names, used = _names(cutoffs, item), _used(item)
    probability = _sense_probability(item, rake)
    region, normal_prob, sinistral_prob = _clouds(item, foot)
    lone = np.where(item.separations.least.shape[1] == 1, item.separations.least[:, 0], np.nan)
    method = np.where(item.solved, np.where(estimate.by_lineation, LINEATION, MARKERS), SEPARATION)
    return SlipRows(
        fault=item.group.fault,
        markers=_joined_names(names, used),
        n_markers=used.sum(axis=1),
        method=method,
        net=np.hypot(*estimate.slip.T),
        rake=rake,
        rake_note=rake_note(rake, strike),
        trend=(trend + turn) % 360.0,
        plunge=plunge,
        azimuth=(azimuth(slip) + turn) % 360.0,
        sinistral=estimate.slip[:, 0],
        normal=dip_slip,
        heave=dip_slip * np.cos(np.radians(batch.dip)),
        throw=dip_slip * np.sin(np.radians(batch.dip)),
        slip=slip,
        sense=sense(rake, strike, batch.dip),
        sense_prob=probability,
        normal_prob=normal_prob,
        sinistral_prob=sinistral_prob,
        crossing=estimate.crossing,
        misfit=estimate.misfit,
        rotation=item.rotation,
        least=lone,
        shares=_share_texts(item, names),
        caution=np.array(cautions(batch, estimate, names, depth[:, 0], probability, item.rotation), object),
        foot=foot,
        hanging=hanging,
        depth=depth,
        sd=_spread_out(item.solved, item.shares.piercing_sd, (2,)),
        median=_percentiles(item, "median", turn),
        low=_percentiles(item, "low", turn),
        high=_percentiles(item, "high", turn),
        region=region,
    )


def _clouds(item, foot):
    """Map region round the tip, and the probabilities of the two senses, spread over all rows."""
    if item.intervals is None:
        nothing = np.full(len(foot), np.nan)
        return np.full((len(foot), 1, 2), np.nan), nothing, nothing
    outline = item.intervals.region
    region = _spread_out(item.solved, outline + foot[item.solved, None, :2], outline.shape[1:])
    return region, _spread_out(item.solved, item.intervals.normal), _spread_out(item.solved, item.intervals.sinistral)


def _stack(columns):
    """Concatenate columns of several groups; dictionaries key by key, outlines of unequal length padded with nan."""
    if isinstance(columns[0], dict):
        return {key: np.concatenate([column[key] for column in columns]) for key in columns[0]}
    if columns[0].ndim == 3:
        longest = max(column.shape[1] for column in columns)
        columns = [
            np.pad(column, ((0, 0), (0, longest - column.shape[1]), (0, 0)), constant_values=np.nan) for column in columns
        ]
    return np.concatenate(columns)


def _take(column, order):
    if isinstance(column, dict):
        return {key: values[order] for key, values in column.items()}
    return column[order]


def slip_rows(solved, faults, cutoffs, ground, true_minus_grid):
    """`SlipRows` of all groups, ordered by fault and then along its strike.

    Parameters: list of `Solved`; the fault and cutoff tables; `ground` elevation function or None; `true_minus_grid`
    ``(f,)`` degrees to add to a grid azimuth for the true one.
    """
    parts = [_slips_of(item, faults, cutoffs, ground, true_minus_grid) for item in solved]
    joined = SlipRows(*(_stack(list(columns)) for columns in zip(*parts)))
    station = np.concatenate([dot(item.batch.centre, item.batch.axes[:, 0]) for item in solved])
    order = np.lexsort([station, joined.fault])
    return SlipRows(*(_take(column, order) for column in joined))


def separation_rows(solved, cutoffs):
    """`SeparationRows` of every matched marker, once each; residuals only of whole-fault solutions with markers to spare."""
    parts = []
    for item in solved:
        apart, group = item.separations, item.group
        strike, dip = np.broadcast_to(item.batch.strike[:, None], group.foot.shape), item.batch.dip[:, None]
        words = apparent_sense(apart.strike, apart.dip, strike, dip)
        spare = degrees_of_freedom(item.estimate)[:, None] > 0
        columns = (apart.strike, apart.dip, apart.across, apart.least, apart.cutoff_rake, words)
        residual = np.where(spare, item.estimate.residual, np.nan)
        flat = [np.asarray(column).ravel() for column in (group.hanging, group.foot, *columns, residual)]
        parts.append(flat)
    joined = SeparationRows(*(np.concatenate(columns) for columns in zip(*parts)))
    _, first = np.unique(joined.hanging, return_index=True)
    order = first[np.argsort(cutoffs.fault[joined.hanging[first]], kind="stable")]
    return SeparationRows(*(column[order] for column in joined))
