"""From a cutoff table to net slips: which markers go into one solution, in batches of equal size."""

from typing import NamedTuple

import numpy as np

from .attitudes import along_strike, dot
from .batch import Errors, gather
from .estimate import Estimate, PARALLEL, solve
from .matching import match
from .problems import NothingToSolve, never_cancelled
from .sensitivity import Shares, shares
from .separations import Separations, separations
from .uncertainty import Intervals, intervals


class Options(NamedTuple):
    """How to solve: angular errors in degrees, Monte Carlo samples (0: no intervals) and seed.

    `pairs`: one solution for each pair of neighbouring markers along the fault, instead of one for each fault.
    `per_block`: each wall's own attitudes, instead of attitudes shared by both blocks.
    """

    fault_error: float = 2.0
    rake_error: float = 5.0
    samples: int = 1000
    seed: int = 1
    pairs: bool = False
    per_block: bool = False


class Group(NamedTuple):
    """Solutions of k markers each: fault ``(s,)`` and rows of the cutoff table for either wall ``(s, k)``."""

    fault: np.ndarray
    hanging: np.ndarray
    foot: np.ndarray


class Solved(NamedTuple):
    """A group with everything that was found out about it. `intervals` is None without samples or solutions.

    `solved` masks the solutions with a net slip; `intervals` and `shares` have rows for those only. `separations`
    belong to the group's markers with shared attitudes; `rotation` ``(s,)`` degrees by which the hanging wall's cutoff
    lines are turned against the footwall's about the fault's pole, nan unless the walls have their own attitudes.
    """

    group: Group
    batch: object
    estimate: Estimate
    separations: Separations
    solved: np.ndarray
    intervals: Intervals
    shares: Shares
    rotation: np.ndarray


def solve_cutoffs(faults, cutoffs, options, report=never_cancelled):
    """Match the cutoffs and solve every fault that has a marker on both sides.

    Returns a list of `Solved`, the state of every cutoff, and a list of `Problem`.
    Raises `NothingToSolve` when no marker is matched.
    """
    matches, state, problems = match(cutoffs, faults)
    if not len(matches.hanging):
        raise NothingToSolve(_why_nothing(problems))
    order = _along_faults(faults, cutoffs, matches)
    hanging, foot = matches.hanging[order], matches.foot[order]
    groups = _pairs(cutoffs, hanging, foot) if options.pairs else _whole_faults(cutoffs, hanging, foot)
    rng = np.random.default_rng(options.seed)
    total = sum(len(group.fault) for group in groups)
    solved, done = [], 0
    for group in groups:
        share = len(group.fault) / total
        solved += _solve_group(faults, cutoffs, group, options, rng, lambda f, d=done, s=share: report(d + s * f))
        done += share
    return solved, state, problems


def _why_nothing(problems):
    if not problems:
        return "no contact ends on any fault: check the search distance and that the layers cover the same ground"
    first = problems[0]
    return f"no marker is cut on both sides of a fault (fault {first.fault}, marker {first.marker}: {first.reason})"


def _along_faults(faults, cutoffs, matches):
    """Order of the matched markers: by fault, then along its strike."""
    fault = cutoffs.fault[matches.hanging]
    middle = (cutoffs.xyz[matches.hanging] + cutoffs.xyz[matches.foot]) / 2
    return np.lexsort([dot(middle, along_strike(faults.strike[fault])), fault])


def _whole_faults(cutoffs, hanging, foot):
    """One solution for each fault, grouped by its number of markers."""
    fault, start, size = np.unique(cutoffs.fault[hanging], return_index=True, return_counts=True)
    groups = []
    for k in np.unique(size):
        rows = start[size == k][:, None] + np.arange(k)
        groups.append(Group(fault[size == k], hanging[rows], foot[rows]))
    return groups


def _pairs(cutoffs, hanging, foot):
    """One solution for each pair of neighbours along a fault; a lone marker stays alone."""
    fault = cutoffs.fault[hanging]
    next_same = np.flatnonzero(fault[:-1] == fault[1:])
    rows = next_same[:, None] + np.arange(2)
    groups = [Group(fault[rows[:, 0]], hanging[rows], foot[rows])] if len(rows) else []
    alone = np.setdiff1d(np.arange(len(fault)), rows.ravel())
    if len(alone):
        groups.append(Group(fault[alone], hanging[alone][:, None], foot[alone][:, None]))
    return groups


def _solve_group(faults, cutoffs, group, options, rng, report):
    """Solve a group; per block only where the cutoff lines cross, the rest with shared attitudes."""
    errors = Errors(options.fault_error, options.rake_error)
    shared = gather(faults, cutoffs, *group, errors, shared=True)
    apart = separations(shared)
    estimate = solve(shared)
    if not options.per_block:
        return [_finish(group, shared, estimate, apart, options, rng, report)]
    crossing = estimate.crossing >= PARALLEL
    results = []
    for own, rows in ((True, crossing), (False, ~crossing)):
        if rows.any():
            part = Group(*(column[rows] for column in group))
            batch = gather(faults, cutoffs, *part, errors, shared=not own)
            local = Separations(*(column[rows] for column in apart))
            results.append(_finish(part, batch, solve(batch), local, options, rng, report))
    return results


def _finish(group, batch, estimate, apart, options, rng, report):
    solved = ~np.isnan(estimate.slip[:, 0])
    part, fixed = batch.part(solved), Estimate(*(column[solved] for column in estimate))
    spread = intervals(part, fixed, options.samples, rng, report) if options.samples and solved.any() else None
    return Solved(group, batch, estimate, apart, solved, spread, shares(part, fixed), _rotation(batch, estimate))


def _rotation(batch, estimate):
    """Mean turn of the hanging wall's cutoff lines against the footwall's, degrees, positive from strike down dip."""
    if batch.shared:
        return np.full(len(batch.dip), np.nan)
    turn = _direction(batch.hanging) - _direction(batch.foot)
    turn = np.where(estimate.weight_hanging > 0, (turn + 90.0) % 180.0 - 90.0, np.nan)
    return np.nanmean(turn, axis=1)


def _direction(wall):
    return np.degrees(np.arctan2(wall.pole[..., 1], wall.pole[..., 0]))
