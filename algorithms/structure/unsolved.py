"""Markers and faults that the cutoffs do not solve, each with its reason and what to do."""

import numpy as np

from .cutoffs import problem_at
from .estimate import usable

NO_ATTITUDE = (
    "marker has no attitude: only its strike separation is known",
    "give its contacts strike and dip, measured near the fault",
)
PARALLEL_TO_FAULT = (
    "marker lies parallel to the fault: it has no cutoff line",
    "check both attitudes; a marker that the fault follows says nothing of the slip",
)
PARALLEL_CUTOFFS = (
    "all cutoff lines are parallel: only the separation across them is known",
    "map a marker of another attitude on both sides, or measure the rake of slickenlines",
)
ONE_MARKER = (
    "one usable marker only: separations, but no net slip",
    "map a second marker of another attitude on both sides, or measure the rake of slickenlines",
)
NO_MARKER = (
    "no usable marker: no net slip",
    "give markers that are cut on both sides a strike and a dip",
)


def unsolved_problems(solved, faults, cutoffs):
    """A `Problem` for every marker that says nothing and every fault without a net slip.

    Parameters: a list of `Solved` with the fault and cutoff tables that it came from.
    """
    problems = []
    for item in solved:
        given = item.batch.given()
        cut = usable(item.batch.hanging) & usable(item.batch.foot)
        rows = item.group.hanging
        problems += [problem_at(cutoffs, faults, row, *NO_ATTITUDE) for row in rows[~given]]
        problems += [problem_at(cutoffs, faults, row, *PARALLEL_TO_FAULT) for row in rows[given & ~cut]]
        for number in np.flatnonzero(~item.solved):
            count = cut[number].sum()
            why = (NO_MARKER, ONE_MARKER)[count] if count < 2 else PARALLEL_CUTOFFS
            first = np.argmax(cut[number])
            problems.append(problem_at(cutoffs, faults, rows[number, first], *why))
    return problems
