"""Cutoff lines as they are drawn: from the outcrop to past the piercing point, with their angles."""

from typing import NamedTuple

import numpy as np

from .attitudes import cutoff_direction, dot, down_dip, pole, rake_down, trend_plunge, unit

PAST = 1.1  # of the way to the piercing point


class CutoffLines(NamedTuple):
    """Lines of a cutoff table, c rows: `end` ``(c, 3)`` in metres; `trend`, `plunge`, `rake` (0-180 down from the
    fault's strike) in degrees, trends from grid north, nan without an attitude; `off_plane` ``(c,)`` metres of the
    cutoff point from its fault's mean plane, positive on the pole's side.
    """

    end: np.ndarray
    trend: np.ndarray
    plunge: np.ndarray
    rake: np.ndarray
    off_plane: np.ndarray


def cutoff_lines(faults, cutoffs, length, solved=()):
    """Lines along which the markers of a cutoff table meet their faults.

    Parameters: `length` metres of a line that has no piercing point to reach; `solved` a list of `Solved`.
    A marker without an attitude is drawn straight down the fault's dip, without angles.
    """
    strike, dip = faults.strike[cutoffs.fault], faults.dip[cutoffs.fault]
    fault_pole = pole(strike, dip)
    marker_pole = pole(np.where(cutoffs.dip == 0, np.nan_to_num(cutoffs.strike), cutoffs.strike), cutoffs.dip)
    direction = cutoff_direction(marker_pole, fault_pole)
    trend, plunge = trend_plunge(direction)
    way = np.where(np.isnan(direction), down_dip(strike, dip), direction)
    return CutoffLines(
        end=cutoffs.xyz + way * _lengths(cutoffs, way, length, solved)[:, None],
        trend=trend,
        plunge=plunge,
        rake=rake_down(direction, strike, dip),
        off_plane=_off_plane(cutoffs, fault_pole),
    )


def _off_plane(cutoffs, fault_pole):
    """Distance of each cutoff from the plane through the middle of its fault's cutoffs."""
    count = np.bincount(cutoffs.fault)[:, None]
    total = np.zeros((len(count), 3))
    np.add.at(total, cutoffs.fault, cutoffs.xyz)
    middle = total / np.maximum(count, 1)
    return dot(cutoffs.xyz - middle[cutoffs.fault], fault_pole)


def _lengths(cutoffs, way, length, solved):
    """Signed length of each line along its direction: as far as its farthest piercing point, else `length`."""
    reach = np.zeros(len(cutoffs.fault))
    for item in solved:
        axes, estimate = item.batch.axes, item.estimate
        for rows, target in ((item.group.hanging, estimate.hanging), (item.group.foot, estimate.foot)):
            point = item.batch.centre + np.einsum("sa,sai->si", target, axes[:, :2])
            along = dot(point[:, None] - cutoffs.xyz[rows], unit(way[rows]))
            farther = np.abs(np.nan_to_num(along)) > np.abs(reach[rows])
            reach[rows[farther]] = along[farther] * PAST
    return np.where(np.abs(reach) > length, reach, np.where(reach < 0, -length, length))
