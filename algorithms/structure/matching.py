"""Which cutoff in the hanging wall belongs to which in the footwall."""

from typing import NamedTuple

import numpy as np

from .cutoffs import problem_at
from .graph import group_numbers


class Matches(NamedTuple):
    """Markers with one cutoff on each wall of a fault: rows of the cutoff table, arrays ``(k,)``."""

    hanging: np.ndarray
    foot: np.ndarray


MATCHED, ONE_SIDE, AMBIGUOUS = "matched", "one side only", "ambiguous"


def match(cutoffs, faults):
    """Match cutoffs one to one by fault and marker; nothing is guessed.

    Returns `Matches` ordered by fault, the state of every cutoff ('matched', 'one side only', 'ambiguous') and a list
    of `Problem` for the rest.
    """
    if not len(cutoffs.fault):
        return Matches(np.zeros(0, int), np.zeros(0, int)), np.zeros(0, "U13"), []
    group = group_numbers(cutoffs.fault, cutoffs.marker)
    count = group.max() + 1
    hanging = np.bincount(group[cutoffs.hanging], minlength=count)
    foot = np.bincount(group[~cutoffs.hanging], minlength=count)
    state = np.where((hanging == 1) & (foot == 1), MATCHED, np.where((hanging == 0) | (foot == 0), ONE_SIDE, AMBIGUOUS))
    row = np.full((2, count), -1)
    row[cutoffs.hanging.astype(int), group] = np.arange(len(group))
    matched = state == MATCHED
    problems = _unmatched(cutoffs, faults, state[group], hanging[group], foot[group])
    return Matches(row[1, matched], row[0, matched]), state[group], problems


def _unmatched(cutoffs, faults, state, hanging, foot):
    problems = []
    for row in np.flatnonzero(state != MATCHED):
        if state[row] == ONE_SIDE:
            wall = "hanging wall" if cutoffs.hanging[row] else "footwall"
            reason = f"marker cut in the {wall} only"
            advice = "look for its continuation on the other side and give both the same marker name"
        else:
            reason = f"ambiguous match: {hanging[row]} cutoffs in the hanging wall, {foot[row]} in the footwall"
            advice = "give contacts that are not the same marker, or not the same limb, different marker names"
        problems.append(problem_at(cutoffs, faults, row, reason, advice))
    return problems
