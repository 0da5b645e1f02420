"""What a reader must know beside a number: cautions in words, and the marker that does not fit."""

import numpy as np

from .estimate import solve
from .senses import VERTICAL, compass_letters

SHARP_CROSSING = 15.0  # degrees
UNCERTAIN_SENSE = 0.95
DEEP = 3.0  # depth of the piercing points against the spread of the cutoffs along the fault
BLOCKS_DIFFER = 3.0  # standard deviations between a marker's attitudes in the two blocks
STRIAE_DIFFER = 20.0  # degrees between slickenlines and the slip from markers
ONE_PERCENT = 2.326  # standard normal deviate exceeded by 1 %


def critical_misfit(freedom):
    """Chi-square per degree of freedom that chance exceeds in 1 % of cases (Wilson & Hilferty 1931)."""
    spread = 2.0 / (9.0 * np.maximum(freedom, 1))
    return (1.0 - spread + ONE_PERCENT * np.sqrt(spread)) ** 3


def degrees_of_freedom(estimate):
    """Markers in excess of those needed, ``(s,)``."""
    return (estimate.weight_hanging > 0).sum(axis=1) - np.where(estimate.by_lineation, 1, 2)


def misfits(batch, estimate, names):
    """A caution for every solution whose markers disagree, naming the one to check where that can be told.

    With one marker too many all disagree alike; with more, the one is named without which the rest agree best.
    """
    freedom = degrees_of_freedom(estimate)
    bad = np.flatnonzero(estimate.misfit > critical_misfit(freedom))
    texts = {row: f"markers disagree (misfit {estimate.misfit[row]:.1f}): check their correlation" for row in bad}
    several = bad[freedom[bad] >= 2]
    if len(several):
        without, left = _left_out(batch.part(several), estimate.weight_hanging[several] > 0)
        for row, best, slip in zip(several, without, left):
            texts[row] = (
                f"markers disagree (misfit {estimate.misfit[row]:.1f}): '{names[row][best]}' does not fit, residual "
                f"{estimate.residual[row, best]:.0f} m; without it {slip:.0f} m"
            )
    return texts


def _left_out(batch, use):
    """For each solution the marker whose absence lowers the misfit most, and the net slip without it."""
    misfit, slip = [], []
    for marker in range(use.shape[1]):
        fewer = use.copy()
        fewer[:, marker] = False
        found = solve(batch, fewer)
        misfit.append(np.where(use[:, marker], found.misfit, np.inf))
        slip.append(np.hypot(*found.slip.T))
    best = np.argmin(np.nan_to_num(misfit, nan=np.inf), axis=0)
    return best, np.array(slip)[best, np.arange(len(best))]


def _says(mask, text):
    """{row: text of the row} where the mask holds."""
    return {row: text(row) for row in np.flatnonzero(mask)}


def cautions(batch, estimate, names, depth, sense_prob, rotation):
    """Cautions of every solution, a list of texts joined by '; '.

    Parameters: marker `names` ``(s, k)``; `depth` ``(s,)`` metres of the piercing points below ground; `sense_prob`
    and `rotation` ``(s,)`` as in the results, nan where unknown.
    """
    found = [
        _says(batch.dip_spread > 0, lambda r: f"dip assumed {batch.dip[r]:.0f} +- {batch.dip_spread[r]:.0f} degrees"),
        _says(estimate.crossing < SHARP_CROSSING, lambda r: f"cutoffs cross at only {estimate.crossing[r]:.0f} degrees"),
        misfits(batch, estimate, names),
        _far_piercing(batch, estimate, depth),
        _says(sense_prob < UNCERTAIN_SENSE, lambda r: f"sense uncertain (probability {sense_prob[r]:.2f})"),
        _blocks_differ(batch, estimate, names),
        _says(np.abs(rotation) > 0, lambda r: f"cutoffs turned by {rotation[r]:.0f} degrees: slip holds at the piercing points"),
        _striae_differ(batch, estimate),
        _vertical(batch, estimate),
        _off_plane(batch),
    ]
    return ["; ".join(texts[row] for texts in found if row in texts) for row in range(len(batch.dip))]


def _spread(batch):
    points = np.concatenate([batch.hanging.point, batch.foot.point], axis=1)
    return points[..., 0].max(axis=1) - points[..., 0].min(axis=1), np.abs(points[..., 2]).max(axis=1)


def _far_piercing(batch, estimate, depth):
    spread, _ = _spread(batch)
    far = (np.abs(depth) > DEEP * spread) & ~estimate.by_lineation
    return _says(far, lambda r: f"piercing points {abs(depth[r]):.0f} m {'below' if depth[r] > 0 else 'above'} ground")


def _off_plane(batch):
    """Cutoffs off the mean fault plane by more than a tenth of their spread: a bent fault is not one plane."""
    spread, off = _spread(batch)
    return _says(off > 0.1 * spread, lambda r: f"cutoffs up to {off[r]:.0f} m off the mean fault plane")


def _blocks_differ(batch, estimate, names):
    """Attitudes of one marker that differ between the blocks by more than their errors, where they were pooled."""
    differ = (batch.apart > BLOCKS_DIFFER) & (estimate.weight_hanging > 0) & batch.shared
    worst = np.argmax(np.where(differ, batch.apart, -1.0), axis=1)
    return _says(
        differ.any(axis=1),
        lambda r: f"attitudes of '{names[r][worst[r]]}' differ between the blocks by {batch.apart[r, worst[r]]:.1f} times "
        "their error: a rotation? try per_block",
    )


def _striae_differ(batch, estimate):
    slip_rake = np.degrees(np.arctan2(estimate.slip[:, 1], estimate.slip[:, 0]))
    apart = np.abs((slip_rake - batch.rake + 90.0) % 180.0 - 90.0)
    return _says((apart > STRIAE_DIFFER) & ~estimate.by_lineation, lambda r: f"slickenlines {apart[r]:.0f} degrees off this slip")


def _vertical(batch, estimate):
    """The block that went down on a vertical fault, which has no hanging wall."""
    throw = estimate.slip[:, 1] * np.sin(np.radians(batch.dip))
    side = compass_letters(batch.strike + np.where(throw > 0, 90.0, 270.0))
    return _says(
        (batch.dip >= VERTICAL) & ~np.isnan(throw),
        lambda r: f"vertical fault: 'hanging wall' is its {compass_letters(batch.strike[r] + 90.0)} block; {side[r]} block down",
    )
